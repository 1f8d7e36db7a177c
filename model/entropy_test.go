package model_test

import (
	"math"
	"testing"

	"fallshadow/model"
	"fallshadow/model/bose"
)

func TestIdealEntropyAndEnergy(t *testing.T) {
	for _, r := range records(t, "entropy_ideal_trap.csv") {
		reduced := r.cell["t"]
		within(t, "entropy", model.IdealEntropy(reduced)/r.cell["S_per_NkB"], 1, 5e-12)
		within(t, "energy", model.IdealEnergy(reduced)/r.cell["E_per_NkTc0"], 1, 5e-12)
		within(t, "fraction", model.IdealFraction(reduced), r.cell["condensate_fraction"], 1e-12)
	}
	for id, got := range map[string]float64{"W07": model.IdealEntropy(1), "W08": model.IdealEnergy(1)} {
		expected, tolerance := worked(t, id)
		within(t, id, got, expected, tolerance)
	}
}

// TestHeatCapacityJump is worked example W09: C(Tc−) − C(Tc+) = 9ζ(3)/ζ(2) N k.
func TestHeatCapacityJump(t *testing.T) {
	const h = 1e-4
	e := model.IdealEnergy
	below := (3*e(1) - 4*e(1-h) + e(1-2*h)) / (2 * h)
	above := (-3*e(1) + 4*e(1+h) - e(1+2*h)) / (2 * h)
	expected, tolerance := worked(t, "W09")
	within(t, "W09", below-above, expected, tolerance)
	within(t, "exact", below-above, 9*bose.Zeta3/bose.Zeta2, 1e-3)
}

// TestClassicalEntropy: far above Tc a gas has s = 4 − ln z (Sackur-Tetrode in a trap).
func TestClassicalEntropy(t *testing.T) {
	within(t, "dilute", model.ThermalEntropy(30), 34, 1e-12)
	if got := model.IdealEntropy(math.NaN()); !math.IsNaN(got) {
		t.Errorf("entropy at an unknown temperature is %g", got)
	}
}
