package model

import (
	"errors"
	"math"
	"testing"

	"fallshadow/model/bose"
)

// TestSemiIdealFraction against a table computed apart by another quadrature.
func TestSemiIdealFraction(t *testing.T) {
	trap := unitTrap(1, 3, 2)
	worst := 0.
	for _, r := range readTable(t, "hartree_fock_fraction.csv") {
		n, a := r.num(t, "N"), r.num(t, "a_over_abar")*trap.Length(rubidium)
		tc := CriticalTemperature(n, trap)
		gas := must(SolveSemiIdeal(n, r.num(t, "t")*tc, rubidium, a, trap))(t)
		within(t, "fraction", gas.Fraction(), r.num(t, "semi_ideal"), 1e-8)
		within(t, "μ", gas.Mu/(KB*tc), r.num(t, "mu_semi_over_kTc0"), 1e-8)
		near(t, "N", gas.Condensate+gas.Thermal, n, 1e-12)
		worst = math.Max(worst, math.Abs(gas.Fraction()-r.num(t, "semi_ideal")))
	}
	t.Logf("fractions at most %.1e from the table", worst)
}

func TestSemiIdealAboveTransition(t *testing.T) {
	trap := unitTrap(1, 1, 1)
	tc := CriticalTemperature(1e5, trap)
	for _, reduced := range []float64{1.0001, 1.3, 5} {
		gas := must(SolveSemiIdeal(1e5, reduced*tc, rubidium, 5e-9, trap))(t)
		within(t, "condensate", gas.Condensate, 0, 0)
		back := must(SemiIdealAt(reduced*tc, gas.Mu, rubidium, 5e-9, trap))(t)
		near(t, "N", back.Thermal, 1e5, 1e-11)
	}
}

// The integral has known ends: at y = 0 it is ζ(3), with slope ζ(2), and far above it is
// the shell around the condensate, 4√(y/π) ζ(5/2) (1 + O(1/y²)).
func TestSemiIdealIntegral(t *testing.T) {
	near(t, "just above 0", semiIdealIntegral(1e-14, bose.G32), bose.Zeta3, 1e-12)
	slope := (semiIdealIntegral(1e-7, bose.G32) - bose.Zeta3) / 1e-7
	near(t, "slope", slope, bose.Zeta2, 2e-3)
	near(t, "far", semiIdealIntegral(1000, bose.G32), 4*math.Sqrt(1000/math.Pi)*bose.Zeta52, 2e-6)
	last := bose.Zeta3
	for y := 1e-6; y < 1e4; y *= 1.1 {
		next := semiIdealIntegral(y, bose.G32)
		if !(next > last) {
			t.Fatalf("N_th falls from %g to %g at μ/kT = %g: the solution would not be unique", last, next, y)
		}
		last = next
	}
}

// S = −∂Ω/∂T at fixed potential, Ω = −kT ∫ λ^{−3} g_{5/2}(e^{−|μ−V|/kT}) d³r.
func TestSemiIdealEntropy(t *testing.T) {
	trap := unitTrap(2, 1, 1)
	omega := func(T, mu float64) float64 {
		return -T * thermalUnit(T, trap) * semiIdealIntegral(mu/(KB*T), bose.G52)
	}
	T := 300 * HBar / KB
	for _, y := range []float64{1e-4, 0.05, 0.4, 3, 20} {
		h, mu := 1e-3*T, y*KB*T
		slope := (omega(T-2*h, mu) - 8*omega(T-h, mu) + 8*omega(T+h, mu) - omega(T+2*h, mu)) / (12 * h)
		near(t, "entropy", SemiIdealEntropy(T, mu, trap), -slope, 1e-10)
	}
	near(t, "at the transition", SemiIdealEntropy(T, 0, trap), 4*bose.Zeta4*thermalUnit(T, trap), 1e-13)
	near(t, "across the transition", SemiIdealEntropy(T, 1e-14*KB*T, trap), SemiIdealEntropy(T, 0, trap), 1e-12)
}

func TestSemiIdealRefuses(t *testing.T) {
	trap := unitTrap(1, 1, 1)
	if _, err := SolveSemiIdeal(1e5, 1e-9, rubidium, -1e-9, trap); !errors.Is(err, ErrAttractive) {
		t.Errorf("attractive gas: %v", err)
	}
	for _, bad := range [][2]float64{{0, 1e-9}, {math.NaN(), 1e-9}, {1e5, 0}, {1e5, math.NaN()}, {math.Inf(1), 1e-9}} {
		if gas, err := SolveSemiIdeal(bad[0], bad[1], rubidium, 1e-9, trap); err == nil {
			t.Errorf("N, T = %v give %v", bad, gas)
		}
	}
}
