package model

import (
	"errors"
	"math"
)

// ErrAttractive says that a gas has no Thomas-Fermi condensate.
var ErrAttractive = errors.New("scattering length is not positive: an attractive or ideal gas has no Thomas-Fermi condensate, use the gaussian condensate and its critical number")

// ErrNoScatteringLength says that a scattering length is needed and was not given.
var ErrNoScatteringLength = errors.New("scattering length is not known: a magnetic field sets it for this species, state it")

func repulsive(a float64) error {
	switch {
	case math.IsNaN(a):
		return ErrNoScatteringLength
	case a <= 0:
		return ErrAttractive
	}
	return nil
}

// Coupling returns g = 4πħ²a/m in J m³ for a in m and mass in kg.
func Coupling(mass, a float64) float64 { return 4 * math.Pi * HBar * HBar * a / mass }

// Mu returns the Thomas-Fermi chemical potential (ħω̄/2)(15 N0 a/ā)^(2/5) in J of n0 ≥ 0
// atoms of the given mass (kg) and scattering length a (m); NaN for n0 < 0,
// ErrAttractive for a ≤ 0. Dalfovo et al., Rev. Mod. Phys. 71, 463 (1999) Eq. (51).
func Mu(n0, mass, a float64, trap Trap) (float64, error) {
	if err := repulsive(a); err != nil {
		return math.NaN(), err
	}
	return HBar * trap.GeometricMean() / 2 * math.Pow(15*n0*a/trap.Length(mass), 0.4), nil
}

// NumberFromMu inverts Mu: N0 = (ā/15a)(2μ/ħω̄)^(5/2). It needs no cross-section.
func NumberFromMu(mu, mass, a float64, trap Trap) (float64, error) {
	if err := repulsive(a); err != nil {
		return math.NaN(), err
	}
	return trap.Length(mass) / (15 * a) * math.Pow(2*mu/(HBar*trap.GeometricMean()), 2.5), nil
}

// Radii returns the Thomas-Fermi radii √(2μ/m)/ω_i in m in the trap.
func Radii(mu, mass float64, trap Trap) (r [3]float64) {
	for i, w := range trap.Omega {
		r[i] = math.Sqrt(2*mu/mass) / w
	}
	return r
}

// RadiiSquared returns the squares b_i² 2μ/(mω_i²) in m² of the radii after expansion,
// as Rotation.Project takes them.
func RadiiSquared(mu, mass float64, trap Trap, b [3]float64) (r [3]float64) {
	for i, w := range trap.Omega {
		r[i] = 2 * mu / mass * (b[i] / w) * (b[i] / w)
	}
	return r
}

// PeakDensity returns the Thomas-Fermi density μ/g in 1/m³ at the centre of the trap.
func PeakDensity(mu, mass, a float64) (float64, error) {
	if err := repulsive(a); err != nil {
		return math.NaN(), err
	}
	return mu / Coupling(mass, a), nil
}

// HealingLength returns ξ = 1/√(8πna) in m for a density n in 1/m³.
func HealingLength(n, a float64) float64 { return 1 / math.Sqrt(8*math.Pi*n*a) }

// EnergyPerAtom returns the Thomas-Fermi energy 5μ/7.
func EnergyPerAtom(mu float64) float64 { return 5 * mu / 7 }

// ReleaseEnergy returns the energy 2μ/7 per atom that a Thomas-Fermi condensate frees
// when the trap is switched off at once.
func ReleaseEnergy(mu float64) float64 { return 2 * mu / 7 }

// CondensatePeakColumn returns the column density 5N0/(2π√det S) in 1/m² at the centre
// of a Thomas-Fermi condensate whose squared radii in the picture are s (m²).
func CondensatePeakColumn(n0 float64, s Shape) float64 {
	return 5 * n0 / (2 * math.Pi * math.Sqrt(s.Det()))
}

// CondensateColumn returns the column density in 1/m² of a Thomas-Fermi condensate of
// n0 atoms at the offset (x, y) in m from its centre: the peak times
// max(0, 1 − rᵀS⁻¹r)^(3/2), a sample (not a pixel mean) whose integral is n0.
func CondensateColumn(n0 float64, s Shape, x, y float64) float64 {
	inside := 1 - s.Quadratic(x, y)
	if inside <= 0 {
		return 0
	}
	return CondensatePeakColumn(n0, s) * inside * math.Sqrt(inside)
}
