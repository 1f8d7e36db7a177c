package model

import (
	"math"

	"fallshadow/model/bose"
)

// ThermalWavelength returns λ_T = h/√(2πm kT) in m at temperature T in K.
func ThermalWavelength(T, mass float64) float64 {
	return H / math.Sqrt(2*math.Pi*mass*KB*T)
}

// ThermalPeakDensity returns the density in 1/m³ at the centre of the trap of n ideal
// thermal atoms at temperature T in K and fugacity e^{−α},
//
//	n (mω̄²/2πkT)^{3/2} g_{3/2}(z)/g_3(z),
//
// which is g_{3/2}(z)/λ_T³ where n is the number that T and z imply. The domain is
// α ≥ 0, T > 0. Source: Pethick, Smith, Bose-Einstein Condensation in Dilute Gases,
// Sec. 2.3.
func ThermalPeakDensity(n, T, alpha, mass float64, trap Trap) float64 {
	width := math.Sqrt(2*math.Pi*KB*T/mass) / trap.GeometricMean()
	return n * bose.G32(alpha) / bose.G3(alpha) / (width * width * width)
}

// PhaseSpaceDensity returns n λ_T³ for a density in 1/m³, a temperature in K and a mass
// in kg: 2.612 at the centre of an ideal cloud at the transition.
func PhaseSpaceDensity(density, T, mass float64) float64 {
	l := ThermalWavelength(T, mass)
	return density * l * l * l
}
