package curve

import (
	"fmt"
	"math"
	"testing"

	"fallshadow/model"
	"fallshadow/model/bose"
)

// TestNearestOfLine compares with the closed form of a straight line through correlated
// errors: (y − a x)²/(σy² − 2a σxy + a² σx²).
func TestNearestOfLine(t *testing.T) {
	p := &Point{Vector: Vector{2, 5, 1, 1}}
	p.Cov[0][0], p.Cov[1][1], p.Cov[0][1], p.Cov[1][0] = 0.04, 0.09, 0.03, 0.03
	r := relation{size: 1, eval: func(_ *Point, v *Vector, _ *scales, theta, h []float64) { h[0] = v[1] - theta[0]*v[0] }}
	n := r.nearest(p, &scales{}, []float64{2}, &p.Vector)
	within(t, "distance", n.r[0], (5-2*2)/math.Sqrt(0.09-4*0.03+4*0.04), 1e-9)
	within(t, "nearest point", n.latent[1]-2*n.latent[0], 0, 1e-9)
	within(t, "number without an error", n.latent[2], 1, 0)
}

// TestNearestOfCurve compares with a search along a curve where the error is large against
// its bend, as that of T is in a nearly pure condensate.
func TestNearestOfCurve(t *testing.T) {
	p := &Point{Vector: Vector{1, 0.93, 0.55, 1}}
	p.Cov[1][1], p.Cov[2][2], p.Cov[1][2], p.Cov[2][1] = 1e-5, 0.02, -1e-4, -1e-4
	r := relation{size: 1, eval: func(_ *Point, v *Vector, _ *scales, _, h []float64) { h[0] = v[1] - (1 - v[2]*v[2]*v[2]) }}
	n := r.nearest(p, &scales{}, nil, &p.Vector)
	det := p.Cov[1][1]*p.Cov[2][2] - p.Cov[1][2]*p.Cov[1][2]
	least := math.Inf(1)
	for u := 0.0; u < 1; u += 1e-5 {
		a, b := 0.93-(1-u*u*u), 0.55-u
		least = math.Min(least, (a*a*p.Cov[2][2]-2*a*b*p.Cov[1][2]+b*b*p.Cov[1][1])/det)
	}
	within(t, "chi2", n.r[0]*n.r[0], least, 1e-5*(1+least))
}

// TestNearestBeyondTheEnd compares with a search along a law that ends at 1: a cloud that was
// measured beyond it may have been colder, or have no condensate.
func TestNearestBeyondTheEnd(t *testing.T) {
	law := func(u float64) float64 { return math.Max(0, 1-u*u*u) }
	r := relation{size: 1, ends: true, eval: func(_ *Point, v *Vector, _ *scales, _, h []float64) { h[0] = v[1] - law(v[2]) }}
	for _, c := range []struct{ f, fErr, t, tErr, correlation float64 }{
		{0.01, 2e-5, 1.003, 0.01, 0}, {0.01, 2e-5, 1.003, 0.01, -0.3}, {0.03, 1e-4, 0.9999, 0.01, 0.2}, {0.3, 1e-3, 1.05, 0.01, 0},
		{0.002, 0.001, 1.2, 0.05, 0}, {0.002, 0.001, 1.02, 0.02, 0.5}, {0.002, 0.001, 0.98, 0.003, -0.1},
	} {
		p := &Point{Vector: Vector{1, c.f, c.t, 1}}
		p.Cov[1][1], p.Cov[2][2] = c.fErr*c.fErr, c.tErr*c.tErr
		p.Cov[1][2] = c.correlation * c.fErr * c.tErr
		p.Cov[2][1] = p.Cov[1][2]
		n := r.nearest(p, &scales{}, nil, &p.Vector)
		least := math.Inf(1)
		for u := 0.5; u < 1.5; u += 1e-6 {
			a, b := (c.f-law(u))/c.fErr, (c.t-u)/c.tErr
			least = math.Min(least, (a*a-2*c.correlation*a*b+b*b)/(1-c.correlation*c.correlation))
		}
		within(t, fmt.Sprintf("chi2 of %+v", c), n.chi2(), least, 0.01*(1+least))
	}
}

// TestNearestOfTwo: two linear relations of independent numbers add their squares.
func TestNearestOfTwo(t *testing.T) {
	p := &Point{Vector: Vector{3, 4, 1, 1}}
	p.Cov[0][0], p.Cov[1][1], p.Cov[0][1], p.Cov[1][0] = 1, 4, 0.5, 0.5
	r := relation{size: 2, eval: func(_ *Point, v *Vector, _ *scales, _, h []float64) { h[0], h[1] = v[0], v[1] }}
	n := r.nearest(p, &scales{}, nil, &p.Vector)
	want := (9*4 - 2*3*4*0.5 + 16*1) / (1*4 - 0.25)
	within(t, "chi2", n.r[0]*n.r[0]+n.r[1]*n.r[1], want, 1e-9)
}

