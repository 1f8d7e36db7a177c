package npy

import (
	"archive/zip"
	"bytes"
	"compress/flate"
	"errors"
	"fmt"
	"hash/crc32"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"testing"

	"fallshadow/imageio/fault"
)

// fixture reads a file that ../testdata/make.py wrote with numpy 1.24.2.
func fixture(t testing.TB, name string) []byte {
	t.Helper()
	b, err := os.ReadFile("../testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func openBytes(b []byte) ([]*Array, error) {
	if bytes.HasPrefix(b, []byte("PK")) {
		return OpenArchive(bytes.NewReader(b), int64(len(b)))
	}
	a, err := Open(bytes.NewReader(b), int64(len(b)))
	return []*Array{a}, err
}

func ramp(p, y, x int) float64 { return float64(20000*p + 1000*y + 13*x) }

func one(_, y, x int) float64 { return ramp(1, y, x) }

func eight(_, y, x int) float64 { return float64((21*x + 7*y) % 256) }

func TestArraysAgainstNumpy(t *testing.T) {
	tests := []struct {
		file      string
		planes    int
		want      func(p, y, x int) float64
		nonFinite int
	}{
		{"type_u1.npy", 1, eight, 0},
		{"type_i1.npy", 1, func(p, y, x int) float64 { return math.Floor(eight(p, y, x) / 3) }, 0},
		{"type_u2.npy", 1, one, 0},
		{"type_u2big.npy", 1, one, 0},
		{"type_i2.npy", 1, func(p, y, x int) float64 { return float64(int16(int(one(p, y, x)))) }, 0},
		{"type_u4.npy", 1, one, 0},
		{"type_i4.npy", 1, one, 0},
		{"type_u8.npy", 1, one, 0},
		{"type_i8.npy", 1, one, 0},
		{"type_f4.npy", 1, one, 0},
		{"type_f8.npy", 1, one, 0},
		{"version2.npy", 1, one, 0},
		{"cube.npy", 3, ramp, 0},
		{"fortran.npy", 3, ramp, 0},
		{"last.npy", 3, ramp, 0},
		{"fiveaxes.npy", 3, ramp, 0},
		{"packed.npz", 3, ramp, 0},
		{"nan.npy", 1, func(p, y, x int) float64 {
			if y == 2 && x == 3 {
				return math.NaN()
			}
			return one(p, y, x)
		}, 1},
	}
	for _, tt := range tests {
		t.Run(tt.file, func(t *testing.T) {
			all, err := openBytes(fixture(t, tt.file))
			if err != nil {
				t.Fatal(err)
			}
			if len(all) != 1 {
				t.Fatalf("%d arrays, want 1", len(all))
			}
			check(t, all[0], tt.planes, tt.want, tt.nonFinite)
		})
	}
}

func check(t *testing.T, a *Array, planes int, want func(p, y, x int) float64, nonFinite int) {
	t.Helper()
	if a.Width != 20 || a.Height != 18 || a.Planes != planes {
		t.Fatalf("%d planes of %d x %d pixels", a.Planes, a.Width, a.Height)
	}
	bad := 0
	for p := range planes {
		pix := make([]float32, 20*18)
		n, err := a.Read(p, pix)
		if err != nil {
			t.Fatal(err)
		}
		bad += n
		for i, v := range pix {
			w := float32(want(p, i/20, i%20))
			if v != w && !(v != v && w != w) {
				t.Fatalf("plane %d, pixel %d = %v, want %v", p, i, v, w)
			}
		}
	}
	if bad != nonFinite {
		t.Errorf("%d pixels not finite, want %d", bad, nonFinite)
	}
}

func TestNames(t *testing.T) {
	all, err := openBytes(fixture(t, "named.npz"))
	if err != nil {
		t.Fatal(err)
	}
	if len(all) != 3 {
		t.Fatalf("%d arrays", len(all))
	}
	for i, tt := range []struct {
		name  string
		plane int
	}{{"light", 1}, {"atoms", 0}, {"dark", 2}} {
		if all[i].Name != tt.name {
			t.Errorf("array %d is called %q, want %q", i, all[i].Name, tt.name)
		}
		check(t, all[i], 1, func(_, y, x int) float64 { return ramp(tt.plane, y, x) }, 0)
	}
}

// header makes an NPY file of version 1 with a dictionary and n bytes of pixels.
func header(dictionary string, n int) []byte {
	b := append([]byte("\x93NUMPY\x01\x00"), byte(len(dictionary)), byte(len(dictionary)>>8))
	return append(append(b, dictionary...), make([]byte, n)...)
}

func plain(descr, order, shape string) string {
	return fmt.Sprintf("{'descr': '%s', 'fortran_order': %s, 'shape': %s, }\n", descr, order, shape)
}

// archive packs one member with the sizes that it shall claim.
func archive(t testing.TB, name string, data []byte, change func(*zip.FileHeader)) []byte {
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	h := &zip.FileHeader{
		Name: name, CRC32: crc32.ChecksumIEEE(data),
		CompressedSize64: uint64(len(data)), UncompressedSize64: uint64(len(data)),
	}
	change(h)
	w, err := z.CreateRaw(h)
	if err == nil {
		_, err = w.Write(data)
	}
	if err == nil {
		err = z.Close()
	}
	if err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func broken(t testing.TB) []struct {
	name string
	data []byte
	is   error
	want string
} {
	cube, named := fixture(t, "cube.npy"), fixture(t, "named.npz")
	small := header(plain("<u2", "False", "(2, 2)"), 8)
	huge := header(plain("|u1", "False", "(16384, 16384)"), 0)
	var flat bytes.Buffer
	w, err := flate.NewWriter(&flat, 9)
	if err == nil {
		_, err = w.Write(cube)
	}
	if err != nil || w.Close() != nil {
		t.Fatal("deflate failed")
	}
	deflated := flat.Bytes()
	return []struct {
		name string
		data []byte
		is   error
		want string
	}{
		{"objects", fixture(t, "object.npy"), fault.Unsupported, `not supported: an array of objects (descr "|O"): save the pixels as an array of plain numbers`},
		{"complex", fixture(t, "complex.npy"), fault.Unsupported, `not supported: numbers of type "<c8": save as whole or real numbers, such as uint16 or float32`},
		{"half", fixture(t, "half.npy"), fault.Unsupported, `not supported: numbers of type "<f2": save as whole or real numbers, such as uint16 or float32`},
		{"records", fixture(t, "records.npy"), fault.Unsupported, "not supported: records of several fields: save the pixels as an array of plain numbers"},
		{"one axis", fixture(t, "line.npy"), fault.Unsupported, "not supported: an array of 1 axes [20] is no picture or stack of pictures"},
		{"no axis", fixture(t, "scalar.npy"), fault.Unsupported, "not supported: an array of 0 axes [] is no picture or stack of pictures"},
		{"nine axes", header(plain("<u2", "False", "(1,1,1,1,1,1,1,2,2)"), 8), fault.Unsupported, "not supported: an array of 9 axes [1 1 1 1 1 1 1 2 2] is no picture or stack of pictures"},
		{"four axes in Fortran order", header(plain("<u2", "True", "(1, 1, 2, 2)"), 8), fault.Unsupported, "not supported: 4 axes in Fortran order: save in C order"},
		{"cut in the head", cube[:7], fault.Truncated, "truncated: the file ends inside its first 10 bytes"},
		{"cut in the header", cube[:100], fault.Truncated, "truncated: the file ends inside its header"},
		{"cut in the pixels", cube[:2000], fault.Truncated, "truncated: the header declares 2288 bytes, the file has 2000"},
		{"not NPY", []byte("\x93NUMPIE and more"), fault.Broken, `broken: not NPY: starts with "\x93NUMPI"`},
		{"version 9", append([]byte("\x93NUMPY\x09"), cube[7:]...), fault.Unsupported, "not supported: NPY version 9.0, 1 to 3 are read"},
		{"header of 4 GB", []byte("\x93NUMPY\x02\x00\xff\xff\xff\xff{}"), fault.Broken, "broken: a header of 4294967295 bytes, the limit is 65536"},
		{"no shape", header("{'descr': '<u2', 'fortran_order': False}", 0), fault.Broken, `broken: the header "{'descr': '<u2', 'fortran_order': False}" lacks descr, fortran_order or shape`},
		{"negative shape", header(plain("<u2", "False", "(-2, 2)"), 8), fault.Broken, `broken: the header "{'descr': '<u2', 'fortran_order': False, 'shape': (-2, 2), }\n" lacks descr, fortran_order or shape`},
		{"shape of nothing", header(plain("<u2", "False", "(0, 2)"), 8), fault.Broken, "broken: 1 planes of 2 x 0 pixels"},
		{"shape beyond 32 bits", header(plain("<u2", "False", "(99999999999, 2)"), 8), fault.Broken, "broken: the shape (99999999999, 2) is too large"},
		{"60000 x 60000", header(plain("<u2", "False", "(60000, 60000)"), 8), fault.Unsupported, "not supported: 60000 x 60000 x 1 pixels, the limit is 268435456"},
		{"type unknown", header(plain("<z", "False", "(2, 2)"), 8), fault.Unsupported, `not supported: numbers of type "<z": save as whole or real numbers, such as uint16 or float32`},
		{"type nonsense", header(plain("u2<", "False", "(2, 2)"), 8), fault.Broken, `broken: numbers of type "u2<"`},
		{"archive cut", named[:2000], fault.Truncated, "truncated: the directory at the end of the archive is missing"},
		{"archive without arrays", archive(t, "a.txt", small, func(*zip.FileHeader) {}), fault.Unsupported, "not supported: an archive (zip) without .npy arrays"},
		{"archive declares less", archive(t, "a.npy", small, func(h *zip.FileHeader) { h.UncompressedSize64-- }), fault.Broken, `array "a": broken: the header declares 78 bytes, the archive 77`},
		{"archive of a small file with many pixels", archive(t, "a.npy", huge, func(h *zip.FileHeader) { h.UncompressedSize64 = 1<<28 + uint64(len(huge)) }), fault.Truncated, `array "a": truncated: 78 bytes cannot hold the 268435456 bytes of pixels that they declare`},
		{"archive that lies on its size", archive(t, "a.npy", huge, func(h *zip.FileHeader) {
			h.UncompressedSize64, h.CompressedSize64 = 1<<28+uint64(len(huge)), 1<<31
		}), fault.Truncated, `array "a": truncated: 186 bytes cannot hold the 268435456 bytes of pixels that they declare`},
		{"archive whose packing ends early", archive(t, "a.npy", deflated[:len(deflated)-9], func(h *zip.FileHeader) {
			h.UncompressedSize64, h.Method = uint64(len(cube)), zip.Deflate
		}), fault.Truncated, "truncated: the file ends inside its pixels"},
		{"archive with a wrong sum", archive(t, "a.npy", small, func(h *zip.FileHeader) { h.CRC32++ }), fault.Broken, "broken: zip: checksum error"},
		{"archive packed in an unknown way", archive(t, "a.npy", small, func(h *zip.FileHeader) { h.Method = 93 }), fault.Broken, `array "a": broken: zip: unsupported compression algorithm`},
	}
}

func readAll(b []byte) error {
	all, err := openBytes(b)
	if err != nil {
		return err
	}
	for _, a := range all {
		for p := range min(a.Planes, 4) {
			if _, err := a.Read(p, make([]float32, a.Width*a.Height)); err != nil {
				return err
			}
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
			if !errors.Is(err, tt.is) || err.Error() != tt.want {
				t.Errorf("\n got %v\nwant %v", err, tt.want)
			}
			if used := after.TotalAlloc - before.TotalAlloc; used > 4<<20 {
				t.Errorf("%d bytes allocated", used)
			}
		})
	}
}

func FuzzOpen(f *testing.F) {
	for _, pattern := range []string{"../testdata/*.npy", "../testdata/*.npz"} {
		names, err := filepath.Glob(pattern)
		if err != nil || len(names) == 0 {
			f.Fatal("no seeds")
		}
		for _, name := range names {
			f.Add(fixture(f, filepath.Base(name)))
		}
	}
	for _, tt := range broken(f) {
		f.Add(tt.data)
	}
	f.Fuzz(func(t *testing.T, b []byte) {
		err := readAll(b)
		known := errors.Is(err, fault.Truncated) || errors.Is(err, fault.Broken) || errors.Is(err, fault.Unsupported)
		if err != nil && !known {
			t.Fatalf("error of no kind: %v", err)
		}
	})
}

func BenchmarkRead1024(b *testing.B) {
	file := header(plain("<u2", "False", "(3, 1024, 1024)"), 3<<21)
	pix := make([]float32, 1<<20)
	b.SetBytes(int64(len(file)))
	for b.Loop() {
		a, err := Open(bytes.NewReader(file), int64(len(file)))
		if err != nil {
			b.Fatal(err)
		}
		for p := range 3 {
			if _, err := a.Read(p, pix); err != nil {
				b.Fatal(err)
			}
		}
	}
}
