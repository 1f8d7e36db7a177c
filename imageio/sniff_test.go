package imageio

import (
	"path/filepath"
	"strings"
	"testing"
)

// The files were written by astropy, numpy, tifffile and Pillow (testdata/make.py,
// fits/testdata/make.py).
func TestSniffFiles(t *testing.T) {
	tests := []struct {
		pattern string
		want    Format
	}{
		{"fits/testdata/*.fits", FITS},
		{"fits/testdata/*.gz", Gzip},
		{"testdata/[^b]*.tif", TIFF},
		{"testdata/bigtiff.tif", BigTIFF},
		{"testdata/*.png", PNG},
		{"testdata/*.npy", NPY},
		{"testdata/*.npz", NPZ},
		{"testdata/*.py", Text},
	}
	for _, tt := range tests {
		names, err := filepath.Glob(tt.pattern)
		if err != nil || len(names) == 0 {
			t.Fatalf("%s: no files", tt.pattern)
		}
		for _, name := range names {
			if got := Sniff(fixture(t, name)[:32]); got != tt.want {
				t.Errorf("%s is %s, want %s", name, got, tt.want)
			}
		}
	}
}

func TestSniff(t *testing.T) {
	tests := []struct {
		start string
		want  Format
	}{
		{"", Empty},
		{"\x00\x00\x00", Zeros},
		{"shot,tof\r\n1,2\t\n", Text},
		{strings.Repeat("a", 511) + "\xc2", Text}, // cut inside µ
		{"SIMP", Text},
		{"\xa5\x07\x01", Unknown},
		{"\x89HDF\r\n\x1a\n", HDF5},
		{"\xff\xd8\xff\xe0", JPEG},
		{"BM\x36\x00", BMP},
	}
	for _, tt := range tests {
		if got := Sniff([]byte(tt.start)); got != tt.want {
			t.Errorf("%q is %s, want %s", tt.start, got, tt.want)
		}
	}
}

func TestStem(t *testing.T) {
	tests := []struct{ file, ending, stem string }{
		{"a/shot_1.fits", ".fits", "a/shot_1"},
		{"shot_1.FITS.GZ", ".FITS.GZ", "shot_1"},
		{"shot.1.tif", ".tif", "shot.1"},
		{"shot_1.raw", "", "shot_1"},
		{"shot_1", "", "shot_1"},
		{"a.b/shot", "", "a.b/shot"},
		{"notes.gz", "", "notes"},
	}
	for _, tt := range tests {
		if e, s := ending(tt.file), stem(tt.file); e != tt.ending || s != tt.stem {
			t.Errorf("%s: ending %q, stem %q, want %q, %q", tt.file, e, s, tt.ending, tt.stem)
		}
	}
}
