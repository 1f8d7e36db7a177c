package fit

import (
	"slices"
	"testing"
)

// TestCeilingFlag: with 5 % of stray light the apparent density ends at 3.0, and a peak of
// that optical density is told from its edges only; one of 1 is not.
func TestCeilingFlag(t *testing.T) {
	for _, c := range []struct {
		stray, n0 float64
		want      bool
	}{{0.05, 3e5, true}, {0.05, 4e3, false}, {0, 3e5, false}} {
		sc := standardScene(t, 60e-9, c.n0, 4)
		lab := *sc.lab
		lab.Optics.Stray = c.stray
		sc.lab, sc.withoutNoise = &lab, true
		r := mustFit(t, sc, sc.draw(t), Options{})
		if got := slices.Contains(r.Flags, FlagCeiling); got != c.want {
			t.Errorf("stray %g, peak %.3g: flagged %v", c.stray, r.PeakOD/lab.Optics.Alpha, r.Flags)
		}
	}
}