func TestExcess(t *testing.T) {
	within(t, "at 0", Excess(0), 0, 0)
	within(t, "below 0", Excess(-1), 0, 0)
	within(t, "slope at 0", Excess(1e-6)/1e-6, bose.Zeta2/bose.Zeta3, 1e-2)
	g := rubidium(t)
	const temperature = 100e-9
	for _, y := range []float64{0.013, 0.2, 1.7, 6, 20} {
		m, err := model.SemiIdealAt(temperature, y*model.KB*temperature, g.Mass, g.ScatteringLength, g.Trap)
		if err != nil {
			t.Fatal(err)
		}
		want := m.Thermal/g.scales().saturated(temperature) - 1
		within(t, "excess", Excess(y), want, 1e-4*(want+0.01))
	}
	if !math.IsNaN(Excess(math.NaN())) {
		t.Error("NaN has an excess")
	}
}

func TestGroups(t *testing.T) {
	values := []float64{3, 1, 3, math.NaN(), 1, 2.4}
	if g := ByValue(values); len(g) != 3 || g[0].At != 1 || len(g[0].Places) != 2 || g[2].Places[1] != 2 {
		t.Errorf("by value: %+v", g)
	}
	if g := ByWidth(values, 1); len(g) != 3 || g[1].At != 2.5 || g[2].At != 3.5 {
		t.Errorf("by width: %+v", g)
	}
}

// TestMeanOf: weights 1 and 1/4 where the errors explain the scatter, else with the rest of
// it in them; a value without an error does not count.
func TestMeanOf(t *testing.T) {
	nan := math.NaN()
	for _, c := range []struct {
		values, errs                        []float64
		mean, err, chi2, scatter, own, span float64
	}{
		{[]float64{10, 11, 99}, []float64{1, 2, nan}, 10.2, math.Sqrt(0.8), 0.2, math.Sqrt(0.2), 0, 1 / math.Sqrt2},
		// Own² is 12.5 − 2.5; the weights are 1/11 and 1/14.
		{[]float64{10, 15, nan}, []float64{1, 2, 1}, (10*14 + 15*11) / 25., math.Sqrt(11 * 14 / 25.), 5, math.Sqrt(5), math.Sqrt(10), 5 / math.Sqrt2},
	} {
		m := MeanOf(c.values, c.errs, []int{0, 1, 2})
		within(t, "mean", m.V, c.mean, 1e-12)
		within(t, "error", m.Err, c.err, 1e-12)
		within(t, "chi2", m.Chi2, c.chi2, 1e-12)
		within(t, "scatter", m.Scatter(), c.scatter, 1e-12)
		within(t, "spread", m.Spread, c.span, 1e-12)
		within(t, "own spread", m.Own, c.own, 1e-12)
		if m.Count != 2 {
			t.Errorf("%d values count", m.Count)
		}
	}
	// Of like errors that explain little, it is the spread over √n.
	m := MeanOf([]float64{90, 100, 110, 120}, []float64{1, 1, 1, 1}, []int{0, 1, 2, 3})
	within(t, "error by the scatter", m.Err, m.Spread/2, 1e-12)
	if m := MeanOf([]float64{1}, []float64{0}, []int{0}); m.Count != 0 || !math.IsNaN(m.V) {
		t.Errorf("mean of nothing: %+v", m)
	}
}

// TestScales holds the powers against the formulas of package model.
func TestScales(t *testing.T) {
	g := rubidium(t)
	s := g.scales()
	const n, temperature = 123456., 87e-9
	mu, err := model.Mu(n, g.Mass, g.ScatteringLength, g.Trap)
	if err != nil {
		t.Fatal(err)
	}
	within(t, "mu", s.mu(n)/mu, 1, 1e-12)
	within(t, "eta", s.eta(n)/model.Eta(n, g.Mass, g.ScatteringLength, g.Trap), 1, 1e-12)
	within(t, "t", s.reduced(temperature, n)/g.Reduced(temperature, n), 1, 1e-12)
	within(t, "saturated", s.saturated(temperature)/model.ThermalNumber(temperature, 0, g.Trap), 1, 1e-12)
	g.ScatteringLength = -g.ScatteringLength
	if s := g.scales(); !math.IsNaN(s.mu(n)) || !math.IsNaN(s.eta(n)) {
		t.Error("an attractive gas has a Thomas-Fermi condensate")
	}
}
