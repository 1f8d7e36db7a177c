package model

import (
	"math"
	"testing"

	"fallshadow/model/bose"
)

func TestIdealEntropyAndEnergy(t *testing.T) {
	for _, r := range readTable(t, "entropy_ideal_trap.csv") {
		reduced := r.num(t, "t")
		within(t, "entropy", IdealEntropy(reduced)/r.num(t, "S_per_NkB"), 1, 5e-12)
		within(t, "energy", IdealEnergy(reduced)/r.num(t, "E_per_NkTc0"), 1, 5e-12)
		within(t, "fraction", IdealFraction(reduced), r.num(t, "condensate_fraction"), 1e-12)
	}
	for id, got := range map[string]float64{"W07": IdealEntropy(1), "W08": IdealEnergy(1)} {
		expected, tolerance := workedExample(t, id)
		within(t, id, got, expected, tolerance)
	}
}

// TestHeatCapacityJump is worked example W09: C(Tc−) − C(Tc+) = 9ζ(3)/ζ(2) N k.
func TestHeatCapacityJump(t *testing.T) {
	const h = 1e-4
	e := IdealEnergy
	below := (3*e(1) - 4*e(1-h) + e(1-2*h)) / (2 * h)
	above := (-3*e(1) + 4*e(1+h) - e(1+2*h)) / (2 * h)
	expected, tolerance := workedExample(t, "W09")
	within(t, "W09", below-above, expected, tolerance)
	within(t, "exact", below-above, 9*bose.Zeta3/bose.Zeta2, 1e-3)
}

// TestClassicalEntropy: far above Tc a gas has s = 4 − ln z (Sackur-Tetrode in a trap).
func TestClassicalEntropy(t *testing.T) {
	within(t, "dilute", ThermalEntropy(30), 34, 1e-12)
	if got := IdealEntropy(math.NaN()); !math.IsNaN(got) {
		t.Errorf("entropy at an unknown temperature is %g", got)
	}
}
