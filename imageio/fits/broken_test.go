package fits

import (
	"bytes"
	"encoding/binary"
	"errors"
	"runtime"
	"slices"
	"strings"
	"testing"

	"fallshadow/imageio/fault"
)

// build makes a file of header lines, END and data, padded to whole blocks.
func build(data int, lines ...string) []byte {
	var b bytes.Buffer
	for _, l := range append(lines, "END") {
		b.WriteString(l + strings.Repeat(" ", cardSize-len(l)))
	}
	pad(&b, ' ')
	b.Write(make([]byte, data))
	pad(&b, 0)
	return b.Bytes()
}

func mandatory() []string {
	return []string{"SIMPLE  = T", "BITPIX  = 16", "NAXIS   = 2", "NAXIS1  = 4", "NAXIS2  = 3"}
}

// picture makes a file of 4x3 16-bit pixels, with lines in the place of the mandatory ones
// of the same keyword or behind them.
func picture(lines ...string) []byte {
	all := mandatory()
	for _, l := range lines {
		i := slices.IndexFunc(mandatory(), func(old string) bool { return old[:8] == l[:8] })
		if i >= 0 {
			all[i] = l
		} else {
			all = append(all, l)
		}
	}
	return build(24, all...)
}

// without makes the same file without the line of a keyword.
func without(key string) []byte {
	return build(24, slices.DeleteFunc(mandatory(), func(l string) bool { return strings.HasPrefix(l, key) })...)
}

// readAll opens a file and decodes every picture in it.
func readAll(b []byte) error {
	f, err := Open(bytes.NewReader(b), int64(len(b)))
	if err != nil {
		return err
	}
	for _, h := range f.HDUs {
		width, height, planes, err := h.Image()
		if err != nil {
			return err
		}
		pix := make([]float32, width*height)
		for p := range planes {
			if _, err := h.Plane(p, pix); err != nil {
				return err
			}
		}
	}
	return nil
}

