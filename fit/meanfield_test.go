package fit

import (
	"math"
	"testing"

	"fallshadow/model"
)

// TestExcess: between its nodes the table gives back the semi-ideal column of package model: each
// place within a hundredth, and the atoms within one width within two parts in ten thousand. In a
// long flight from a small condensate the ridge about its edge is narrowest.
func TestExcess(t *testing.T) {
	lab := cigarLab(t)
	for _, c := range []struct{ flight, T, mu float64 }{
		{8e-3, 110e-9, 40e-9}, {22e-3, 110e-9, 40e-9}, {22e-3, 110e-9, 8e-9}, {40e-3, 60e-9, 55e-9},
	} {
		c.mu *= model.KB
		e, err := newExcess(lab, c.flight, c.T, c.mu)
		if err != nil {
			t.Fatal(err)
		}
		column := semiIdealColumn(t, lab, c.flight, c.T, c.mu)
		sum, want, worst := 0.0, 0.0, 0.0
		const step = 0.07
		for u := 0.02; u < 1; u += step {
			for v := -0.97; v < 1; v += step {
				real, plain := column(u, v)
				got := plain * e.at(u, v)
				sum += got
				want += real
				worst = math.Max(worst, math.Abs(got/real-1))
			}
		}
		within(t, "worst place", worst, 0, 0.01)
		within(t, "atoms in the middle", sum/want, 1, 2e-4)
	}
}

// semiIdealColumn returns a function that gives, at u, v widths from the centre, the column of a
// semi-ideal thermal part and that of an ideal one of as many atoms.
func semiIdealColumn(t *testing.T, lab *Lab, flight, T, mu float64) func(u, v float64) (column, plain float64) {
	t.Helper()
	sp := &lab.Species
	cloud, err := model.NewSemiIdealCloud(T, mu, sp.Mass, lab.Trap, lab.View, flight, lab.Release)
	if err != nil {
		t.Fatal(err)
	}
	mix, err := model.SemiIdealAt(T, mu, sp.Mass, sp.ScatteringLength, lab.Trap)
	if err != nil {
		t.Fatal(err)
	}
	b, err := model.ExpandThermal(lab.Trap, flight, lab.Release)
	if err != nil {
		t.Fatal(err)
	}
	shape := lab.View.Project(model.ThermalVariances(T, sp.Mass, lab.Trap, b))
	first, second, angle := shape.Principal(math.Atan2(lab.View[1][0], lab.View[0][0]))
	s1, s2 := math.Sqrt(first), math.Sqrt(second)
	s, c := math.Sincos(angle)
	return func(u, v float64) (column, plain float64) {
		x, y := c*u*s1-s*v*s2, s*u*s1+c*v*s2
		return cloud.Column(x, y), model.ThermalColumn(mix.Thermal, 0, shape, x, y)
	}
}
