package imageio

import (
	"bytes"
	"errors"
	"maps"
	"path/filepath"
	"regexp"
	"runtime"
	"testing"

	"fallshadow/imageio/fault"
)

// A finished file is whole; cut anywhere, it is truncated as soon as its type shows. Only
// padding and what a format lets a reader ignore may be missing.
func TestWhole(t *testing.T) {
	tests := []struct {
		file     string
		from, to int // cuts that show as truncated
	}{
		{"fits/testdata/unsigned16.fits", 9, 2880 + 210},
		{"fits/testdata/extensions.fits", 2880 + 8, 2880 + 800},
		{"fits/testdata/unsigned16.fits.gz", 18, 0},
		{"testdata/grey16.png", 8, 0},
		{"testdata/little.tif", 4, 0},
		{"testdata/pages.tif", 4, 160},
		{"testdata/cube.npy", 8, 0},
		{"testdata/named.npz", 4, 0},
	}
	for _, tt := range tests {
		if err := Whole(tt.file); err != nil {
			t.Error(err)
		}
		b := fixture(t, tt.file)
		to := tt.to
		if to == 0 {
			to = len(b)
		}
		for cut := tt.from; cut < to; cut++ {
			_, err := open(bytes.NewReader(b[:cut]), int64(cut))
			if !errors.Is(err, fault.Truncated) {
				t.Fatalf("%s cut to %d of %d bytes: %v", tt.file, cut, len(b), err)
			}
		}
	}
	if err := Whole("testdata"); !errors.Is(err, fault.Unsupported) {
		t.Errorf("a folder: %v", err)
	}
	if err := Whole("testdata/none.fits"); err == nil || err.Error() != "testdata/none.fits: no such file or directory" {
		t.Errorf("no file: %v", err)
	}
}

func FuzzOpen(f *testing.F) {
	for _, pattern := range []string{"testdata/*.png", "testdata/*.npz", "testdata/p*.tif", "fits/testdata/[ceg]*.fits", "fits/testdata/*.gz"} {
		names, err := filepath.Glob(pattern)
		if err != nil || len(names) == 0 {
			f.Fatal("no seeds")
		}
		for _, name := range names {
			f.Add(fixture(f, name))
		}
	}
	f.Fuzz(func(t *testing.T, b []byte) {
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		c, err := open(bytes.NewReader(b), int64(len(b)))
		runtime.ReadMemStats(&after)
		if used := after.TotalAlloc - before.TotalAlloc; used > 32<<20+uint64(len(b))*5000 {
			t.Fatalf("%d bytes allocated for a file of %d", used, len(b))
		}
		known := errors.Is(err, fault.Truncated) || errors.Is(err, fault.Broken) || errors.Is(err, fault.Unsupported)
		if err != nil {
			if !known {
				t.Fatalf("error of no kind: %v", err)
			}
			return
		}
		for _, s := range c.stacks {
			if s.width*s.height > 1<<17+len(b)*5000 {
				t.Fatalf("%d x %d pixels in %d bytes", s.width, s.height, len(b))
			}
			pix := make([]float32, s.width*s.height)
			for p := range min(s.planes, 4) {
				if _, err := s.read(p, pix); err != nil && !errors.Is(err, fault.Truncated) && !errors.Is(err, fault.Broken) && !errors.Is(err, fault.Unsupported) {
					t.Fatalf("error of no kind: %v", err)
				}
			}
		}
	})
}

func FuzzSidecar(f *testing.F) {
	f.Add([]byte("shot,tof\n1,28\n2,30\n"), "shot_001", "b/shot_1", `(?P<shot>\d+)`)
	f.Add([]byte("\ufeffname;tof\nshot_1.fits;\"2\n8\"\n"), "shot_1", "20260101_120501_7", "")
	f.Add([]byte("n,TOF\n1,11\n15,99\n"), "scan_1_tof15", "scan_2_d1.5", `tof(?P<tof>\d+)`)
	f.Fuzz(func(t *testing.T, table []byte, one, two, pattern string) {
		side, err := parseSidecar(table, "")
		if err != nil {
			return
		}
		re, err := expression("pattern", pattern)
		if err != nil {
			return
		}
		for _, row := range side.rows {
			if got := given(side, re, row.key); !maps.Equal(got[0].Meta, row.cells) {
				t.Fatalf("row %q: %v, want %v", row.key, got, row.cells)
			}
		}
		const mark = "row\n" // in no header
		for _, row := range side.rows {
			row.cells[mark] = row.key
		}
		shots := given(side, re, one, two)
		for i, s := range shots {
			row, ok := s.Meta[mark]
			if ok && (s.Problem != nil || one != two && shots[1-i].Meta[mark] == row) {
				t.Fatalf("%q, %q: row %q serves %q in spite of %v", one, two, row, s.Name, s.Problem)
			}
		}
	})
}

// given returns shots of the names, a file each, with their rows.
func given(side *sidecar, pattern *regexp.Regexp, names ...string) []Shot {
	shots := make([]Shot, len(names))
	for i, name := range names {
		shots[i] = Shot{Name: name, Files: []ShotFile{{name + ".fits", Unused}}}
	}
	side.assign(shots, pattern)
	return shots
}