var broken = []struct {
	name string
	data []byte
	is   error
	want string
}{
	{"empty file", nil, fault.Truncated, "truncated: the file is empty"},
	{"cut in the first word", []byte("SIMP"), fault.Truncated, "truncated: the file ends after 4 bytes, inside the first card"},
	{"random bytes", bytes.Repeat([]byte{0xa5, 7}, 4000), fault.Broken, `broken: not FITS: starts with "\xa5\a\xa5\a\xa5\a\xa5\a\xa5" instead of SIMPLE`},
	{"text", []byte("shot,tof\n1,28\n"), fault.Broken, `broken: not FITS: starts with "shot,tof\n" instead of SIMPLE`},
	{"header cut", picture()[:300], fault.Truncated, "truncated: the header from byte 0 on has no END card (header-data unit 0)"},
	{"END missing", bytes.Replace(picture(), []byte("END"), []byte("ENT"), 1)[:2880], fault.Truncated, "truncated: the header from byte 0 on has no END card (header-data unit 0)"},
	{"header without end", append(picture()[:400], bytes.Repeat([]byte(" "), 5<<20)...), fault.Broken, "broken: no END card within 2097152 bytes of header (header-data unit 0)"},
	{"data missing", picture()[:2880], fault.Truncated, "truncated: the header declares 24 bytes of data, the file has 0 (header-data unit 0)"},
	{"data cut", picture()[:2880+23], fault.Truncated, "truncated: the header declares 24 bytes of data, the file has 23 (header-data unit 0)"},
	{"SIMPLE is F", picture("SIMPLE  = F"), fault.Broken, `broken: SIMPLE is "F", a file that follows the standard has T (header-data unit 0)`},
	{"no BITPIX", without("BITPIX"), fault.Broken, "broken: the header has no BITPIX card (header-data unit 0)"},
	{"BITPIX 17", picture("BITPIX  = 17"), fault.Broken, "broken: BITPIX is 17, not 8, 16, 32, 64, -32 or -64 (header-data unit 0)"},
	{"BITPIX 0", picture("BITPIX  = 0"), fault.Broken, "broken: BITPIX is 0, not 8, 16, 32, 64, -32 or -64 (header-data unit 0)"},
	{"BITPIX huge", picture("BITPIX  = 1000000000"), fault.Broken, "broken: BITPIX is 1000000000, not 8, 16, 32, 64, -32 or -64 (header-data unit 0)"},
	{"BITPIX text", picture("BITPIX  = 'sixteen'"), fault.Broken, `broken: BITPIX is "sixteen", not a whole number (header-data unit 0)`},
	{"no NAXIS", without("NAXIS   "), fault.Broken, "broken: the header has no NAXIS card (header-data unit 0)"},
	{"NAXIS negative", picture("NAXIS   = -2"), fault.Broken, "broken: NAXIS is -2, out of range (header-data unit 0)"},
	{"NAXIS huge", picture("NAXIS   = 2000000000"), fault.Broken, "broken: NAXIS is 2000000000, out of range (header-data unit 0)"},
	{"NAXIS real", picture("NAXIS   = 2.0"), fault.Broken, `broken: NAXIS is "2.0", not a whole number (header-data unit 0)`},
	{"NAXIS empty", picture("NAXIS   ="), fault.Broken, `broken: NAXIS is "", not a whole number (header-data unit 0)`},
	{"no NAXIS2", without("NAXIS2"), fault.Broken, "broken: the header has no NAXIS2 card (header-data unit 0)"},
	{"NAXIS1 negative", picture("NAXIS1  = -4"), fault.Broken, "broken: NAXIS1 is -4, out of range (header-data unit 0)"},
	{"NAXIS1 huge", picture("NAXIS1  = 2000000000"), fault.Truncated, "truncated: the header declares 12000000000 bytes of data, the file has 2880 (header-data unit 0)"},
	{"NAXIS1 no number", picture("NAXIS1  = NaN"), fault.Broken, `broken: NAXIS1 is "NaN", not a whole number (header-data unit 0)`},
	{"NAXIS1 beyond 64 bits", picture("NAXIS1  = 99999999999999999999"), fault.Broken, `broken: NAXIS1 is "99999999999999999999", not a whole number (header-data unit 0)`},
	{"product beyond 64 bits", picture("NAXIS   = 3", "NAXIS1  = 2000000000", "NAXIS2  = 2000000000", "NAXIS3  = 2000000000"), fault.Broken, "broken: the axes [2000000000 2000000000 2000000000] declare more bytes than a file can hold (header-data unit 0)"},
	{"BZERO text", picture("BZERO   = 'zero'"), fault.Broken, `broken: BZERO is "zero", not a number (header-data unit 0)`},
	{"BZERO NaN", picture("BZERO   = NaN"), fault.Broken, `broken: BZERO is "NaN", not a number (header-data unit 0)`},
	{"BSCALE 0", picture("BSCALE  = 0.0"), fault.Broken, "broken: BSCALE is 0, which makes all pixels equal (header-data unit 0)"},
	{"BSCALE infinite", picture("BSCALE  = 1E999"), fault.Broken, `broken: BSCALE is "1E999", not a number (header-data unit 0)`},
	{"BLANK real", picture("BLANK   = 1.5"), fault.Broken, `broken: BLANK is "1.5", not a whole number (header-data unit 0)`},
	{"PCOUNT huge", picture("PCOUNT  = 9000000000000000000"), fault.Broken, "broken: PCOUNT is 9000000000000000000, out of range (header-data unit 0)"},
	{"PCOUNT beyond the file", picture("PCOUNT  = 4000000000000"), fault.Truncated, "truncated: the header declares 8000000000024 bytes of data, the file has 2880 (header-data unit 0)"},
	{"GCOUNT negative", picture("GCOUNT  = -1"), fault.Broken, "broken: GCOUNT is -1, out of range (header-data unit 0)"},
	{"one axis", picture("NAXIS   = 1"), fault.Unsupported, "not supported: the array has one axis (NAXIS = 1), an image has two or more"},
	{"random groups", picture("NAXIS   = 3", "NAXIS1  = 0", "NAXIS2  = 4", "NAXIS3  = 3", "GROUPS  = T"), fault.Unsupported, "not supported: random groups (GROUPS = T) are no image"},
	{"extension cut in its header", append(picture(), build(0, "XTENSION= 'IMAGE'")[:90]...), fault.Truncated, "truncated: the header from byte 5760 on has no END card (header-data unit 1)"},
	{"extension without BITPIX", append(picture(), build(0, "XTENSION= 'IMAGE'")...), fault.Broken, "broken: the header has no BITPIX card (header-data unit 1)"},
	{"extension cut in its data", append(picture(), build(24, "XTENSION= 'IMAGE'", "BITPIX  = 16", "NAXIS   = 2", "NAXIS1  = 4", "NAXIS2  = 3")[:2890]...), fault.Truncated, "truncated: the header declares 24 bytes of data, the file has 10 (header-data unit 1)"},
	{"table with 2e9 rows", append(picture(), build(0, "XTENSION= 'BINTABLE'", "BITPIX  = 8", "NAXIS   = 2", "NAXIS1  = 8", "NAXIS2  = 2000000000")...), fault.Truncated, "truncated: the header declares 16000000000 bytes of data, the file has 0 (header-data unit 1)"},
	{"tile-compressed", append(picture(), build(24, "XTENSION= 'BINTABLE'", "BITPIX  = 8", "NAXIS   = 2", "NAXIS1  = 8", "NAXIS2  = 3", "ZIMAGE  = T", "ZCMPTYPE= 'GZIP_2'")...), fault.Unsupported, "not supported: the image is tile-compressed (ZIMAGE = T, ZCMPTYPE = GZIP_2); uncompress the file first"},
}

