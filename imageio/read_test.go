package imageio

import (
	"bytes"
	"compress/gzip"
	"context"
	"crypto/sha256"
	"errors"
	"math"
	"runtime"
	"slices"
	"testing"

	"fallshadow/imageio/fault"
	"fallshadow/imageio/fits"
)

// read reads the only shot of a folder.
func read(t testing.TB, dir string, layout Layout) (*Raw, error) {
	t.Helper()
	n := scan(t, dir, layout)
	if len(n.Shots) != 1 {
		t.Fatalf("%q", show(n))
	}
	return Read(t.Context(), dir, n.Shots[0], layout)
}

func TestReadRoles(t *testing.T) {
	bySuffix := map[Role]string{Atoms: "_a", Light: "_l", Dark: "_d"}
	tests := []struct {
		name   string
		layout Layout
		files  map[string][]byte
		want   map[Role]float32 // first pixel
	}{
		{"three planes", Layout{}, map[string][]byte{"s.fits": cube(t, 7, 3)}, map[Role]float32{Atoms: 7, Light: 107, Dark: 207}},
		{"order of planes", Layout{Planes: []Role{Dark, Atoms, Light}}, map[string][]byte{"s.fits": cube(t, 7, 3)}, map[Role]float32{Dark: 7, Atoms: 107, Light: 207}},
		{"two planes", Layout{Planes: []Role{Atoms, Light}}, map[string][]byte{"s.fits": cube(t, 7, 2)}, map[Role]float32{Atoms: 7, Light: 107}},
		{"four planes", Layout{Planes: []Role{Atoms, Dark, Light, DarkOfLight}}, map[string][]byte{"s.fits": cube(t, 7, 4)}, map[Role]float32{Atoms: 7, Dark: 107, Light: 207, DarkOfLight: 307}},
		{"unused plane", Layout{Planes: []Role{Unused, Atoms, Light}}, map[string][]byte{"s.fits": cube(t, 7, 3)}, map[Role]float32{Atoms: 107, Light: 207}},
		{"density", Layout{Kind: "density"}, map[string][]byte{"s.fits": cube(t, 7, 1)}, map[Role]float32{Density: 7}},
		{"files", Layout{Kind: "files", Suffix: bySuffix}, map[string][]byte{"s_a.fits": cube(t, 1, 1), "s_l.fits": cube(t, 2, 1), "s_d.fits": cube(t, 3, 1)}, map[Role]float32{Atoms: 1, Light: 2, Dark: 3}},
		{"extensions in order", Layout{Kind: "extensions", Planes: []Role{Light, Atoms, Dark}}, map[string][]byte{"s.fits": fixture(t, "fits/testdata/extensions.fits")}, map[Role]float32{Light: 0, Atoms: 1000, Dark: 2000}},
		{"extensions by name", Layout{Kind: "extensions", Suffix: map[Role]string{Atoms: "atoms", Light: "light", Dark: "dark"}}, map[string][]byte{"s.fits": fixture(t, "fits/testdata/extensions.fits")}, map[Role]float32{Atoms: 0, Light: 1000, Dark: 2000}},
		{"extensions under a cube", Layout{}, map[string][]byte{"s.fits": fixture(t, "fits/testdata/extensions.fits")}, map[Role]float32{Atoms: 0, Light: 1000, Dark: 2000}},
		{"four axes", Layout{}, map[string][]byte{"s.fits": fixture(t, "fits/testdata/fouraxes.fits")}, map[Role]float32{Atoms: 0, Light: 1000, Dark: 2000}},
		{"packed", Layout{}, map[string][]byte{"s.fits.gz": fixture(t, "fits/testdata/unsigned16.fits.gz")}, map[Role]float32{Atoms: 31000, Light: 32000, Dark: 33000}},
		{"pages", Layout{}, map[string][]byte{"s.tif": fixture(t, "testdata/pages.tif")}, map[Role]float32{Atoms: 0, Light: 20000, Dark: 40000}},
		{"array", Layout{}, map[string][]byte{"s.npy": fixture(t, "testdata/cube.npy")}, map[Role]float32{Atoms: 0, Light: 20000, Dark: 40000}},
		{"named arrays", Layout{Kind: "extensions", Suffix: map[Role]string{Atoms: "atoms", Light: "light", Dark: "dark"}}, map[string][]byte{"s.npz": fixture(t, "testdata/named.npz")}, map[Role]float32{Atoms: 0, Light: 20000, Dark: 40000}},
		{"mixed formats", Layout{Kind: "files", Suffix: map[Role]string{Atoms: "_a", Light: "_l"}}, map[string][]byte{"s_a.png": fixture(t, "testdata/grey16.png"), "s_l.dat": fixture(t, "testdata/little.tif")}, map[Role]float32{Atoms: 20000, Light: 20000}},
		{"8 bits", Layout{Kind: "density"}, map[string][]byte{"s.png": fixture(t, "testdata/grey8.png")}, map[Role]float32{Density: 0}},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			raw, err := read(t, night(t, tt.files), tt.layout)
			if err != nil {
				t.Fatal(err)
			}
			for r := range numRoles {
				f := raw.Frames[r]
				want, ok := tt.want[r]
				if ok != (f != nil) {
					t.Errorf("%v frame: there is %v, want %v", r, f != nil, ok)
				} else if ok && f.Pix[0] != want {
					t.Errorf("%v frame starts with %v, want %v", r, f.Pix[0], want)
				}
			}
		})
	}
}

