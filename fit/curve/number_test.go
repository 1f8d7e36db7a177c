package curve

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"fallshadow/model"
)

// byNumber is a cloud of n atoms whose T was computed from its thermal number, with errors of
// a tenth in T, correlated so far.
func byNumber(g Gas, t, n, correlation float64) Point {
	temperature := t * model.CriticalTemperature(n, g.Trap)
	thermal := g.scales().saturated(temperature)
	p := Point{Name: "by number", Vector: Vector{thermal, n - thermal, temperature, g.scales().mu(n - thermal)}}
	for i, relative := range []float64{0.3, 0.003, 0.1, 0.002} {
		p.Cov[i][i] = math.Pow(relative*p.Vector[i], 2)
	}
	p.Cov[Thermal][T] = correlation * math.Sqrt(p.Cov[Thermal][Thermal]*p.Cov[T][T])
	p.Cov[T][Thermal] = p.Cov[Thermal][T]
	return p
}

// TestByNumber: a cloud whose T follows from its number changes neither laws nor transition nor
// factor, whether its fit says so or its covariance; a night of them tells none.
func TestByNumber(t *testing.T) {
	ctx, g := context.Background(), rubidium(t)
	th := NewTheory(g, 6e4, 1.5e5)
	tied := map[string]Point{"said": byNumber(g, 0.3, 1e5, 0.9), "seen": byNumber(g, 0.3, 1e5, 1)}
	p := tied["said"]
	p.ByNumber = true
	tied["said"] = p
	if p := byNumber(g, 0.3, 1e5, 0.999); !p.Independent() {
		t.Error("a correlation of 0.999 counts as whole")
	}
	for what, p := range tied {
		n := draw(t, g, th, SemiIdeal, scan(14), rand.New(rand.NewPCG(1, 5)))
		for i := range n.Points {
			spoil(&n.Points[i], Alpha, 1/1.1)
		}
		pure := told(t, ctx, n, th)
		n.Points = append(n.Points, p)
		if with := told(t, ctx, n, th); with != pure {
			t.Errorf("%s: %+v became %+v", what, pure, with)
		}
		n.Points = nil
		for i := range 12 {
			k := byNumber(g, 0.3+0.05*float64(i), 1e5, 1)
			n.Points = append(n.Points, k)
		}
		list, err := n.Compare(ctx, th)
		tr, err2 := n.Locate(ctx, th)
		if err != nil || err2 != nil || list != nil || tr.Saturation != nil || tr.Onsets != nil || !math.IsNaN(tr.Hottest) {
			t.Errorf("%s: a night of them gives %v, %+v; %v, %v", what, list, tr, err, err2)
		}
		if _, err := n.FindFactor(ctx); !errors.Is(err, ErrNoFactor) {
			t.Errorf("%s: a factor of them gives %v", what, err)
		}
	}
}

// told is what a night says where T and N are held against each other.
func told(t *testing.T, ctx context.Context, n *Night, th *Theory) [6]float64 {
	t.Helper()
	list, err := n.Compare(ctx, th)
	if err != nil {
		t.Fatal(err)
	}
	tr, err := n.Locate(ctx, th)
	if err != nil {
		t.Fatal(err)
	}
	f, err := n.FindFactor(ctx)
	if err != nil {
		t.Fatal(err)
	}
	return [6]float64{list[0].Chi2, tr.Saturation.Critical.V, tr.Onsets[0].Ratio.V, tr.Hottest, f.List[0].Factor.V, f.Lead}
}