// Every broken file gets its message, and none makes the reader allocate more than a
// little beyond the headers that it may hold.
func TestBroken(t *testing.T) {
	for _, tt := range broken {
		t.Run(tt.name, func(t *testing.T) {
			var before, after runtime.MemStats
			runtime.ReadMemStats(&before)
			err := readAll(tt.data)
			runtime.ReadMemStats(&after)
			if !errors.Is(err, tt.is) {
				t.Errorf("error %v is not %v", err, tt.is)
			}
			if err != nil && err.Error() != tt.want {
				t.Errorf("\n got %s\nwant %s", err, tt.want)
			}
			if used := after.TotalAlloc - before.TotalAlloc; used > 24<<20 {
				t.Errorf("%d bytes allocated", used)
			}
		})
	}
}

// What breaks the standard without leaving a doubt is read.
func TestForgiven(t *testing.T) {
	tests := []struct {
		name  string
		lines []string
		key   string
		value string
	}{
		{"D exponent", []string{"TOF     = 1.5D1"}, "TOF", "1.5D1"},
		{"no digit before the point", []string{"TOF     = .5"}, "TOF", ".5"},
		{"not a number", []string{"TEMP    = NaN"}, "TEMP", "NaN"},
		{"date without quotes", []string{"DATE    = 2024-05-06T12:00:00"}, "DATE", "2024-05-06T12:00:00"},
		{"quote left open", []string{"NAME    = 'cloud"}, "NAME", "cloud"},
		{"no blank behind the equals sign", []string{"TOF     =28 / ms"}, "TOF", "28"},
		{"Latin-1", []string{"UNIT    = '\xb5s'"}, "UNIT", "µs"},
		{"UTF-8", []string{"UNIT    = 'µs'"}, "UNIT", "µs"},
		{"control bytes", []string{"NAME    = 'a\x00\tb'"}, "NAME", "a  b"},
		{"repeated keyword", []string{"TOF     = 1", "TOF2    = 2", "TOF     = 3"}, "TOF", "1"},
		{"CONTINUE first", []string{"CONTINUE  'lost'", "TOF     = 4"}, "TOF", "4"},
		{"CONTINUE behind a number", []string{"TOF     = 5", "CONTINUE  'lost'"}, "TOF", "5"},
		{"EXTNAME a number", []string{"EXTNAME = 5"}, "EXTNAME", "5"},
		{"BSCALE empty", []string{"BSCALE  =", "TOF     = 6"}, "TOF", "6"},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			b := picture(tt.lines...)
			binary.BigEndian.PutUint16(b[2880+22:], 77)
			f, err := Open(bytes.NewReader(b), int64(len(b)))
			if err != nil {
				t.Fatal(err)
			}
			if v, ok := f.HDUs[0].Get(tt.key); !ok || v != tt.value {
				t.Errorf("%s = %q, want %q", tt.key, v, tt.value)
			}
			pix := make([]float32, 12)
			if n, err := f.HDUs[0].Plane(0, pix); err != nil || n != 0 || pix[11] != 77 {
				t.Errorf("pixels %v, %d not finite, %v", pix, n, err)
			}
		})
	}
}

