package model

import (
	"errors"
	"fmt"
	"math"

	"fallshadow/model/bose"
)

// HartreeFockAt returns the gas at temperature T in K and chemical potential mu in J in
// Hartree-Fock and local density: both parts feel the mean field 2g n_th of the thermal
// atoms, the thermal ones also 2g n_c of the condensate,
//
//	inside:  μ − V = g n_c + 2g n_th,  n_th = λ_T^{−3} g_{3/2}(e^{−g n_c/kT})
//	outside: n_th = λ_T^{−3} g_{3/2}(e^{(μ−V−2g n_th)/kT}).
//
// Where both exist, near the edge, the condensed one is taken; it ends with a step of
// the density, the first-order artefact of this theory, which makes the condensate
// vanish at once somewhat below Tc. The domain is T > 0 and 0 < a ≪ λ_T; ErrAttractive
// for a ≤ 0. Source: Minguzzi, Conti, Tosi, J. Phys.: Condens. Matter 9, L33 (1997).
func HartreeFockAt(T, mu, mass, a float64, trap Trap) (Mixture, error) {
	if err := repulsive(a); err != nil {
		return Mixture{}, fmt.Errorf("Hartree-Fock gas: %w", err)
	}
	if !(T > 0) || math.IsInf(T, 0) {
		return Mixture{}, fmt.Errorf("Hartree-Fock gas: temperature %g K is not positive", T)
	}
	f := newMeanField(a / ThermalWavelength(T, mass))
	condensate, thermal := f.numbers(mu / (KB * T))
	unit := 2 / math.Sqrt(math.Pi) * thermalUnit(T, trap)
	return Mixture{mu, unit * condensate, unit * thermal}, nil
}

// SolveHartreeFock returns the Hartree-Fock gas of n atoms at temperature T in K (see
// HartreeFockAt). The domain is n > 0, T > 0, a > 0.
func SolveHartreeFock(n, T, mass, a float64, trap Trap) (Mixture, error) {
	if !(n > 0) || math.IsInf(n, 0) {
		return Mixture{}, errors.New("Hartree-Fock gas: number of atoms must be positive")
	}
	if _, err := HartreeFockAt(T, 0, mass, a, trap); err != nil {
		return Mixture{}, err
	}
	// The mean field only lowers the number at a given μ, and no gas needs more μ than
	// all atoms condensed in the field of a saturated cloud.
	low := 0.
	if alpha := ThermalAlpha(n, T, trap); !math.IsNaN(alpha) {
		low = -alpha * KB * T
	}
	high, _ := Mu(n, mass, a, trap)
	high += 4 * a / ThermalWavelength(T, mass) * bose.Zeta32 * KB * T
	mu := bisectRising(func(mu float64) float64 {
		m, _ := HartreeFockAt(T, mu, mass, a, trap)
		return m.Condensate + m.Thermal - n
	}, low, high)
	return HartreeFockAt(T, mu, mass, a, trap)
}

// meanField is the local equation of state in units of kT and λ_T^{−3}. Its one parameter
// is s = a/λ_T, since g n/kT = 2s nλ³: with y = g n_c/kT inside and α = −ln z outside
//
//	μ − V = y + 4s g_{3/2}(e^{−y}),  μ − V = −α + 4s g_{3/2}(e^{−α}).
type meanField struct {
	s     float64
	edgeY float64 // the least y of a condensate, where the first μ − V has its minimum
	edge  float64 // that minimum
}

func newMeanField(s float64) meanField {
	// g_{1/2} < √(π/y), so the slope 1 − 4s g_{1/2} is positive at 16πs².
	y := bisectRising(func(y float64) float64 { return 1 - 4*s*bose.G12(y) }, 0, 16*math.Pi*s*s)
	return meanField{s, y, y + 4*s*bose.G32(y)}
}

// numbers returns ∫ nλ³ √v dv over v = V/kT ≥ 0 of the condensate and the thermal part.
func (f meanField) numbers(mu float64) (condensate, thermal float64) {
	if mu <= f.edge {
		return 0, f.outside(mu, f.alpha(mu), 0)
	}
	condensate, thermal = f.inside(mu)
	return condensate, thermal + f.outside(mu, f.alpha(f.edge), mu-f.edge)
}

// alpha returns the α outside at μ − V = x ≤ edge.
func (f meanField) alpha(x float64) float64 {
	rising := func(alpha float64) float64 { return alpha - 4*f.s*bose.G32(alpha) + x }
	return bisectRising(rising, 0, 4*f.s*bose.Zeta32+math.Abs(x))
}

// inside integrates over the condensate in y = (w − p²)², w² the y at the centre, which
// takes away the roots of y at the edge and of v at the centre.
func (f meanField) inside(mu float64) (condensate, thermal float64) {
	centre := bisectRising(func(y float64) float64 { return y + 4*f.s*bose.G32(y) - mu }, f.edgeY, mu)
	w := math.Sqrt(centre)
	measure := func(p float64) (y, m float64) {
		root := w - p*p
		y = root * root
		v := math.Max(0, mu-y-4*f.s*bose.G32(y))
		return y, math.Sqrt(v) * (1 - 4*f.s*bose.G12(y)) * 4 * root * p
	}
	end := math.Sqrt(w - math.Sqrt(f.edgeY))
	condensate = panels(func(p float64) float64 { y, m := measure(p); return m * y / (2 * f.s) }, 0, end)
	thermal = panels(func(p float64) float64 { y, m := measure(p); return m * bose.G32(y) }, 0, end)
	return condensate, thermal
}

// outside integrates over v ≥ from, where α starts at the given value, in
// α = start + κ² sinh²φ. The roots of v and of α lie at or below their start and are no
// nearer than κ, the smaller of the two.
func (f meanField) outside(mu, start, from float64) float64 {
	kappa2 := start
	if from > 0 {
		kappa2 = math.Min(start, from)
	}
	const far = 45
	return panels(func(phi float64) float64 {
		s, c := math.Sinh(phi), math.Cosh(phi)
		alpha := start + kappa2*s*s
		v := math.Max(0, mu+alpha-4*f.s*bose.G32(alpha))
		return math.Sqrt(v) * (1 + 4*f.s*bose.G12(alpha)) * 2 * kappa2 * s * c * bose.G32(alpha)
	}, 0, math.Asinh(math.Sqrt(far/kappa2)))
}
