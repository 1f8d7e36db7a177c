package model

import "fallshadow/model/bose"

// ThermalEntropy returns the entropy in units of k of one atom of the thermal part of an
// ideal gas in a harmonic trap,
//
//	s = 4 g_4(z)/g_3(z) − ln z,   z = e^{−α}.
//
// A condensate carries none, so the whole gas has (1 − N0/N) s per atom: 3.60157 at the
// transition. The domain is α ≥ 0. Source: Pethick, Smith, Bose-Einstein Condensation in
// Dilute Gases, Sec. 2.4.
func ThermalEntropy(alpha float64) float64 {
	return 4*bose.G4(alpha)/bose.G3(alpha) + alpha
}

// IdealEntropy returns the entropy per atom in units of k of an ideal gas in a harmonic
// trap at t = T/Tc⁰: 4 ζ(4)/ζ(3) t³ below the transition, ThermalEntropy above it with z
// from g_3(z) = ζ(3)/t³.
func IdealEntropy(t float64) float64 {
	return (1 - IdealFraction(t)) * ThermalEntropy(idealAlpha(t))
}

// IdealEnergy returns the energy per atom in units of kTc⁰ of an ideal gas in a harmonic
// trap at t = T/Tc⁰: 3 ζ(4)/ζ(3) t⁴ below the transition, 3t g_4(z)/g_3(z) above it. The
// zero-point energy is not counted.
func IdealEnergy(t float64) float64 {
	alpha := idealAlpha(t)
	return 3 * t * (1 - IdealFraction(t)) * bose.G4(alpha) / bose.G3(alpha)
}

// idealAlpha returns −ln z of the ideal gas at t = T/Tc⁰, 0 below the transition.
func idealAlpha(t float64) float64 {
	if t <= 1 {
		return 0
	}
	return bose.Alpha3(bose.Zeta3 / (t * t * t))
}
