package bose

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"
)

// functions are keyed by the order as the tables spell it.
var functions = map[string]func(float64) float64{
	"1/2": G12, "1": G1, "3/2": G32, "2": G2, "5/2": G52, "3": G3, "4": G4,
}

// bound is the relative error asked of every function; the tables hold 22 digits.
const bound = 1e-13

// table reads testdata/reference/name without its comment line; row 0 is the header.
func table(t *testing.T, name string) [][]string {
	t.Helper()
	f, err := os.Open("../../testdata/reference/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	rows, err := r.ReadAll()
	if err != nil || len(rows) < 2 {
		t.Fatalf("%s: %d rows, %v", name, len(rows), err)
	}
	return rows
}

func number(t *testing.T, s string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// near fails unless got lies within tol of want, relative to want; NaN fails.
func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if got == want {
		return
	}
	if d := math.Abs(got/want - 1); !(d <= tol) {
		t.Errorf("%s: got %.17g, want %.17g, relative error %.2g > %.2g", what, got, want, d, tol)
	}
}

// TestAgainstAlphaTable covers α = 1e-300...700. polylog_alpha.csv was computed with 60
// digits.
func TestAgainstAlphaTable(t *testing.T) {
	rows := table(t, "polylog_alpha.csv")
	worst := 0.0
	for _, row := range rows[1:] {
		alpha := number(t, row[0])
		for i, name := range rows[0][1:] {
			g := functions[name[2:]]
			want := number(t, row[i+1])
			near(t, name+" at "+row[0], g(alpha), want, bound)
			worst = math.Max(worst, math.Abs(g(alpha)/want-1))
		}
	}
	t.Logf("worst relative error %.2g", worst)
}

// TestAgainstZTable takes z exactly as listed and α from 1−z, which is exact too, so that
// the argument is as good as the table.
func TestAgainstZTable(t *testing.T) {
	for _, row := range table(t, "polylog.csv")[1:] {
		z, one := number(t, row[2]), number(t, row[3])
		alpha := -math.Log1p(-one)
		if z < 0.5 {
			alpha = -math.Log(z)
		}
		near(t, "g_"+row[0]+" at z="+row[2], functions[row[0]](alpha), number(t, row[4]), bound)
	}
}

func TestCoefficientsAreRobinsons(t *testing.T) {
	rows := table(t, "bose_robinson_coefficients.csv")
	columns := []*[23]float64{&robinson12, &robinson32, &robinson2, &robinson52, &robinson3, &robinson4}
	for k := range 23 {
		for j, c := range columns {
			near(t, rows[0][j+1]+" term "+rows[k+1][0], c[k], number(t, rows[k+1][j+1]), 1e-16)
		}
	}
}

// TestBranchesAgree compares the two routes across the crossover, where each is at its
// worst: a missing term would show.
func TestBranchesAgree(t *testing.T) {
	below := math.Nextafter(crossover, 0)
	for name, g := range functions {
		near(t, "g_"+name+" at the crossover", g(below), g(crossover), 1e-15)
	}
}

// TestSlope checks dg_n/dα = −g_{n−1} by central differences, independent of any table.
// The bound is rounding over h plus h⁴/30 of the fifth derivative.
func TestSlope(t *testing.T) {
	pairs := []struct{ g, less func(float64) float64 }{{G32, G12}, {G2, G1}, {G52, G32}, {G3, G2}, {G4, G3}}
	for i, p := range pairs {
		for _, alpha := range []float64{0.013, 0.4, 0.7, 1.3, 2.9, 11} {
			h := 2e-3 * math.Min(alpha, 1)
			slope := (p.g(alpha-2*h) - 8*p.g(alpha-h) + 8*p.g(alpha+h) - p.g(alpha+2*h)) / (12 * h)
			near(t, "slope of pair "+strconv.Itoa(i), -slope, p.less(alpha), 3e-11)
		}
	}
}

func TestEdges(t *testing.T) {
	atZero := map[string]float64{
		"1/2": math.Inf(1), "1": math.Inf(1), "3/2": Zeta32, "2": Zeta2, "5/2": Zeta52, "3": Zeta3, "4": Zeta4,
	}
	for name, g := range functions {
		for _, zero := range []float64{0, math.Copysign(0, -1)} {
			if v := g(zero); v != atZero[name] {
				t.Errorf("g_%s(%g) = %g, want %g", name, zero, v, atZero[name])
			}
		}
		if v := g(math.Inf(1)); v != 0 {
			t.Errorf("g_%s at +Inf = %g, want 0", name, v)
		}
		for _, bad := range []float64{-1e-300, -3, math.Inf(-1), math.NaN()} {
			if v := g(bad); !math.IsNaN(v) {
				t.Errorf("g_%s(%g) = %g, want NaN", name, bad, v)
			}
		}
	}
}

// TestAlpha3 asks for the α back; its error is that of g_3, a few units in the last
// place, divided by g_2.
func TestAlpha3(t *testing.T) {
	for _, alpha := range []float64{1e-14, 1e-9, 1e-4, 0.03, 0.5, 0.999, 1, 1.7, 6, 40, 300, 700} {
		g := G3(alpha)
		got := Alpha3(g)
		if d := math.Abs(got - alpha); !(d <= 1e-15*g/G2(alpha)+2e-15*alpha) {
			t.Errorf("alpha %g came back as %.17g", alpha, got)
		}
	}
	for g, want := range map[float64]float64{Zeta3: 0, 0: math.Inf(1)} {
		if got := Alpha3(g); got != want {
			t.Errorf("Alpha3(%g) = %g, want %g", g, got, want)
		}
	}
	for _, g := range []float64{-1, 1.21, math.Inf(1), math.NaN()} {
		if got := Alpha3(g); !math.IsNaN(got) {
			t.Errorf("Alpha3(%g) = %g, want NaN", g, got)
		}
	}
}

func benchmark(b *testing.B, g func(float64) float64) {
	alphas := [8]float64{0.01, 0.2, 0.6, 0.95, 1.1, 2, 5, 12}
	sum := 0.0
	for i := 0; b.Loop(); i++ {
		sum += g(alphas[i%8])
	}
	_ = sum
}

func BenchmarkG32(b *testing.B) { benchmark(b, G32) }
func BenchmarkG2(b *testing.B)  { benchmark(b, G2) }
func BenchmarkG3(b *testing.B)  { benchmark(b, G3) }
func BenchmarkAlpha3(b *testing.B) {
	benchmark(b, func(a float64) float64 { return Alpha3(1.2 / (1 + a)) })
}