func TestReadFails(t *testing.T) {
	bySuffix := Layout{Kind: "files", Suffix: map[Role]string{Atoms: "_a", Light: "_l"}}
	byName := Layout{Kind: "extensions", Suffix: map[Role]string{Atoms: "atoms", Light: "probe"}}
	good := cube(t, 0, 3)
	var bomb bytes.Buffer
	z, _ := gzip.NewWriterLevel(&bomb, gzip.BestCompression)
	if _, err := z.Write(bytes.Repeat([]byte(" "), 64<<20)); err != nil || z.Close() != nil {
		t.Fatal("gzip failed")
	}
	packed := fixture(t, "fits/testdata/unsigned16.fits.gz")
	flipped := bytes.Clone(packed)
	flipped[len(flipped)-8] ^= 1
	tests := []struct {
		name   string
		layout Layout
		files  map[string][]byte
		is     error
		want   string
	}{
		{"too few planes", Layout{}, map[string][]byte{"s.fits": cube(t, 0, 2)}, nil, "s.fits: 2 planes where the layout has 3 (atoms, light, dark): correct the layout in the settings, or write the shot again"},
		{"too many planes", Layout{Planes: []Role{Atoms, Light}}, map[string][]byte{"s.fits": cube(t, 0, 3)}, nil, "s.fits: 3 planes where the layout has 2 (atoms, light): correct the layout in the settings, or write the shot again"},
		{"a cube for a density image", Layout{Kind: "density"}, map[string][]byte{"s.fits": good}, nil, "s.fits: 3 planes where the layout has 1 (density): correct the layout in the settings, or write the shot again"},
		{"a cube among single frames", bySuffix, map[string][]byte{"s_a.fits": good, "s_l.fits": good}, nil, "s_a.fits: 3 planes where the layout has 1 (atoms): correct the layout in the settings, or write the shot again"},
		{"pages among single frames", bySuffix, map[string][]byte{"s_a.tif": fixture(t, "testdata/pages.tif"), "s_l.fits": good}, nil, "s_a.tif: 3 planes where the layout has 1 (atoms): correct the layout in the settings, or write the shot again"},
		{"extensions for a density image", Layout{Kind: "density"}, map[string][]byte{"s.fits": fixture(t, "fits/testdata/extensions.fits")}, nil, "s.fits: 3 planes where the layout has 1 (density): correct the layout in the settings, or write the shot again"},
		{"no such extension", byName, map[string][]byte{"s.fits": fixture(t, "fits/testdata/extensions.fits")}, nil, `s.fits: 0 images named "probe" for the light frame among ["ATOMS" "LIGHT" "DARK"]: correct the layout in the settings`},
		{"differing sizes", bySuffix, map[string][]byte{"s_a.fits": sized(t, 3, 2, 0, 1), "s_l.fits": sized(t, 2, 3, 0, 1)}, nil, "s: the light frame has 2 x 3 pixels, the atoms frame 3 x 2: frames of a shot have one size"},
		{"pages of differing sizes", Layout{}, map[string][]byte{"s.tif": fixture(t, "testdata/sizes.tif")}, nil, "s: the light frame has 20 x 16 pixels, the atoms frame 20 x 18: frames of a shot have one size"},
		{"missing frame", bySuffix, map[string][]byte{"s_a.fits": cube(t, 0, 1)}, nil, `s: the light frame is missing: no file with "_l" beside s_a.fits`},
		{"no image", Layout{}, map[string][]byte{"s.fits": fixture(t, "fits/testdata/table.fits")}, fault.Unsupported, "s.fits: not supported: no image inside"},
		{"tile-compressed", Layout{}, map[string][]byte{"s.fits": fixture(t, "fits/testdata/compressed.fits")}, fault.Unsupported, "s.fits: not supported: the image is tile-compressed (ZIMAGE = T, ZCMPTYPE = RICE_1); uncompress the file first (header-data unit 1)"},
		{"empty", Layout{}, map[string][]byte{"s.fits": nil}, fault.Truncated, "s.fits: truncated: the file is empty"},
		{"room made, nothing written", Layout{}, map[string][]byte{"s.fits": make([]byte, 5760)}, fault.Truncated, "s.fits: truncated: the file holds zeros where its content should start"},
		{"cut", Layout{}, map[string][]byte{"s.fits": good[:2890]}, fault.Truncated, "s.fits: truncated: the header declares 36 bytes of data, the file has 10 (header-data unit 0)"},
		{"random bytes", Layout{}, map[string][]byte{"s.fits": {0xa5, 7, 1, 0xff}}, fault.Unsupported, "s.fits: not supported: the content is unknown: save the frames as FITS, TIFF, PNG or NPY"},
		{"text", Layout{}, map[string][]byte{"s.fits": []byte("hello")}, fault.Unsupported, "s.fits: not supported: the content is text: save the frames as FITS, TIFF, PNG or NPY"},
		{"HDF5", Layout{}, map[string][]byte{"s.tif": []byte("\x89HDF\r\n\x1a\n")}, fault.Unsupported, "s.tif: not supported: the content is HDF5: save the frames as FITS, TIFF, PNG or NPY"},
		{"colour PNG", Layout{}, map[string][]byte{"s.png": fixture(t, "testdata/colour.png")}, fault.Unsupported, "s.png: not supported: PNG of colour type 2 with 8 bits: save as grey with 16 bits"},
		{"palette PNG", Layout{}, map[string][]byte{"s.png": fixture(t, "testdata/palette.png")}, fault.Unsupported, "s.png: not supported: PNG of colour type 3 with 8 bits: save as grey with 16 bits"},
		{"cut PNG", Layout{}, map[string][]byte{"s.png": fixture(t, "testdata/grey16.png")[:150]}, fault.Truncated, "s.png: truncated: a chunk of 96 bytes from byte 80 on, the file has 150"},
		{"PNG without an end", Layout{}, map[string][]byte{"s.png": fixture(t, "testdata/grey16.png")[:33]}, fault.Truncated, "s.png: truncated: the file ends at byte 33 before its IEND chunk"},
		{"PNG with a wrong sum", Layout{Kind: "density"}, map[string][]byte{"s.png": spoilt(t, "testdata/grey16.png", 13)}, fault.Broken, "s.png: density frame: broken: png: invalid format: invalid checksum"},
		{"gzip around TIFF", Layout{}, map[string][]byte{"s.fits.gz": squeeze(t, fixture(t, "testdata/little.tif"))}, fault.Unsupported, "s.fits.gz: not supported: the gzip file holds TIFF, only FITS is read packed: unpack it first"},
		{"gzip bomb", Layout{}, map[string][]byte{"s.fits.gz": bomb.Bytes()}, fault.Unsupported, "s.fits.gz: not supported: the gzip file holds text, only FITS is read packed: unpack it first"},
		{"gzip bomb with a FITS header", Layout{}, map[string][]byte{"s.fits.gz": squeeze(t, append(good[:400:400], bytes.Repeat([]byte(" "), 64<<20)...))}, fault.Broken, "s.fits.gz: broken: no END card within 2097152 bytes of header (header-data unit 0)"},
		{"gzip of more than the limit", Layout{}, map[string][]byte{"s.fits.gz": squeeze(t, bytes.Replace(good, []byte("NAXIS3  =                    3"), []byte("NAXIS3  =            300000000"), 1))}, fault.Unsupported, "s.fits.gz: not supported: more than 536870912 bytes when unpacked: unpack the file first (header-data unit 0)"},
		{"cut gzip", Layout{}, map[string][]byte{"s.fits.gz": packed[:len(packed)-20]}, fault.Truncated, "s.fits.gz: truncated: the gzip file ends before its end mark (header-data unit 0)"},
		{"gzip with a wrong sum", Layout{}, map[string][]byte{"s.fits.gz": flipped}, fault.Broken, "s.fits.gz: broken: gzip: invalid checksum"},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			dir := night(t, tt.files)
			var before, after runtime.MemStats
			runtime.ReadMemStats(&before)
			_, err := read(t, dir, tt.layout)
			runtime.ReadMemStats(&after)
			if err == nil || err.Error() != tt.want {
				t.Errorf("\n got %v\nwant %v", err, tt.want)
			}
			if used := after.TotalAlloc - before.TotalAlloc; used > 32<<20 {
				t.Errorf("%d bytes allocated", used)
			}
			if tt.is != nil && !errors.Is(err, tt.is) {
				t.Errorf("%v is not %v", err, tt.is)
			}
		})
	}
}

