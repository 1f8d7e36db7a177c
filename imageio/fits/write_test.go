package fits

import (
	"bytes"
	"io"
	"math"
	"strings"
	"testing"
)

// planes makes the ramp of testdata/make.py.
func planes[T uint16 | float32](n int, value func(p, y, x int) float64) [][]T {
	all := make([][]T, n)
	for p := range all {
		for i := range 7 * 5 {
			all[p] = append(all[p], T(value(p, i/7, i%7)))
		}
	}
	return all
}

// The pixels are byte for byte those that astropy 5.2.1 wrote for the same numbers
// (testdata/make.py), and the mandatory cards have the same values.
func TestWriteAgainstAnotherImplementation(t *testing.T) {
	counts := planes[uint16](3, func(p, y, x int) float64 { return 31000 + ramp(p, y, x) })
	tests := []struct {
		file  string
		write func(w io.Writer) error
	}{
		{"unsigned16.fits", func(w io.Writer) error {
			return WriteCube(w, 7, 5, counts, []Card{Number("TOF", 28, "ms"), Integer("SHOT", 12, "")})
		}},
		{"density.fits", func(w io.Writer) error {
			density := planes[float32](1, func(_, y, x int) float64 { return float64(float32(ramp(0, y, x)) / 100) })
			return WriteFloats(w, 7, 5, density, nil)
		}},
	}
	for _, tt := range tests {
		var b bytes.Buffer
		if err := tt.write(&b); err != nil {
			t.Fatal(err)
		}
		r, size := fixture(t, tt.file)
		want := make([]byte, size)
		if _, err := r.ReadAt(want, 0); err != nil {
			t.Fatal(err)
		}
		if !bytes.Equal(b.Bytes()[blockSize:], want[blockSize:]) {
			t.Errorf("%s: other pixels", tt.file)
		}
		ours, err := Open(bytes.NewReader(b.Bytes()), int64(b.Len()))
		if err != nil {
			t.Fatal(err)
		}
		for _, c := range load(t, tt.file).HDUs[0].Cards {
			if v, ok := ours.HDUs[0].Get(c.Key); c.Key != "EXTEND" && (!ok || v != c.Value) {
				t.Errorf("%s: %s = %q, want %q", tt.file, c.Key, v, c.Value)
			}
		}
	}
}

func TestCardsComeBack(t *testing.T) {
	cards := []Card{
		Text("NAME", "it's / a 'cloud'", "quotes"),
		Text("BLANKS", "", ""),
		Text("FULL", strings.Repeat("x", 68), "the comment gives way"),
		Text("SHORT", "a", strings.Repeat("long ", 20)),
		Integer("COUNT", -3, ""),
		{Key: "FLAG", Value: "T"},
		Number("TENTH", 0.1, "s"),
		Number("BIG", 1e300, ""),
		Number("SMALL", math.SmallestNonzeroFloat64, ""),
		Number("WHOLE", 12, ""),
		Number("PI", math.Pi, "exact"),
	}
	var b bytes.Buffer
	if err := WriteFloats(&b, 2, 1, [][]float32{{1, 2}}, cards); err != nil {
		t.Fatal(err)
	}
	if b.Len()%blockSize != 0 {
		t.Errorf("%d bytes are not whole blocks", b.Len())
	}
	f, err := Open(bytes.NewReader(b.Bytes()), int64(b.Len()))
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range cards {
		i, ok := f.HDUs[0].index[c.Key]
		if !ok {
			t.Errorf("%s is missing", c.Key)
			continue
		}
		got := f.HDUs[0].Cards[i]
		if got.Value != c.Value || got.Text != c.Text || !strings.HasPrefix(c.Comment, got.Comment) {
			t.Errorf("%+v came back as %+v", c, got)
		}
	}
}

func TestWriteRefuses(t *testing.T) {
	tests := []struct {
		name string
		card Card
		want string
	}{
		{"lower case", Number("tof", 1, ""), `keyword "tof" is not 1 to 8 of`},
		{"nine letters", Number("TIMEOFFLY", 1, ""), `keyword "TIMEOFFLY" is not 1 to 8 of`},
		{"no keyword", Number("", 1, ""), `keyword "" is not 1 to 8 of`},
		{"structure", Integer("NAXIS2", 9, ""), "keyword NAXIS2 is set by the writer"},
		{"scale", Integer("BZERO", 0, ""), "keyword BZERO is set by the writer"},
		{"not ASCII", Text("UNIT", "µm", ""), `card UNIT: "µm" is not printable ASCII`},
		{"line end in a comment", Text("UNIT", "m", "a\nb"), `card UNIT: "a\nb" is not printable ASCII`},
		{"long text", Text("NAME", strings.Repeat("'", 35), ""), "card NAME: the value has 70 characters, 68 fit"},
		{"not a number", Number("T", math.NaN(), ""), `card T: "NaN" is neither text, number nor logical`},
		{"infinite", Number("T", math.Inf(-1), ""), `card T: "-Inf" is neither text, number nor logical`},
		{"bare word", Card{Key: "T", Value: "cold"}, `card T: "cold" is neither text, number nor logical`},
	}
	for _, tt := range tests {
		var b bytes.Buffer
		err := WriteCube(&b, 2, 1, [][]uint16{{1, 2}}, []Card{tt.card})
		if err == nil || !strings.Contains(err.Error(), tt.want) || b.Len() > 0 {
			t.Errorf("%s: %v, %d bytes written, want %s", tt.name, err, b.Len(), tt.want)
		}
	}
	err := WriteCube(io.Discard, 2, 2, [][]uint16{{1, 2, 3, 4}, {1}}, nil)
	if want := "write fits: plane 1 has 1 pixels, not 2 x 2"; err == nil || err.Error() != want {
		t.Errorf("%v, want %s", err, want)
	}
	if err := WriteCube(io.Discard, 0, 0, [][]uint16{{}}, nil); err == nil {
		t.Error("an empty plane was written")
	}
}

func BenchmarkCube1024(b *testing.B) {
	counts := make([][]uint16, 3)
	for p := range counts {
		counts[p] = make([]uint16, 1<<20)
		for i := range counts[p] {
			counts[p][i] = uint16(i * 7919)
		}
	}
	var file bytes.Buffer
	if err := WriteCube(&file, 1024, 1024, counts, nil); err != nil {
		b.Fatal(err)
	}
	pix := make([]float32, 1<<20)
	b.SetBytes(int64(file.Len()))
	for b.Loop() {
		f, err := Open(bytes.NewReader(file.Bytes()), int64(file.Len()))
		if err != nil {
			b.Fatal(err)
		}
		for p := range 3 {
			if _, err := f.HDUs[0].Plane(p, pix); err != nil {
				b.Fatal(err)
			}
		}
	}
}
