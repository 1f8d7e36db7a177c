package imageio

import (
	"bytes"
	"os"
	"path/filepath"
	"testing"

	"fallshadow/imageio/fits"
)

// night makes a folder of the named files.
func night(t testing.TB, files map[string][]byte) string {
	t.Helper()
	dir := t.TempDir()
	for name, data := range files {
		put(t, dir, name, data)
	}
	return dir
}

func put(t testing.TB, dir, name string, data []byte) {
	t.Helper()
	full := filepath.Join(dir, filepath.FromSlash(name))
	if err := os.MkdirAll(filepath.Dir(full), 0o777); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(full, data, 0o666); err != nil {
		t.Fatal(err)
	}
}

// cube makes a FITS file of planes of 3x2 pixels: plane p holds 100 p + base, one more for
// every pixel on.
func cube(t testing.TB, base, planes int, cards ...fits.Card) []byte {
	t.Helper()
	return sized(t, 3, 2, base, planes, cards...)
}

func sized(t testing.TB, width, height, base, planes int, cards ...fits.Card) []byte {
	t.Helper()
	all := make([][]uint16, planes)
	for p := range all {
		for i := range width * height {
			all[p] = append(all[p], uint16(base+100*p+i))
		}
	}
	var b bytes.Buffer
	if err := fits.WriteCube(&b, width, height, all, cards); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func fixture(t testing.TB, path string) []byte {
	t.Helper()
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func scan(t testing.TB, dir string, layout Layout) Night {
	t.Helper()
	n, err := Scan(t.Context(), dir, layout)
	if err != nil {
		t.Fatal(err)
	}
	return n
}