func squeeze(t testing.TB, b []byte) []byte {
	t.Helper()
	var packed bytes.Buffer
	z := gzip.NewWriter(&packed)
	if _, err := z.Write(b); err != nil || z.Close() != nil {
		t.Fatal("gzip failed")
	}
	return packed.Bytes()
}

// spoilt returns a file with the given byte from the end changed.
func spoilt(t testing.TB, name string, at int) []byte {
	b := fixture(t, name)
	b[len(b)-at] ^= 0x40
	return b
}

func TestReadCancelled(t *testing.T) {
	dir := night(t, map[string][]byte{"s.fits": cube(t, 0, 3)})
	n := scan(t, dir, Layout{})
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := Read(ctx, dir, n.Shots[0], Layout{}); !errors.Is(err, context.Canceled) {
		t.Error(err)
	}
	put(t, dir, "s.fits", nil)
	if _, err := Read(t.Context(), dir, n.Shots[0], Layout{Kind: "x"}); err == nil {
		t.Error("a layout that makes no sense was read")
	}
}

func TestReadDark(t *testing.T) {
	layout := Layout{Planes: []Role{Atoms, Light}, DarkPattern: "dark"}
	dir := night(t, map[string][]byte{"s.fits": cube(t, 0, 2), "dark1.fits": cube(t, 5, 1), "dark2.fits": cube(t, 6, 2), "dark3.fits": fixture(t, "fits/testdata/table.fits")})
	n := scan(t, dir, layout)
	var first []float32
	for _, d := range n.Darks[:2] {
		frames, err := ReadDark(t.Context(), dir, d)
		if err != nil {
			t.Fatal(err)
		}
		for _, f := range frames {
			first = append(first, f.Pix[0])
		}
	}
	if len(first) != 3 || first[0] != 5 || first[1] != 6 || first[2] != 106 {
		t.Errorf("dark frames start with %v", first)
	}
	_, err := ReadDark(t.Context(), dir, n.Darks[2])
	if want := "dark3.fits: not supported: no image inside"; err == nil || err.Error() != want {
		t.Errorf("%v, want %s", err, want)
	}
}

