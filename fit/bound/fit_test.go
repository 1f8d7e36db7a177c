package bound_test

import (
	"context"
	"fmt"
	"math"
	"testing"

	"fallshadow/fit"
	"fallshadow/fit/bound"
)

// TestFitQuotesTheBound gives the fit the expected counts of a night's clouds, without noise
// but with the variance that noise would have: it must find the truth, and its covariance
// must be the bound. The fit knows the bound's code no more than the bound knows the fit's.
func TestFitQuotesTheBound(t *testing.T) {
	ws := fit.NewWorkspace()
	for _, row := range bound.ReadTable(t, "evap_truth.csv") {
		if k := row["shot"]; k != "2" && k != "5" && k != "7" && k != "10" && k != "13" {
			continue
		}
		e, c := bound.Evap(t, row)
		want, err := bound.Bound(context.Background(), e, c)
		if err != nil {
			t.Fatal(err)
		}
		pic := &fit.Picture{Width: e.Width, Height: e.Height, Noise: fit.Noise(e.Noise)}
		pic.Atoms, pic.Light = bound.Expected(t, &e, &c)
		for range pic.Atoms {
			pic.Good = append(pic.Good, true)
		}
		lab := &fit.Lab{Species: e.Species, Trap: e.Trap, View: e.View, Release: e.Release, Optics: fit.Optics(e.Optics)}
		got, err := fit.Cloud(context.Background(), pic, lab, e.Flight, fit.Options{}, ws)
		if err != nil {
			t.Fatal(err)
		}
		line := fmt.Sprintf("shot %2s %-8s", row["shot"], got.Model)
		n := &got.Numbers
		for _, q := range []struct {
			name                string
			v, err, truth, best float64
		}{
			{"T", n.T.V, n.T.Err, c.T, want.T},
			{"N_th", n.Thermal.V, n.Thermal.Err, c.ThermalAtoms, want.Thermal},
			{"N0", n.Condensate.V, n.Condensate.Err, c.CondensateAtoms, want.Condensate},
			{"N", n.Atoms.V, n.Atoms.Err, c.ThermalAtoms + c.CondensateAtoms, want.Atoms},
			{"fraction", n.Fraction.V, n.Fraction.Err, c.CondensateAtoms / (c.ThermalAtoms + c.CondensateAtoms), want.Fraction},
			{"mu", n.Mu.V, n.Mu.Err, c.Mu, want.Mu},
		} {
			if math.IsNaN(q.best) {
				continue
			}
			line += fmt.Sprintf("  %s %.4f (off %.2f)", q.name, q.err/q.best, (q.v-q.truth)/q.best)
			if d := math.Abs(q.err/q.best - 1); !(d <= 0.01) {
				t.Errorf("shot %s: error of %s is %g, its bound %g", row["shot"], q.name, q.err, q.best)
			}
			if d := math.Abs(q.v - q.truth); !(d <= 0.1*q.best) {
				t.Errorf("shot %s: %s is %g, the truth %g, %.2f bounds off", row["shot"], q.name, q.v, q.truth, d/q.best)
			}
		}
		t.Log(line)
	}
	t.Log("quoted error over bound (value minus truth in bounds)")
}
