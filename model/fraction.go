package model

import (
	"math"

	"fallshadow/model/bose"
)

// IdealFraction returns the condensate fraction 1 − t³ of the ideal gas in a harmonic
// trap at t = T/Tc⁰ in the thermodynamic limit, 0 for t ≥ 1.
func IdealFraction(t float64) float64 { return math.Max(0, 1-t*t*t) }

// FiniteSizeFraction returns the condensate fraction of n ideal bosons at t = T/Tc⁰ with
// the first finite-size correction,
//
//	1 − t³ − (3ω_m/2ω̄) [ζ(2)/ζ(3)^{2/3}] t² n^{−1/3},
//
// clipped to [0, 1]. Against the exact sum over levels it is at most 0.0043 off for
// n = 1e4 and 0.0004 for 1e6 (isotropic), 0.0059 for 1e5 in a cigar of 1:10. The clipped
// 0 near t = 1 leaves out the small exact rest (0.0169 for n = 1e3, t = 0.95). Source:
// Dalfovo et al., Rev. Mod. Phys. 71, 463 (1999), Eq. (19).
func FiniteSizeFraction(t, n float64, trap Trap) float64 {
	return clip(1 - t*t*t + 3*t*t*FiniteSizeShift(n, trap))
}

// Eta returns the ratio of the interaction to the thermal energy scale,
//
//	η = μ(T=0)/kTc⁰ = ½ ζ(3)^{1/3} (15 n^{1/6} a/ā)^{2/5},
//
// of a repulsive gas, a ≥ 0 in m; NaN for a < 0. Source: Dalfovo et al. (1999), Eq. (120).
func Eta(n, mass, a float64, trap Trap) float64 {
	return math.Cbrt(bose.Zeta3) / 2 * math.Pow(15*math.Pow(n, 1./6)*a/trap.Length(mass), 0.4)
}

// InteractingFraction returns the condensate fraction at t = T/Tc⁰ with the interaction
// to lowest order in η (see Eta),
//
//	1 − t³ − η [ζ(2)/ζ(3)] t² (1 − t³)^{2/5},
//
// clipped to [0, 1], 0 for t ≥ 1. At η = 0.41 and t ≤ 0.7 it lies within 0.009 of
// Hartree-Fock and 0.025 of the semi-ideal gas; it reaches 0 too early, at t = 0.96 for
// η = 0.24 and 0.85 for η = 0.63, where SolveSemiIdeal should be used. Source:
// Naraschewski, Stamper-Kurn, Phys. Rev. A 58, 2423 (1998).
func InteractingFraction(t, eta float64) float64 {
	ideal := IdealFraction(t)
	return clip(ideal - eta*bose.Zeta2/bose.Zeta3*t*t*math.Pow(ideal, 0.4))
}

// clip returns x limited to [0, 1]; NaN stays NaN.
func clip(x float64) float64 { return math.Min(1, math.Max(0, x)) }
