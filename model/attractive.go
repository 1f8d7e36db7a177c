package model

import (
	"errors"
	"math"
)

// ErrCollapse says that an attractive condensate has more atoms than its trap can hold.
var ErrCollapse = errors.New("an attractive condensate of so many atoms collapses: it has no stable gaussian width")

// CriticalNumber returns the number of atoms N_c = κ ā/|a| at which an attractive
// condensate collapses, +Inf for a ≥ 0. κ = 0.574966 in an isotropic trap and less in any
// other: it is the fold of the gaussian variation, which any trap has in closed form,
// times the ratio of the Gross-Pitaevskii to the gaussian value (0.857 to 0.887).
//
// The ratio is interpolated in ln λ over axisymmetric traps, λ = ω_z/ω_⊥ within 0.1 to 10,
// to 1e-4 of N_c; beyond it is held (as λ → 0 it is off by 0.1 %, as λ → ∞ it would rise
// to 0.931, from the norm 5.850 of the Townes soliton, from memory, so that N_c is up to
// 5 % low). For three different frequencies it goes smoothly between the cigar and the
// pancake of the same spread of ln ω_i, which differ by 2 % at most.
func CriticalNumber(trap Trap, mass, a float64) float64 {
	if a >= 0 {
		return math.Inf(1)
	}
	l := relative(trap)
	return criticalRatio(l) * gaussianCritical(l) * trap.Length(mass) / -a
}

// GaussianCriticalNumber returns the critical number of the gaussian variation, 17 % high
// in an isotropic trap (0.670513 ā/|a|), beyond which VariationalWidths finds no width.
func GaussianCriticalNumber(trap Trap, mass, a float64) float64 {
	if a >= 0 {
		return math.Inf(1)
	}
	return gaussianCritical(relative(trap)) * trap.Length(mass) / -a
}

// VariationalWidths returns the widths w_i in m of the gaussian condensate
// ψ ∝ Π e^(−x_i²/2w_i²) of n0 atoms in the trap, for either sign of a; the rms size of its
// density is w_i/√2. They make the energy stationary: ω_i² w_i = (ħ/m)²(1/w_i³ + γ/w_i)
// with γ = √(2/π) N0 a/(w1w2w3). ErrCollapse where attraction leaves no stable width.
// V. M. Pérez-García et al., Phys. Rev. Lett. 77, 5320 (1996); G. Baym, C. J. Pethick,
// Phys. Rev. Lett. 76, 6 (1996).
func VariationalWidths(n0, mass, a float64, trap Trap) (w [3]float64, err error) {
	if err := trap.Validate(); err != nil {
		return w, err
	}
	switch {
	case math.IsNaN(a):
		return w, ErrNoScatteringLength
	case !(n0 >= 0) || math.IsInf(n0, 0):
		return w, errors.New("number of condensed atoms must be 0 or more")
	}
	l, length := relative(trap), trap.Length(mass)
	g := n0 * a / length
	if g < -gaussianCritical(l) {
		return w, ErrCollapse
	}
	for i, x := range squaredWidths(stableGamma(g, l), l) {
		w[i] = length * math.Sqrt(x)
	}
	return w, nil
}

// VariationalEnergy returns the energy per atom and the chemical potential in J of the
// gaussian condensate of widths w (m): E/N = Σ(ħ²/mw_i² + mω_i²w_i²)/4 + E_int and
// μ = E/N + E_int with E_int = gN0/(2(2π)^(3/2) w1w2w3).
func VariationalEnergy(w [3]float64, n0, mass, a float64, trap Trap) (perAtom, mu float64) {
	for i, omega := range trap.Omega {
		p, x := HBar/w[i], mass*omega*w[i]
		perAtom += (p*p + x*x) / (4 * mass)
	}
	meanField := Coupling(mass, a) * n0 / (2 * math.Pow(2*math.Pi, 1.5) * w[0] * w[1] * w[2])
	return perAtom + meanField, perAtom + 2*meanField
}

// ExpandGaussian returns the factors by which the widths of the gaussian condensate of n0
// atoms grow in a flight (s ≥ 0): w_i b_i with w from VariationalWidths and
// d²w_i/dt² = (ħ/m)²(1/w_i³ + √(2/π) N0 a/(w_i w1w2w3)) − ω_i²(t) w_i.
func ExpandGaussian(n0, mass, a float64, trap Trap, flight float64, rel Release) ([3]float64, error) {
	w, err := VariationalWidths(n0, mass, a, trap)
	if err != nil {
		return [3]float64{}, err
	}
	var f forces
	gamma := math.Sqrt(2/math.Pi) * n0 * a / (w[0] * w[1] * w[2])
	for i, v := range w {
		q := HBar / (mass * v)
		f.kinetic[i] = q / v * q / v
		f.meanField[i] = gamma * q * q
	}
	s, err := expand(trap, flight, rel, f)
	return s.B, err
}

// GaussianVariances returns the variances (w_i b_i)²/2 in m² of the density of a gaussian
// condensate, as Rotation.Project takes them.
func GaussianVariances(w, b [3]float64) (v [3]float64) {
	for i := range v {
		v[i] = w[i] * b[i] * w[i] * b[i] / 2
	}
	return v
}

