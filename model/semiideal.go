package model

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/integrate/quad"

	"fallshadow/model/bose"
)

// Mixture is a gas in equilibrium: its two parts and their common chemical potential.
type Mixture struct {
	Mu         float64 // J
	Condensate float64 // N0
	Thermal    float64 // N_th
}

// Fraction returns N0/N.
func (m Mixture) Fraction() float64 { return m.Condensate / (m.Condensate + m.Thermal) }

// SemiIdealAt returns the semi-ideal gas at temperature T in K and chemical potential mu
// in J: a Thomas-Fermi condensate, and ideal thermal atoms in the potential V + 2g n_c,
// which is |V − μ| + μ, so that n_th = λ_T^{−3} g_{3/2}(e^{−|μ−V|/kT}) everywhere and
//
//	N_th = (kT/ħω̄)³ (4/√π) ∫ x² g_{3/2}(e^{−|μ/kT − x²|}) dx,  N0 = (ā/15a)(2μ/ħω̄)^{5/2}.
//
// For mu ≤ 0 it is the ideal gas of that fugacity. The domain is T > 0, a > 0 (in m);
// ErrAttractive for a ≤ 0. The relative error of the quadrature is below 1e-12. Source:
// Naraschewski, Stamper-Kurn, Phys. Rev. A 58, 2423 (1998).
func SemiIdealAt(T, mu, mass, a float64, trap Trap) (Mixture, error) {
	if err := repulsive(a); err != nil {
		return Mixture{}, fmt.Errorf("semi-ideal gas: %w", err)
	}
	if !(T > 0) || math.IsInf(T, 0) {
		return Mixture{}, fmt.Errorf("semi-ideal gas: temperature %g K is not positive", T)
	}
	if mu <= 0 {
		return Mixture{mu, 0, ThermalNumber(T, -mu/(KB*T), trap)}, nil
	}
	n0, err := NumberFromMu(mu, mass, a, trap)
	return Mixture{mu, n0, thermalUnit(T, trap) * semiIdealIntegral(mu/(KB*T), bose.G32)}, err
}

// SemiIdealEntropy returns the entropy in units of k of the semi-ideal gas (see
// SemiIdealAt) at T in K and mu in J: that of its thermal atoms as free bosons in the
// potential they feel,
//
//	S/k = ∫ λ_T^{−3} [5/2 g_{5/2}(z) + α g_{3/2}(z)] d³r,   α = −ln z = |μ−V|/kT.
//
// For mu ≤ 0 it is the ideal entropy; NaN unless T > 0.
func SemiIdealEntropy(T, mu float64, trap Trap) float64 {
	y := mu / (KB * T)
	switch {
	case !(T > 0):
		return math.NaN()
	case y <= 0:
		return ThermalNumber(T, -y, trap) * ThermalEntropy(-y)
	}
	return thermalUnit(T, trap) * semiIdealIntegral(y, func(alpha float64) float64 {
		return 2.5*bose.G52(alpha) + alpha*bose.G32(alpha)
	})
}

// thermalUnit returns (kT/ħω̄)³.
func thermalUnit(T float64, trap Trap) float64 {
	x := KB * T / (HBar * trap.GeometricMean())
	return x * x * x
}

// SolveSemiIdeal returns the semi-ideal gas of n atoms at temperature T in K (see
// SemiIdealAt). Its transition is that of the ideal gas, T = Tc⁰. The domain is n > 0,
// T > 0, a > 0.
func SolveSemiIdeal(n, T, mass, a float64, trap Trap) (Mixture, error) {
	if !(n > 0) || math.IsInf(n, 0) {
		return Mixture{}, errors.New("semi-ideal gas: number of atoms must be positive")
	}
	if _, err := SemiIdealAt(T, 0, mass, a, trap); err != nil {
		return Mixture{}, err
	}
	if alpha := ThermalAlpha(n, T, trap); !math.IsNaN(alpha) {
		return Mixture{-alpha * KB * T, 0, n}, nil
	}
	ceiling, err := Mu(n, mass, a, trap)
	if err != nil {
		return Mixture{}, err
	}
	mu := bisectRising(func(mu float64) float64 {
		m, _ := SemiIdealAt(T, mu, mass, a, trap)
		return m.Condensate + m.Thermal - n
	}, 0, ceiling)
	return SemiIdealAt(T, mu, mass, a, trap)
}

// semiIdealIntegral returns (2/√π) ∫ √u f(|u − y|) du over u ≥ 0 for y > 0 and a Bose
// function f of −ln z. With f = g_{3/2} it is N_th (ħω̄/kT)³. The substitutions u = y cos²θ
// and u = y cosh²φ take away both roots, that of u and that of f at 0.
func semiIdealIntegral(y float64, f func(float64) float64) float64 {
	inside := func(theta float64) float64 {
		s, c := math.Sincos(theta)
		return c * c * s * f(y*s*s)
	}
	outside := func(phi float64) float64 {
		s, c := math.Sinh(phi), math.Cosh(phi)
		return c * c * s * f(y*s*s)
	}
	const far = 45 // e^{−45} is below the rounding of the sum
	reach := math.Sqrt(far / y)
	sum := panels(inside, 0, math.Asin(math.Min(1, reach))) + panels(outside, 0, math.Asinh(reach))
	return 4 / math.Sqrt(math.Pi) * y * math.Sqrt(y) * sum
}

// panels integrates a function of scale 1 or of a third of the interval, by three or more
// Gauss-Legendre panels at most 1 wide.
func panels(f func(float64) float64, from, to float64) float64 {
	count := max(3, int(math.Ceil(to-from)))
	width := (to - from) / float64(count)
	sum := 0.
	for i := range count {
		left := from + float64(i)*width
		sum += quad.Fixed(f, left, left+width, 20, nil, 0)
	}
	return sum
}
