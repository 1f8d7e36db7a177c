package model

import (
	"errors"
	"math"
	"testing"

	"fallshadow/model/bose"
)

// TestHartreeFockFraction against a table computed apart; its 0 with μ = nan stands for
// no condensed solution.
func TestHartreeFockFraction(t *testing.T) {
	trap := unitTrap(1, 3, 2)
	worst := 0.
	for _, r := range readTable(t, "hartree_fock_fraction.csv") {
		n, a := r.num(t, "N"), r.num(t, "a_over_abar")*trap.Length(rubidium)
		tc := CriticalTemperature(n, trap)
		gas := must(SolveHartreeFock(n, r.num(t, "t")*tc, rubidium, a, trap))(t)
		want := r.num(t, "hartree_fock")
		within(t, "fraction N="+r["N"]+" t="+r["t"], gas.Fraction(), want, 1e-8)
		if want > 0 {
			within(t, "μ", gas.Mu/(KB*tc), r.num(t, "mu_hf_over_kTc0"), 1e-8)
		}
		near(t, "N", gas.Condensate+gas.Thermal, n, 1e-10)
		worst = math.Max(worst, math.Abs(gas.Fraction()-want))
	}
	t.Logf("fractions at most %.1e from the table", worst)
}

// The shift of Tc over (a/ā) N^{1/6} at N = 1e6, as computed apart: to first order −1.3255,
// and less in full. Tc is there the lowest temperature of the normal branch, α = 0 at
// the centre.
func TestHartreeFockTransition(t *testing.T) {
	trap := unitTrap(1, 1, 1)
	const n = 1e6
	tc := CriticalTemperature(n, trap)
	for _, c := range []struct{ a, want float64 }{{1e-3, -1.298}, {3e-3, -1.245}, {1e-2, -1.089}} {
		a := c.a * trap.Length(rubidium)
		shift := bisectRising(func(x float64) float64 {
			T := (1 + x) * tc
			f := newMeanField(a / ThermalWavelength(T, rubidium))
			return 2/math.Sqrt(math.Pi)*thermalUnit(T, trap)*f.outside(4*f.s*bose.Zeta32, 1e-14, 0) - n
		}, -0.2, 0.1)
		within(t, "shift", shift/(c.a*math.Pow(n, 1./6)), c.want, 5e-4)
	}
}

// With a → 0 the gas is ideal, and a gas far above Tc has no mean field.
func TestHartreeFockLimits(t *testing.T) {
	trap := unitTrap(1, 2, 1)
	tc := CriticalTemperature(1e5, trap)
	gas := must(SolveHartreeFock(1e5, 0.6*tc, rubidium, 1e-9*trap.Length(rubidium), trap))(t)
	within(t, "weak", gas.Fraction(), IdealFraction(0.6), 1e-3)
	gas = must(SolveHartreeFock(1e5, 20*tc, rubidium, 1e-3*trap.Length(rubidium), trap))(t)
	near(t, "hot μ", gas.Mu, -KB*20*tc*ThermalAlpha(1e5, 20*tc, trap), 1e-4)
	within(t, "hot condensate", gas.Condensate, 0, 0)
}

func TestHartreeFockRefuses(t *testing.T) {
	trap := unitTrap(1, 1, 1)
	if _, err := SolveHartreeFock(1e5, 1e-9, rubidium, -1e-9, trap); !errors.Is(err, ErrAttractive) {
		t.Errorf("attractive gas: %v", err)
	}
	for _, bad := range [][2]float64{{0, 1e-9}, {math.NaN(), 1e-9}, {1e5, 0}, {1e5, math.NaN()}} {
		if gas, err := SolveHartreeFock(bad[0], bad[1], rubidium, 1e-9, trap); err == nil {
			t.Errorf("N, T = %v give %v", bad, gas)
		}
	}
}
