package model

import (
	"math"
	"testing"
)

// TestFiniteSizeFraction checks the formula against the table's own evaluation of it and
// states its distance from the exact sums over levels.
func TestFiniteSizeFraction(t *testing.T) {
	worst := map[float64]float64{}
	for _, r := range readTable(t, "ideal_finite.csv") {
		n, reduced := r.num(t, "N"), r.num(t, "t")
		trap := unitTrap(r.num(t, "w1"), r.num(t, "w2"), r.num(t, "w3"))
		got := FiniteSizeFraction(reduced, n, trap)
		within(t, "formula", got, math.Max(0, r.num(t, "finite_size_formula")), 6e-7)
		within(t, "ideal", IdealFraction(reduced), r.num(t, "thermodynamic_limit"), 1e-12)
		off := math.Abs(got - r.num(t, "N0_over_N_exact"))
		worst[n] = math.Max(worst[n], off)
		if ideal := math.Abs(IdealFraction(reduced) - r.num(t, "N0_over_N_exact")); reduced <= 0.95 && !(off < ideal/3) {
			t.Errorf("N=%g t=%g: %.4g off, the uncorrected law %.4g", n, reduced, off, ideal)
		}
	}
	for n, limit := range map[float64]float64{1e3: 0.017, 1e4: 0.0043, 1e5: 0.0059, 1e6: 0.0004} {
		t.Logf("N = %g: at most %.5f from the exact fraction", n, worst[n])
		within(t, "distance", worst[n], 0, limit)
	}
}

// The perturbative column of the table is the same law unclipped.
func TestInteractingFraction(t *testing.T) {
	trap := unitTrap(1, 1, 1)
	for _, r := range readTable(t, "hartree_fock_fraction.csv") {
		a := r.num(t, "a_over_abar") * trap.Length(rubidium)
		eta := Eta(r.num(t, "N"), rubidium, a, trap)
		within(t, "η", eta, r.num(t, "eta"), 6e-7)
		got := InteractingFraction(r.num(t, "t"), eta)
		within(t, "fraction", got, math.Max(0, r.num(t, "perturbative")), 1e-8)
		if r.num(t, "t") <= 0.7 && eta < 0.41 {
			within(t, "from Hartree-Fock", got, r.num(t, "hartree_fock"), 0.009)
			within(t, "from semi-ideal", got, r.num(t, "semi_ideal"), 0.025)
		}
	}
	expected, tolerance := workedExample(t, "W06")
	within(t, "W06", Eta(1, rubidium, trap.Length(rubidium), trap), expected, tolerance)
}

func TestFractionEdges(t *testing.T) {
	trap := unitTrap(1, 1, 1)
	within(t, "cold", InteractingFraction(0, 0.4), 1, 0)
	within(t, "at Tc", InteractingFraction(1, 0.4), 0, 0)
	within(t, "hot", InteractingFraction(3, 0.4), 0, 0)
	within(t, "hot and finite", FiniteSizeFraction(2, 1e4, trap), 0, 0)
	if got := Eta(1e5, rubidium, -1e-9, trap); !math.IsNaN(got) {
		t.Errorf("η of an attractive gas is %g", got)
	}
	if got := InteractingFraction(math.NaN(), 0.4); !math.IsNaN(got) {
		t.Errorf("fraction at an unknown temperature is %g", got)
	}
}