// The same pixels have the same digest whatever brought them; other pixels, roles or
// sizes have another.
func TestDigest(t *testing.T) {
	suffix := map[Role]string{Atoms: "_a", Light: "_l"}
	grey := fixture(t, "testdata/grey16.png")
	digest := func(a, l string, light []byte) [32]byte {
		raw, err := read(t, night(t, map[string][]byte{"s_a" + a: grey, "s_l" + l: light}), Layout{Kind: "files", Suffix: suffix})
		if err != nil {
			t.Fatal(err)
		}
		return raw.Digest
	}
	first := digest(".png", ".png", grey)
	for _, name := range []string{"little.tif", "big.tif", "tiles.tif", "lzw.tif", "type_u2.npy", "type_f8.npy", "type_i8.npy"} {
		if digest(".png", ".x", fixture(t, "testdata/"+name)) != first {
			t.Errorf("%s has another digest", name)
		}
	}
	if digest(".png", ".npy", fixture(t, "testdata/nan.npy")) == first {
		t.Error("a pixel that is not a number does not show")
	}
	f := &Frame{Width: 2, Height: 1, Pix: []float32{1, 2}}
	g := &Frame{Width: 1, Height: 2, Pix: []float32{1, 2}}
	h := &Frame{Width: 2, Height: 1, Pix: []float32{1, 2.5}}
	shot := func(atoms, light *Frame) [32]byte {
		raw := &Raw{Frames: [numRoles]*Frame{Atoms: atoms, Light: light}}
		raw.sign()
		if raw.Digests[Atoms] != Digest(atoms) || raw.Digests[Light] != Digest(light) || raw.Digests[Dark] != [32]byte{} {
			t.Errorf("digests %x", raw.Digests)
		}
		return raw.Digest
	}
	all := [][32]byte{Digest(nil), Digest(f), Digest(g), Digest(h), shot(nil, nil), shot(f, nil), shot(nil, f), shot(f, f), shot(f, g), shot(g, f)}
	for i := range all {
		for j := range i {
			if all[i] == all[j] {
				t.Errorf("cases %d and %d have the same digest", i, j)
			}
		}
	}
	for _, v := range []float32{-1, 65536, 0.5, 1e30, float32(math.NaN()), float32(math.Inf(1)), 1 << 32} {
		if put16(nil, []float32{v}) || put16(nil, []float32{0, 1, v, 3, 4}) {
			t.Errorf("%v passes for 16 bits", v)
		}
	}
	if !put16(nil, []float32{0, 1, 65535, 4, 5}) {
		t.Error("counts do not pass for 16 bits")
	}
}

