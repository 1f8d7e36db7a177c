package model

import (
	"math"
	"testing"

	"fallshadow/model/bose"
)

// TestThermalPeakDensity against thermal_cloud.csv, whose peak density is that of the
// expanded cloud: the density falls as the product of the widths.
func TestThermalPeakDensity(t *testing.T) {
	trap := TrapHz(30, 80, 120)
	const T, flight = 200e-9, 15e-3
	for _, r := range readTable(t, "thermal_cloud.csv") {
		b, err := ExpandThermal(trap, flight, Release{})
		if err != nil {
			t.Fatal(err)
		}
		alpha := -math.Log(r.num(t, "z"))
		got := ThermalPeakDensity(r.num(t, "N"), T, alpha, rubidium, trap) / (b[0] * b[1] * b[2]) * 1e-18
		within(t, r["z"], got/r.num(t, "n_0_per_um3"), 1, 1e-7)
	}
}

// A cloud whose number follows from T and z has n λ³ = g_{3/2}(z).
func TestPhaseSpaceDensity(t *testing.T) {
	trap := TrapHz(20, 120, 90)
	for _, alpha := range []float64{0, 1e-6, 0.3, 4} {
		n := ThermalPeakDensity(ThermalNumber(3e-7, alpha, trap), 3e-7, alpha, rubidium, trap)
		within(t, "n λ³", PhaseSpaceDensity(n, 3e-7, rubidium)/bose.G32(alpha), 1, 1e-13)
	}
}

// W14: hydrogen condenses at 50 µK and 1.8e14 per cm³ (Fried et al., Phys. Rev. Lett. 81,
// 3811 (1998)), where n λ³ = ζ(3/2); W25: λ of 87Rb at 100 nK in µm.
func TestDensityHandbook(t *testing.T) {
	const hydrogen = 1.007825031898 * U
	expected, tolerance := workedExample(t, "W14")
	within(t, "W14", bose.Zeta32/PhaseSpaceDensity(1e20, 50e-6, hydrogen), expected, tolerance)
	expected, tolerance = workedExample(t, "W25")
	within(t, "W25", ThermalWavelength(100e-9, rubidium)*1e6, expected, tolerance)
}