// More pixels than the limit are refused before any is read, even where all are there.
func TestTooManyPixels(t *testing.T) {
	head := build(0, "SIMPLE  = T", "BITPIX  = 8", "NAXIS   = 2", "NAXIS1  = 65536", "NAXIS2  = 65536")
	f, err := Open(sparse(head), int64(len(head))+1<<32)
	if err != nil {
		t.Fatal(err)
	}
	_, _, _, err = f.HDUs[0].Image()
	if want := "not supported: 65536 x 65536 x 1 pixels, the limit is 268435456"; err == nil || err.Error() != want {
		t.Errorf("%v, want %s", err, want)
	}
}

// sparse is a file that starts with its bytes and goes on with zeros.
type sparse []byte

func (s sparse) ReadAt(p []byte, off int64) (int, error) {
	clear(p)
	if off < int64(len(s)) {
		copy(p, s[off:])
	}
	return len(p), nil
}

func FuzzOpen(f *testing.F) {
	for _, name := range []string{"unsigned16.fits", "scaled16.fits", "float32.fits", "extensions.fits", "compressed.fits", "groups.fits", "longheader.fits"} {
		r, size := fixture(f, name)
		b := make([]byte, size)
		if _, err := r.ReadAt(b, 0); err != nil {
			f.Fatal(err)
		}
		f.Add(b)
	}
	for _, tt := range broken {
		if len(tt.data) < 1<<16 {
			f.Add(tt.data)
		}
	}
	f.Fuzz(func(t *testing.T, b []byte) {
		file, err := Open(bytes.NewReader(b), int64(len(b)))
		unknown, err2 := Open(bytes.NewReader(b), -1)
		if (err == nil) != (err2 == nil) {
			t.Fatalf("known size: %v, unknown size: %v", err, err2)
		}
		if err != nil {
			known := errors.Is(err, fault.Truncated) || errors.Is(err, fault.Broken) || errors.Is(err, fault.Unsupported)
			if !known {
				t.Fatalf("error of no kind: %v", err)
			}
			return
		}
		if len(unknown.HDUs) != len(file.HDUs) {
			t.Fatalf("%d units with known size, %d without", len(file.HDUs), len(unknown.HDUs))
		}
		for _, h := range file.HDUs {
			width, height, planes, err := h.Image()
			if err != nil || planes == 0 {
				continue
			}
			if width*height*planes > len(b) {
				t.Fatalf("%d x %d x %d pixels in %d bytes", width, height, planes, len(b))
			}
			pix := make([]float32, width*height)
			for p := range min(planes, 8) {
				if _, err := h.Plane(p, pix); err != nil {
					t.Fatal(err)
				}
			}
		}
	})
}