// The digest of whole counts, and of pixels that are none, byte by byte.
func TestDigestBytes(t *testing.T) {
	size := func(w, h byte) []byte { return []byte{w, 0, 0, 0, 0, 0, 0, 0, h, 0, 0, 0, 0, 0, 0, 0} }
	for _, c := range []struct {
		f     *Frame
		bytes []byte
	}{
		{&Frame{Width: 3, Height: 2, Pix: []float32{0, 1, 255, 256, 65535, 7}}, slices.Concat([]byte{'u'}, size(3, 2), []byte{0, 0, 1, 0, 255, 0, 0, 1, 255, 255, 7, 0})},
		{&Frame{Width: 1, Height: 1, Pix: []float32{0.5}}, slices.Concat([]byte{'f'}, size(1, 1), []byte{0, 0, 0, 0x3f})},
	} {
		if got := Digest(c.f); got != sha256.Sum256(c.bytes) {
			t.Errorf("digest of %v: %x", c.f.Pix, got)
		}
	}
}

func TestNonFinite(t *testing.T) {
	raw, err := read(t, night(t, map[string][]byte{"s.fits": fixture(t, "fits/testdata/float32.fits")}), Layout{})
	if err != nil {
		t.Fatal(err)
	}
	for r, f := range raw.Frames[:3] {
		if f.NonFinite != 1 {
			t.Errorf("%v frame: %d pixels not finite, want 1", Role(r), f.NonFinite)
		}
	}
}

func TestRoleNames(t *testing.T) {
	for r := Unused; r < numRoles; r++ {
		if got, err := ParseRole(r.String()); got != r || err != nil {
			t.Errorf("%v came back as %v, %v", r, got, err)
		}
	}
	want := `"flat" is no role of a frame: write atoms, light, dark, dark_of_light, density or unused`
	if _, err := ParseRole("flat"); err == nil || err.Error() != want {
		t.Errorf("%v, want %s", err, want)
	}
}

func BenchmarkRead1024(b *testing.B) {
	planes := make([][]uint16, 3)
	for p := range planes {
		planes[p] = make([]uint16, 1<<20)
		for i := range planes[p] {
			planes[p][i] = uint16(i * 7919)
		}
	}
	var file bytes.Buffer
	if err := fits.WriteCube(&file, 1024, 1024, planes, nil); err != nil {
		b.Fatal(err)
	}
	dir := night(b, map[string][]byte{"s.fits": file.Bytes()})
	shot := scan(b, dir, Layout{}).Shots[0]
	for b.Loop() {
		if _, err := Read(b.Context(), dir, shot, Layout{}); err != nil {
			b.Fatal(err)
		}
	}
}
