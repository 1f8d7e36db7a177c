package tiff

import (
	"bytes"
	"encoding/binary"
	"errors"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"

	"fallshadow/imageio/fault"
)

// fixture reads a file that ../testdata/make.py wrote with tifffile 2023.2.3 or Pillow 9.4.0.
func fixture(t testing.TB, name string) []byte {
	t.Helper()
	b, err := os.ReadFile("../testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func openBytes(b []byte) (*File, error) { return Open(bytes.NewReader(b), int64(len(b))) }

func ramp(p, y, x int) float32 { return float32(20000*p + 1000*y + 13*x) }

func eight(_, y, x int) float32 { return float32((21*x + 7*y) % 256) }

func TestPagesAgainstOtherLibraries(t *testing.T) {
	tests := []struct {
		file  string
		first int // plane of the first page
		pages int
		want  func(p, y, x int) float32
	}{
		{"little.tif", 1, 1, ramp},
		{"big.tif", 1, 1, ramp},
		{"strips.tif", 1, 1, ramp},
		{"tiles.tif", 1, 1, ramp},
		{"miniswhite.tif", 1, 1, ramp},
		{"lzw.tif", 1, 1, ramp},
		{"deflate.tif", 1, 1, ramp},
		{"packbits.tif", 1, 1, ramp},
		{"thumbnail.tif", 1, 1, ramp},
		{"eight.tif", 0, 1, eight},
		{"pages.tif", 0, 3, ramp},
		{"sizes.tif", 0, 3, ramp},
	}
	for _, tt := range tests {
		t.Run(tt.file, func(t *testing.T) {
			f, err := openBytes(fixture(t, tt.file))
			if err != nil {
				t.Fatal(err)
			}
			if len(f.Pages) != tt.pages {
				t.Fatalf("%d pages, want %d", len(f.Pages), tt.pages)
			}
			for i, p := range f.Pages {
				height := 18
				if tt.file == "sizes.tif" {
					height -= 2 * i
				}
				if p.Width != 20 || p.Height != height {
					t.Fatalf("page %d has %d x %d pixels", i, p.Width, p.Height)
				}
				pix := make([]float32, p.Width*p.Height)
				if err := p.Read(pix); err != nil {
					t.Fatal(err)
				}
				for k, v := range pix {
					if want := tt.want(tt.first+i, k/20, k%20); v != want {
						t.Fatalf("page %d, pixel %d = %v, want %v", i, k, v, want)
					}
				}
			}
		})
	}
}

func TestTags(t *testing.T) {
	f, err := openBytes(fixture(t, "pages.tif"))
	if err != nil {
		t.Fatal(err)
	}
	if got, want := f.Pages[0].Tags["ImageDescription"], "tof = 12.5\nscan: 3"; got != want {
		t.Errorf("description %q, want %q", got, want)
	}
}

// with returns little.tif with the first value of a tag changed.
func with(t testing.TB, tag uint16, value uint32) []byte {
	b := fixture(t, "little.tif")
	le := binary.LittleEndian
	at := le.Uint32(b[4:])
	for i := range uint32(le.Uint16(b[at:])) {
		e := b[at+2+12*i:]
		if le.Uint16(e) != tag {
			continue
		}
		le.PutUint16(e[2:], 4)
		le.PutUint32(e[8:], value)
		return b
	}
	t.Fatalf("little.tif has no tag %d", tag)
	return nil
}

func broken(t testing.TB) []struct {
	name string
	data []byte
	is   error
	want string
} {
	little := fixture(t, "little.tif")
	link := func(at uint32) []byte {
		b := bytes.Clone(little)
		binary.LittleEndian.PutUint32(b[4:], at)
		return b
	}
	loop := bytes.Clone(little)
	le := binary.LittleEndian
	first := le.Uint32(loop[4:])
	le.PutUint32(loop[first+2+12*uint32(le.Uint16(loop[first:])):], first)
	return []struct {
		name string
		data []byte
		is   error
		want string
	}{
		{"float32", fixture(t, "float32.tif"), fault.Unsupported, "page 1: not supported: 32-bit floating pixels (tag 339 SampleFormat = 3): save as unsigned 16-bit grey, or as FITS or NPY"},
		{"signed", fixture(t, "signed16.tif"), fault.Unsupported, "page 1: not supported: signed pixels (tag 339 SampleFormat = 2): save as unsigned 16-bit grey, or as FITS or NPY"},
		{"32 bits", fixture(t, "uint32.tif"), fault.Unsupported, "page 1: not supported: 32-bit pixels (tag 258 BitsPerSample): save as unsigned 16-bit grey, or as FITS or NPY"},
		{"12 bits packed", fixture(t, "packed12.tif"), fault.Unsupported, "page 1: not supported: 12-bit pixels (tag 258 BitsPerSample): save as unsigned 16-bit grey, or as FITS or NPY"},
		{"1 bit", fixture(t, "bilevel.tif"), fault.Unsupported, "page 1: not supported: 1-bit pixels (tag 258 BitsPerSample): save as unsigned 16-bit grey, or as FITS or NPY"},
		{"colour", fixture(t, "colour.tif"), fault.Unsupported, "page 1: not supported: 3 values a pixel (tag 277 SamplesPerPixel): save as unsigned 16-bit grey, or as FITS or NPY"},
		{"palette", with(t, 262, 3), fault.Unsupported, "page 1: not supported: colour (tag 262 PhotometricInterpretation = 3): save as unsigned 16-bit grey, or as FITS or NPY"},
		{"JPEG inside", fixture(t, "jpeg.tif"), fault.Unsupported, "page 1: not supported: compression 7 (tag 259): save without compression, with LZW or deflate"},
		{"BigTIFF", fixture(t, "bigtiff.tif"), fault.Unsupported, "not supported: BigTIFF: save as a classic TIFF below 4 GB, FITS or NPY"},
		{"not TIFF", []byte("GIF89a, and more"), fault.Broken, `broken: not TIFF: starts with "GIF8"`},
		{"cut in the head", little[:6], fault.Truncated, "truncated: the file ends inside its first 8 bytes"},
		{"no page yet", link(0), fault.Truncated, "truncated: the first page is not written yet"},
		{"page beyond the end", link(100000), fault.Truncated, "page 1: truncated: the file ends before the directory at byte 100000"},
		{"directory cut", little[:60], fault.Truncated, "page 1: truncated: the directory at byte 8 has 12 entries, the file ends before"},
		{"pixels cut", little[:800], fault.Truncated, "page 1: truncated: pixels up to byte 896, the file has 800"},
		{"chain in a loop", loop, fault.Broken, "broken: the chain of pages returns to byte 8"},
		{"no width", with(t, 256, 0), fault.Broken, "page 1: broken: 1 planes of 0 x 18 pixels"},
		{"60000 x 60000", bigger(t, 60000, 60000), fault.Unsupported, "page 1: not supported: 60000 x 60000 x 1 pixels, the limit is 268435456"},
		{"more pixels than bytes", bigger(t, 16000, 16000), fault.Broken, "page 1: broken: strips of 720 bytes for 512000000 bytes of pixels"},
		{"more pixels than deflate can pack", packed(t), fault.Truncated, "page 1: truncated: 720 bytes cannot hold the 512000000 bytes of pixels that they declare"},
		{"strips that overlap", overlapping(t), fault.Broken, "page 1: broken: strips of 912 bytes for 1440 bytes of pixels"},
		{"too few strips", with(t, 278, 1), fault.Broken, "page 1: broken: 1 strips or tiles declared, 18 needed"},
		{"not LZW", with(t, 259, 5), fault.Broken, "broken: decoding the pixels: "},
	}
}

func bigger(t testing.TB, width, height uint32) []byte {
	b := with(t, 256, width)
	for _, tag := range []uint16{257, 278} {
		set(b, tag, height)
	}
	return b
}

// overlapping has two strips, both of which are all pixels of the file, for a picture of
// twice the height.
func overlapping(t testing.TB) []byte {
	b := with(t, 257, 36)
	le := binary.LittleEndian
	end := uint32(len(b))
	for _, v := range []uint32{176, 176, 720, 720} {
		b = le.AppendUint32(b, v)
	}
	at := le.Uint32(b[4:])
	for i := range uint32(le.Uint16(b[at:])) {
		e := b[at+2+12*i:]
		switch le.Uint16(e) {
		case 273, 279:
			le.PutUint16(e[2:], 4)
			le.PutUint32(e[4:], 2)
			le.PutUint32(e[8:], end)
			end += 8
		}
	}
	return b
}

func packed(t testing.TB) []byte {
	b := bigger(t, 16000, 16000)
	set(b, 259, 8)
	return b
}

func set(b []byte, tag uint16, value uint32) {
	le := binary.LittleEndian
	at := le.Uint32(b[4:])
	for i := range uint32(le.Uint16(b[at:])) {
		if e := b[at+2+12*i:]; le.Uint16(e) == tag {
			le.PutUint16(e[2:], 4)
			le.PutUint32(e[8:], value)
		}
	}
}

func readAll(b []byte) error {
	f, err := openBytes(b)
	if err != nil {
		return err
	}
	for _, p := range f.Pages {
		if err := p.Read(make([]float32, p.Width*p.Height)); err != nil {
			return err
		}
	}
	return nil
}

func TestBroken(t *testing.T) {
	for _, tt := range broken(t) {
		t.Run(tt.name, func(t *testing.T) {
			var before, after runtime.MemStats
			runtime.ReadMemStats(&before)
			err := readAll(tt.data)
			runtime.ReadMemStats(&after)
			if !errors.Is(err, tt.is) || err.Error() != tt.want && (!strings.HasSuffix(tt.want, ": ") || !strings.HasPrefix(err.Error(), tt.want)) {
				t.Errorf("\n got %v\nwant %v", err, tt.want)
			}
			if used := after.TotalAlloc - before.TotalAlloc; used > 4<<20 {
				t.Errorf("%d bytes allocated", used)
			}
		})
	}
}

func FuzzOpen(f *testing.F) {
	names, err := filepath.Glob("../testdata/*.tif")
	if err != nil || len(names) == 0 {
		f.Fatal("no seeds")
	}
	for _, name := range names {
		f.Add(fixture(f, filepath.Base(name)))
	}
	for _, tt := range broken(f) {
		f.Add(tt.data)
	}
	f.Fuzz(func(t *testing.T, b []byte) {
		file, err := openBytes(b)
		if err != nil {
			known := errors.Is(err, fault.Truncated) || errors.Is(err, fault.Broken) || errors.Is(err, fault.Unsupported)
			if !known {
				t.Fatalf("error of no kind: %v", err)
			}
			return
		}
		for _, p := range file.Pages {
			if p.Width*p.Height > 1<<17+1200*len(b) {
				t.Fatalf("%d x %d pixels in %d bytes", p.Width, p.Height, len(b))
			}
			if err := p.Read(make([]float32, p.Width*p.Height)); err != nil && !errors.Is(err, fault.Broken) {
				t.Fatalf("error of no kind: %v", err)
			}
		}
	})
}