// GaussianColumn returns the column density N e^(−q/2)/(2π√det S) in 1/m² of n atoms with
// the variances s (m²) in the picture, at the offset (x, y) in m, q = rᵀS⁻¹r.
func GaussianColumn(n float64, s Shape, x, y float64) float64 {
	return n / (2 * math.Pi * math.Sqrt(s.Det())) * math.Exp(-s.Quadratic(x, y)/2)
}

// relative returns the frequencies in units of their geometric mean, in which the gaussian
// variation reads l_i² x_i² − γ x_i − 1 = 0 for x_i = (w_i/ā)².
func relative(trap Trap) [3]float64 { return trap.in(trap.GeometricMean()) }

// squaredWidths returns the positive roots x_i.
func squaredWidths(gamma float64, l [3]float64) (x [3]float64) {
	for i, v := range l {
		root := math.Hypot(gamma, 2*v)
		if gamma > 0 {
			x[i] = (root + gamma) / (2 * v * v)
		} else {
			x[i] = 2 / (root - gamma)
		}
	}
	return x
}

// interaction returns the N0 a/ā that belongs to γ: it rises with γ down to foldGamma.
func interaction(gamma float64, l [3]float64) float64 {
	x := squaredWidths(gamma, l)
	return math.Sqrt(math.Pi/2) * gamma * math.Sqrt(x[0]*x[1]*x[2])
}

// foldGamma returns the γ < 0 where |interaction| is largest: Σ |γ|/√(γ²+4l_i²) = 2.
func foldGamma(l [3]float64) float64 {
	excess := func(g float64) float64 {
		sum := -2.0
		for _, v := range l {
			sum += g / math.Hypot(g, 2*v)
		}
		return sum
	}
	// At g = 4 max(l) every term exceeds 2/3 already.
	return -bisectRising(excess, 0, 4*max(l[0], l[1], l[2]))
}

func gaussianCritical(l [3]float64) float64 { return -interaction(foldGamma(l), l) }

// stableGamma inverts interaction on the branch of stable widths; g ≥ −gaussianCritical.
func stableGamma(g float64, l [3]float64) float64 {
	// x_i > γ/l_i² bounds γ^(5/2) by g √(2/π) as the product of the l_i is 1.
	low, high := 0.0, math.Pow(math.Max(g, 0), 0.4)
	if g < 0 {
		low, high = foldGamma(l), 0
	}
	return bisectRising(func(gamma float64) float64 { return interaction(gamma, l) - g }, low, high)
}

// bisectRising halves until the ends are neighbours; f(low) ≤ 0 ≤ f(high).
func bisectRising(f func(float64) float64, low, high float64) float64 {
	for {
		mid := low + (high-low)/2
		if mid <= low || mid >= high {
			return mid
		}
		if f(mid) < 0 {
			low = mid
		} else {
			high = mid
		}
	}
}

// criticalRatios holds ln λ and the ratio of the critical numbers of the Gross-Pitaevskii
// equation (fold of its branch: Chebyshev collocation, testdata/reference) and of the
// gaussian variation, for axisymmetric traps.
var criticalRatios = func() (r [len(criticalTable)][2]float64) {
	for i, row := range criticalTable {
		axis := TrapHz(1, 1, row[0])
		r[i] = [2]float64{math.Log(row[0]), row[1] / gaussianCritical(relative(axis))}
	}
	return r
}()

// criticalTable holds λ = ω_z/ω_⊥ and κ = N_c|a|/ā, each good to 2e-5. Compare 0.55 for
// 6.80:17.35 in A. Gammal, T. Frederico, L. Tomio, Phys. Rev. A 64, 055602 (2001) and
// 0.574 in J. L. Roberts et al., Phys. Rev. Lett. 86, 4211 (2001).
var criticalTable = [...][2]float64{
	{0.1, 0.459440}, {0.2, 0.508859}, {0.39193084, 0.549827}, {0.5, 0.560782},
	{1, 0.574966}, {2, 0.560263}, {2.8284271, 0.542660}, {5, 0.502182}, {10, 0.440826},
}

// criticalRatio takes the place of a trap among all shapes from the spread r of its
// ln l_i (|ln λ| of the axisymmetric trap of the same spread) and the side that the third
// moment tells, +1 for a pancake and −1 for a cigar.
func criticalRatio(l [3]float64) float64 {
	second, third := 0.0, 1.0
	for _, v := range l {
		u := math.Log(v)
		second += u * u
		third *= u
	}
	r := math.Sqrt(1.5 * second)
	if r < 1e-6 {
		return axisymmetricRatio(0)
	}
	side := math.Max(-1, math.Min(1, 13.5*third/(r*r*r)))
	return (1+side)/2*axisymmetricRatio(r) + (1-side)/2*axisymmetricRatio(-r)
}

// axisymmetricRatio interpolates criticalRatios by the cubic through the four nearest
// nodes and holds the ends.
func axisymmetricRatio(logLambda float64) float64 {
	n := len(criticalRatios)
	x := math.Max(criticalRatios[0][0], math.Min(criticalRatios[n-1][0], logLambda))
	first := 0
	for first+4 < n && criticalRatios[first+2][0] < x {
		first++
	}
	sum := 0.0
	for i := first; i < first+4; i++ {
		term := criticalRatios[i][1]
		for j := first; j < first+4; j++ {
			if j != i {
				term *= (x - criticalRatios[j][0]) / (criticalRatios[i][0] - criticalRatios[j][0])
			}
		}
		sum += term
	}
	return sum
}
