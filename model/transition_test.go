package model

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"fallshadow/model/bose"
)

// TestTransitionHandbook compares with published numbers; their sources stand in
// worked_examples.csv.
func TestTransitionHandbook(t *testing.T) {
	trap := unitTrap(1, 1, 1)
	const n, scattering = 1e6, 1e-9
	lambda := ThermalWavelength(CriticalTemperature(n, trap), rubidium)
	perAtom := math.Cbrt(n)
	topTrap := TrapHz(373/math.Sqrt(8), 373/math.Sqrt(8), 373)
	long := TrapHz(413, 413, 8.69)
	for id, got := range map[string]float64{
		"W01": KB * CriticalTemperature(n, trap) / (HBar * perAtom),
		"W02": CriticalTemperature(n, TrapHz(100, 100, 100)) / perAtom * 1e9,
		"W03": -FiniteSizeShift(n, trap) * perAtom,
		"W04": InteractionShift(n, rubidium, scattering, trap) * lambda / scattering,
		"W05": InteractionShift(n, rubidium, scattering, trap) / scattering * trap.Length(rubidium) / math.Pow(n, 1./6),
		"W15": InteractionShift(1, rubidium, 5.31e-9, long),
		"W16": CriticalTemperature(40000, topTrap) * 1e9,
		"W17": TransitionTemperature(40000, rubidium, 100.4*A0, topTrap) / CriticalTemperature(40000, topTrap),
	} {
		expected, tolerance := workedExample(t, id)
		within(t, id, got, expected, tolerance)
	}
}

// The coefficients of the interaction shift are first-order mean field: at fixed N the
// thermal cloud in V + 2gn, μ = 2gn(0), loses δN = 4(a/λ0)/ζ(3) times the integral below.
func TestInteractionShiftFromDensity(t *testing.T) {
	integrand := func(x float64) float64 {
		return x * x * bose.G12(x*x) * (bose.Zeta32 - bose.G32(x*x))
	}
	integral := 4 / math.Sqrt(math.Pi) * (quad.Fixed(integrand, 0, 2, 60, nil, 0) + quad.Fixed(integrand, 2, 7, 60, nil, 0))
	want := -4. / 3 / bose.Zeta3 * integral
	trap := TrapHz(20, 120, 90)
	const n, a = 3e5, 5e-9
	lambda := ThermalWavelength(CriticalTemperature(n, trap), rubidium)
	within(t, "per a/λ0", InteractionShift(n, rubidium, a, trap)*lambda/a, want, 1e-12)
	x := a / lambda
	within(t, "second order", BeyondMeanFieldShift(n, rubidium, a, trap), want*x+46*x*x, 1e-14)
}

func TestTransitionTemperatureOutsideItsDomain(t *testing.T) {
	if got := TransitionTemperature(0.1, rubidium, 0, unitTrap(1, 1, 1)); !math.IsNaN(got) {
		t.Errorf("a tenth of an atom condenses at %g K", got)
	}
}
