package model

import (
	"math"

	"fallshadow/model/bose"
)

// Coefficients of the shift of the critical temperature by the interaction. The first
// order follows from −(4/3ζ(3)) (4/√π) ∫ x² g_{1/2} (ζ(3/2) − g_{3/2}) dx at z = e^{−x²}
// (the test repeats the quadrature).
const (
	shiftPerWavelength = -3.42603204918448 // δTc/Tc⁰ per a/λ0
	shiftPerLength     = -1.32550279950685 // δTc/Tc⁰ per (a/ā) N^{1/6}
	shiftSecondOrder   = 46                // per (a/λ0)², measured as 46(5); from memory
)

// CriticalTemperature returns the transition temperature in K of n ideal bosons,
//
//	k Tc⁰ = ħω̄ (n/ζ(3))^{1/3},
//
// in the thermodynamic limit. The domain is n > 0. Source: Dalfovo, Giorgini,
// Pitaevskii, Stringari, Rev. Mod. Phys. 71, 463 (1999), Eq. (17).
func CriticalTemperature(n float64, trap Trap) float64 {
	return HBar * trap.GeometricMean() * math.Cbrt(n/bose.Zeta3) / KB
}

// FiniteSizeShift returns the relative shift δTc/Tc⁰ of the transition of n ideal bosons
// by the zero-point energy,
//
//	−ζ(2)/(2 ζ(3)^{2/3}) (ω_m/ω̄) n^{−1/3} = −0.72750 (ω_m/ω̄) n^{−1/3},
//
// to first order, so for n ≫ 1. Source: Dalfovo et al. (1999), Eq. (20).
func FiniteSizeShift(n float64, trap Trap) float64 {
	c := math.Cbrt(bose.Zeta3)
	return -bose.Zeta2 / (2 * c * c) * trap.ArithmeticMean() / trap.GeometricMean() / math.Cbrt(n)
}

// InteractionShift returns the relative shift δTc/Tc⁰ of the transition by the mean
// field of a contact interaction, to first order in the scattering length a in m,
//
//	−1.32550 (a/ā) n^{1/6} = −3.42603 a/λ0,   λ0 = h/√(2πm kTc⁰).
//
// Self-consistent mean field gives less: at n = 1e6 the coefficient is −1.298 for
// a/ā = 1e-3 and −1.089 for 1e-2. Source: Giorgini, Pitaevskii, Stringari, Phys. Rev. A
// 54, R4633 (1996).
func InteractionShift(n, mass, a float64, trap Trap) float64 {
	return shiftPerLength * a / trap.Length(mass) * math.Pow(n, 1./6)
}

// BeyondMeanFieldShift returns the relative shift δTc/Tc⁰ by the interaction with the
// measured second order, in x = a/λ0,
//
//	−3.42603 x + 46(5) x²,
//
// for 0 ≤ x up to 0.05 or so. Source: Smith, Campbell, Tammuz, Hadzibabic, Phys. Rev.
// Lett. 106, 250403 (2011); the 46 is quoted from memory.
func BeyondMeanFieldShift(n, mass, a float64, trap Trap) float64 {
	x := InteractionShift(n, mass, a, trap) / shiftPerWavelength
	return x * (shiftPerWavelength + shiftSecondOrder*x)
}

// TransitionTemperature returns Tc⁰ with its finite-size and first-order interaction
// shifts added up, in K; NaN where they add up to −1 or less, far outside their domain.
func TransitionTemperature(n, mass, a float64, trap Trap) float64 {
	factor := 1 + FiniteSizeShift(n, trap) + InteractionShift(n, mass, a, trap)
	if factor <= 0 {
		return math.NaN()
	}
	return CriticalTemperature(n, trap) * factor
}
