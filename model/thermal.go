package model

import (
	"math"

	"fallshadow/model/bose"
)

// The ideal Bose gas above the condensate, semiclassical (kT ≫ ħω): density
// λ^−3 g_{3/2}, exact for all flights after a ballistic release. alpha = −ln z ≥ 0
// throughout, 0 below the transition. Pethick and Smith, Bose-Einstein Condensation in
// Dilute Gases, chapter 2.

// ThermalVariances returns σ_i² = (kT/m)(b_i/ω_i)² in m² along the trap axes: the
// variances of the gaussian that the Bose functions take as their argument. t in K, mass
// in kg, b from ExpandThermal (ones in the trap).
func ThermalVariances(t, mass float64, trap Trap, b [3]float64) (v [3]float64) {
	for i, w := range trap.Omega {
		v[i] = KB * t / mass * (b[i] / w) * (b[i] / w)
	}
	return v
}

// ThermalNumber returns the number of thermal atoms g_3(e^−alpha)(kT/ħω̄)³; at alpha = 0
// that is the saturated number.
func ThermalNumber(t, alpha float64, trap Trap) float64 {
	x := KB * t / (HBar * trap.GeometricMean())
	return bose.G3(alpha) * x * x * x
}

// ThermalAlpha inverts ThermalNumber: the alpha of n atoms at t; NaN where n exceeds the
// saturated number.
func ThermalAlpha(n, t float64, trap Trap) float64 {
	x := HBar * trap.GeometricMean() / (KB * t)
	return bose.Alpha3(n * x * x * x)
}

// ThermalPeakColumn returns the column density N g_2/(2π√det S g_3) in 1/m² at the centre
// of n atoms whose variances in the picture are s (m²).
func ThermalPeakColumn(n, alpha float64, s Shape) float64 {
	return n / (2 * math.Pi * math.Sqrt(s.Det())) * bose.G2(alpha) / bose.G3(alpha)
}

// ThermalColumn returns the column density N g_2(e^−(alpha+q/2))/(2π√det S g_3(e^−alpha))
// in 1/m² at the offset (x, y) in m from the centre, q = rᵀS⁻¹r: a sample (not a pixel
// mean) whose integral is n.
func ThermalColumn(n, alpha float64, s Shape, x, y float64) float64 {
	return n / (2 * math.Pi * math.Sqrt(s.Det())) * bose.G2(alpha+s.Quadratic(x, y)/2) / bose.G3(alpha)
}

// ThermalPeakLine returns the peak N g_{5/2}/(√(2π)σ g_3) in 1/m of the density of n atoms
// integrated over both other axes, for the variance v (m²) along the axis.
func ThermalPeakLine(n, alpha, v float64) float64 {
	return n / math.Sqrt(2*math.Pi*v) * bose.G52(alpha) / bose.G3(alpha)
}
