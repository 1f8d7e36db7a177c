package lm

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"sort"
	"strconv"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"
)

const nistFolder = "../../testdata/reference/nist-strd"

// nist is one of the Statistical Reference Datasets for nonlinear regression of the U.S.
// National Institute of Standards and Technology, as read from its file.
type nist struct {
	name        string
	model       nistModel
	start       [2][]float64
	want, wantE []float64 // certified values and standard deviations
	rss         float64   // certified residual sum of squares
	y           []float64
	x           [][]float64
}

func (p *nist) Size() (m, n int) { return len(p.y), len(p.want) }

func (p *nist) Residuals(b, r []float64) {
	var d [9]float64
	for i, y := range p.y {
		r[i] = p.model(b, p.x[i], d[:]) - y
	}
}

func (p *nist) Jacobian(b []float64, j *mat.Dense) {
	for i := range p.y {
		p.model(b, p.x[i], j.RawRowView(i))
	}
}

// readNIST reads the block of parameters and the data of a file.
func readNIST(t testing.TB, path string) *nist {
	t.Helper()
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	p := &nist{name: strings.TrimSuffix(filepath.Base(path), ".dat")}
	p.model = nistModels[p.name]
	lines := strings.Split(strings.ReplaceAll(string(text), "\r", ""), "\n")
	last := 0
	for i, line := range lines {
		if strings.HasPrefix(line, "Data:") {
			last = i
		}
		name, rest, ok := strings.Cut(line, "=")
		if v := numbers(rest); ok && len(v) == 4 && strings.TrimSpace(name) == fmt.Sprint("b", len(p.want)+1) {
			p.start[0], p.start[1] = append(p.start[0], v[0]), append(p.start[1], v[1])
			p.want, p.wantE = append(p.want, v[2]), append(p.wantE, v[3])
		}
		if rest, ok := strings.CutPrefix(line, "Residual Sum of Squares:"); ok {
			p.rss = numbers(rest)[0]
		}
	}
	for _, line := range lines[last+1:] {
		if v := numbers(line); len(v) >= 2 {
			p.y, p.x = append(p.y, v[0]), append(p.x, v[1:])
		}
	}
	p.correct()
	return p
}

// correct mends what SOURCE.md beside the files names.
func (p *nist) correct() {
	switch p.name {
	case "Roszman1":
		p.want[0] = 2.0196866396e-01
	case "Nelson":
		for i, y := range p.y {
			p.y[i] = math.Log(y)
		}
	}
}

// numbers are the fields of a line, or nil where one is not a number.
func numbers(line string) (v []float64) {
	for _, f := range strings.Fields(line) {
		// Roszman1 prints one exponent without its digit.
		x, err := strconv.ParseFloat(strings.TrimSuffix(f, "E-0"), 64)
		if err != nil {
			return nil
		}
		v = append(v, x)
	}
	return v
}

func allNIST(t *testing.T) (all []*nist) {
	t.Helper()
	paths, err := filepath.Glob(filepath.Join(nistFolder, "*.dat"))
	if err != nil || len(paths) != 27 {
		t.Fatalf("%d files in %s, want 27 (%v)", len(paths), nistFolder, err)
	}
	sort.Strings(paths)
	for _, path := range paths {
		all = append(all, readNIST(t, path))
	}
	return all
}

// digits is the number of decimal digits to which the worst of got agrees with want; a NaN
// scores none.
func digits(got, want []float64) float64 {
	worst := math.Inf(1)
	for i := range want {
		d := -math.Log10(math.Abs(got[i]-want[i]) / math.Abs(want[i]))
		if !(d >= 0) {
			return 0
		}
		worst = min(worst, d)
	}
	return min(worst, 11) // the certified values have 11
}

// summed is a dense problem in normal form.
type summed struct {
	Residuals
	r []float64
	j *mat.Dense
}

func sum(p Residuals) *summed {
	m, n := p.Size()
	return &summed{p, make([]float64, m), mat.NewDense(m, n, nil)}
}

func (s *summed) Dim() int { _, n := s.Size(); return n }

func (s *summed) Normal(x, h, g []float64) float64 {
	s.Residuals.Residuals(x, s.r)
	s.Jacobian(x, s.j)
	m, n := s.Size()
	f := 0.0
	clear(h)
	clear(g)
	for i := range m {
		row, r := s.j.RawRowView(i), s.r[i]
		f += r * r
		for a := range n {
			if g != nil {
				g[a] += row[a] * r
			}
			for b := 0; h != nil && b < n; b++ {
				h[a*n+b] += row[a] * row[b]
			}
		}
	}
	return f
}
