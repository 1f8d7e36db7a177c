package fits

import (
	"bytes"
	"errors"
	"math"
	"os"
	"slices"
	"testing"

	"fallshadow/imageio/fault"
)

// load opens a file of testdata, which testdata/make.py wrote with astropy 5.2.1.
func load(t testing.TB, name string) *File {
	t.Helper()
	f, err := Open(fixture(t, name))
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	return f
}

func fixture(t testing.TB, name string) (*bytes.Reader, int64) {
	t.Helper()
	b, err := os.ReadFile("testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	return bytes.NewReader(b), int64(len(b))
}

func ramp(p, y, x int) float64 { return float64(1000*p + 37*y + 11*x) }

func TestPlaneAgainstAnotherImplementation(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	odd := map[[3]int]float64{{0, 0, 0}: nan, {1, 2, 3}: inf, {2, 4, 6}: -inf}
	tests := []struct {
		file      string
		unit      int
		planes    int
		want      func(p, y, x int) float64
		nonFinite int
	}{
		{"unsigned16.fits", 0, 3, func(p, y, x int) float64 { return 31000 + ramp(p, y, x) }, 0},
		{"trailing.fits", 0, 3, func(p, y, x int) float64 { return 31000 + ramp(p, y, x) }, 0},
		{"nopadding.fits", 0, 3, func(p, y, x int) float64 { return 31000 + ramp(p, y, x) }, 0},
		{"signed16.fits", 0, 3, func(p, y, x int) float64 { return ramp(p, y, x) - 1500 }, 0},
		{"unsigned8.fits", 0, 3, func(p, y, x int) float64 { return math.Mod(ramp(p, y, x), 256) }, 0},
		{"signed8.fits", 0, 3, func(p, y, x int) float64 { return math.Mod(ramp(p, y, x), 256) - 128 }, 0},
		{"signed32.fits", 0, 3, func(p, y, x int) float64 { return ramp(p, y, x)*1e5 - 1e8 }, 0},
		{"unsigned32.fits", 0, 3, func(p, y, x int) float64 { return ramp(p, y, x)*1e6 + 2e9 }, 0},
		{"signed64.fits", 0, 3, func(p, y, x int) float64 { return ramp(p, y, x) * 1e10 }, 0},
		{"float64.fits", 0, 3, func(p, y, x int) float64 { return ramp(p, y, x) / 8 }, 0},
		{"longheader.fits", 0, 3, ramp, 0},
		{"fouraxes.fits", 0, 3, ramp, 0},
		{"extensions.fits", 2, 1, func(_, y, x int) float64 { return ramp(1, y, x) }, 0},
		{"density.fits", 0, 1, func(p, y, x int) float64 { return ramp(p, y, x) / 100 }, 0},
		{"float32.fits", 0, 3, func(p, y, x int) float64 {
			if v, ok := odd[[3]int{p, y, x}]; ok {
				return v
			}
			return ramp(p, y, x) / 4
		}, 3},
		{"scaled16.fits", 0, 3, func(p, y, x int) float64 {
			if p == 1 && y == 1 && x == 1 {
				return nan
			}
			return 100 + 0.25*(ramp(p, y, x)-1000)
		}, 1},
	}
	for _, tt := range tests {
		t.Run(tt.file, func(t *testing.T) {
			h := load(t, tt.file).HDUs[tt.unit]
			width, height, planes, err := h.Image()
			if err != nil || width != 7 || height != 5 || planes != tt.planes {
				t.Fatalf("Image() = %d, %d, %d, %v", width, height, planes, err)
			}
			nonFinite := 0
			for p := range planes {
				pix := make([]float32, width*height)
				n, err := h.Plane(p, pix)
				if err != nil {
					t.Fatal(err)
				}
				nonFinite += n
				for i, v := range pix {
					want := float32(tt.want(p, i/width, i%width))
					if math.Float32bits(v) != math.Float32bits(want) && !(v != v && want != want) {
						t.Fatalf("plane %d, pixel %d = %v, want %v", p, i, v, want)
					}
				}
			}
			if nonFinite != tt.nonFinite {
				t.Errorf("%d pixels not finite, want %d", nonFinite, tt.nonFinite)
			}
		})
	}
}

func TestCardsAgainstAnotherImplementation(t *testing.T) {
	long := "000 001 002 003 004 005 006 007 008 009 010 011 012 013 014 015 016 017 018 019 " +
		"020 021 022 023 024 025 026 027 028 029 030 031 032 033 034 035 036 037 038 039 " +
		"040 041 042 043 044 045 046 047 048 049 050 051 052 053 054 055 056 057 058 059"
	tests := []struct{ key, value, comment string }{
		{"OBSERVER", "it's 5 o'clock / tea", "quotes doubled, a slash inside"},
		{"LONG", long, ""},
		{"camera sensor temperature", "-61.25", ""},
		{"ESO DET EXPTIME", "1E-05", "s"},
		{"EMPTY", "", ""},
		{"FLAG", "T", ""},
		{"CPLX", "(1.0, 2.0)", ""},
		{"KEY0299", "149.5", "one of many"},
	}
	h := load(t, "longheader.fits").HDUs[0]
	for _, tt := range tests {
		i := slices.IndexFunc(h.Cards, func(c Card) bool { return c.Key == tt.key })
		if i < 0 {
			t.Errorf("%s is missing", tt.key)
		} else if c := h.Cards[i]; c.Value != tt.value || c.Comment != tt.comment {
			t.Errorf("%s = %q / %q, want %q / %q", tt.key, c.Value, c.Comment, tt.value, tt.comment)
		}
	}
	var lines []string
	for _, c := range h.Cards {
		if c.Key == "COMMENT" || c.Key == "HISTORY" {
			lines = append(lines, c.Key+c.Comment)
		}
	}
	want := []string{"COMMENTfirst line", "COMMENTsecond line", "HISTORYmade for a test"}
	if !slices.Equal(lines, want) {
		t.Errorf("commentary %q, want %q", lines, want)
	}
}

func TestUnits(t *testing.T) {
	f := load(t, "extensions.fits")
	var names []string
	for _, h := range f.HDUs {
		names = append(names, h.Name())
	}
	if want := []string{"", "ATOMS", "LIGHT", "DARK", "CLOCK"}; !slices.Equal(names, want) {
		t.Errorf("names %q, want %q", names, want)
	}
	for i, want := range []int{0, 1, 1, 1, 0} {
		if _, _, planes, err := f.HDUs[i].Image(); planes != want || err != nil {
			t.Errorf("unit %d has %d planes, %v, want %d", i, planes, err, want)
		}
	}
	if n := load(t, "trailing.fits").Trailing; n != 24 {
		t.Errorf("%d trailing bytes, want 24", n)
	}
}

func TestUnsupported(t *testing.T) {
	tests := []struct {
		file string
		unit int
		want string
	}{
		{"compressed.fits", 1, "not supported: the image is tile-compressed (ZIMAGE = T, ZCMPTYPE = RICE_1); uncompress the file first"},
		{"oneaxis.fits", 0, "not supported: the array has one axis (NAXIS = 1), an image has two or more"},
		{"groups.fits", 0, "not supported: random groups (GROUPS = T) are no image"},
	}
	for _, tt := range tests {
		_, _, _, err := load(t, tt.file).HDUs[tt.unit].Image()
		if !errors.Is(err, fault.Unsupported) || err.Error() != tt.want {
			t.Errorf("%s: %v, want %s", tt.file, err, tt.want)
		}
	}
}

// A file whose size is not known, as behind gzip, reads the same, and one cut short
// anywhere in its header or data is called truncated.
func TestUnknownSize(t *testing.T) {
	r, size := fixture(t, "unsigned16.fits")
	if _, err := Open(r, -1); err != nil {
		t.Error(err)
	}
	whole := make([]byte, size)
	if _, err := r.ReadAt(whole, 0); err != nil {
		t.Fatal(err)
	}
	for cut := range 2880 + 2*7*5*3 {
		b := whole[:cut]
		for _, size := range []int64{-1, int64(cut)} {
			if _, err := Open(bytes.NewReader(b), size); !errors.Is(err, fault.Truncated) {
				t.Fatalf("cut to %d bytes, size %d: %v", cut, size, err)
			}
		}
	}
}
