package curve

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"
)

// TestKinkIsNoMinimum: where a search ends at a kink with χ² still falling by its slopes there
// is no estimate; where it ends at rest there is.
func TestKinkIsNoMinimum(t *testing.T) {
	for kink, found := range map[float64]bool{5: false, 0: true} {
		n := Night{Gas: rubidium(t)}
		for range 3 {
			p := Point{Vector: Vector{1, 1, 1, 1}}
			p.Cov[Thermal][Thermal] = 1
			n.Points = append(n.Points, p)
		}
		p := n.problem(n.pick(func(*Point) bool { return true }), relation{size: 1, eval: func(_ *Point, v *Vector, _ *scales, theta, h []float64) {
			h[0] = v[Thermal] - 1 + kink*(1+math.Abs(theta[0])) + theta[0]
		}})
		e, q, err := p.fit(context.Background(), []float64{1})
		if err != nil {
			t.Fatal(err)
		}
		if e[0].Found() != found || math.IsNaN(q.Chi2) == found {
			t.Errorf("kink %g: %+v, chi2 %g", kink, e[0], q.Chi2)
		}
		for _, f := range []Estimate{e[0].exp(), e[0].power(2)} {
			if f.Found() != found {
				t.Errorf("kink %g: what follows from it is %+v", kink, f)
			}
		}
	}
}

// TestInsertNotFound: hypotheses whose minimum was not found stand behind, in whatever order
// they come, and leave no setting named.
func TestInsertNotFound(t *testing.T) {
	nan := math.NaN()
	for _, order := range [][]float64{{nan, 3, 1, 2}, {3, nan, 1, 2}, {1, 2, 3, nan}, {3, 2, nan, 1}} {
		var f Factors
		for i, chi2 := range order {
			h := Factor{Setting: []string{Alpha, Magnification}[i%2], Factor: Estimate{1, 0, 0}, Quality: Quality{Chi2: chi2}, Total: chi2}
			if math.IsNaN(chi2) {
				h.Factor = notFound()
			}
			f.insert(h)
		}
		f.lead()
		if f.List[0].Chi2 != 1 || f.List[2].Chi2 != 3 || f.Decided() {
			t.Errorf("%v: %+v", order, f)
		}
	}
}

// TestNarrowRange: a night in which all clouds have one t tells no saturation, nor one whose
// spread hides in the errors; where it is told its errors are right.
func TestNarrowRange(t *testing.T) {
	ctx, g := context.Background(), rubidium(t)
	th := NewTheory(g, 6e4, 1.5e5)
	for span, told := range map[float64]bool{0: false, 0.02: false, 0.1: true, 0.3: true} {
		var excess, ratio pulls
		for seed := range uint64(40) {
			reduced := make([]float64, 20)
			for i := range reduced {
				reduced[i] = 0.7 + span*(float64(i)/19-0.5)
			}
			n := draw(t, g, th, SemiIdeal, reduced, rand.New(rand.NewPCG(seed, 33)))
			s, why, err := n.Saturate(ctx)
			if err != nil {
				t.Fatal(err)
			}
			if (s != nil) != told || (why == narrowRange) == told {
				t.Fatalf("span %g: %+v, %q", span, s, why)
			}
			if told {
				excess.add(s.Excess, 1)
				ratio.add(s.Ratio, 1)
			}
		}
		if told {
			excess.judge(t, "excess")
			ratio.judge(t, "Tc/Tc0")
		}
	}
}
