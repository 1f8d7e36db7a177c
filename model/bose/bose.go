// Package bose evaluates the Bose functions g_n(z) = Li_n(z) = Σ z^k/k^n of the ideal
// Bose gas in the working variable α = −ln z ≥ 0, in which they keep all their digits
// near z = 1, where 1−z has none left.
//
// All functions have a relative error below 1e-15 or a few units of it, return NaN for
// α < 0 (z > 1, where the series diverges) and 0 for α = +Inf.
package bose

import "math"

// Values of the Riemann zeta function, g_n(1) = ζ(n) (and the constant term of g_{1/2}).
// DLMF §25.6 and, for the half-integers, the table of coefficients that Robinson's
// expansion starts with.
const (
	Zeta12 = -1.460354508809586812889
	Zeta32 = 2.612375348685488343349
	Zeta2  = 1.644934066848226436472
	Zeta52 = 1.341487257250917179757
	Zeta3  = 1.202056903159594285400
	Zeta4  = 1.082323233711138191516
)

// G12 returns g_{1/2}(e^−α) = −dg_{3/2}/dα; +Inf at α = 0, where it grows as √(π/α).
func G12(alpha float64) float64 {
	if alpha < crossover {
		return sqrtPi/math.Sqrt(math.Abs(alpha)) + robinson(&robinson12, alpha)
	}
	return series(&inverse12, alpha)
}

// G1 returns g_1(e^−α) = −ln(1−e^−α) = −dg_2/dα; +Inf at α = 0.
func G1(alpha float64) float64 {
	if alpha < math.Ln2 {
		return -math.Log(-math.Expm1(-alpha))
	}
	return -math.Log1p(-math.Exp(-alpha))
}

// G32 returns g_{3/2}(e^−α), which sets the density n λ³ of the ideal gas.
func G32(alpha float64) float64 {
	if alpha < crossover {
		return gammaMinus12*math.Sqrt(alpha) + robinson(&robinson32, alpha)
	}
	return series(&inverse32, alpha)
}

// G2 returns g_2(e^−α), the shape of the column density of a thermal cloud.
func G2(alpha float64) float64 {
	if alpha < crossover {
		return alpha*logOrZero(alpha) + robinson(&robinson2, alpha)
	}
	return series(&inverse2, alpha)
}

// G52 returns g_{5/2}(e^−α), the shape of the doubly integrated (line) density.
func G52(alpha float64) float64 {
	if alpha < crossover {
		return gammaMinus32*alpha*math.Sqrt(alpha) + robinson(&robinson52, alpha)
	}
	return series(&inverse52, alpha)
}

// G3 returns g_3(e^−α), which sets the atom number N (ħω̄/kT)³ in a harmonic trap.
func G3(alpha float64) float64 {
	if alpha < crossover {
		return -alpha*alpha/2*logOrZero(alpha) + robinson(&robinson3, alpha)
	}
	return series(&inverse3, alpha)
}

// G4 returns g_4(e^−α), which sets the energy 3kT (kT/ħω̄)³ g_4 in a harmonic trap.
func G4(alpha float64) float64 {
	if alpha < crossover {
		return alpha*alpha*alpha/6*logOrZero(alpha) + robinson(&robinson4, alpha)
	}
	return series(&inverse4, alpha)
}

// Alpha3 returns the α at which g_3(e^−α) = g: the fugacity of a cloud whose number is
// known. The domain is 0 < g ≤ ζ(3); the result is NaN outside and +Inf at g = 0. Its
// absolute error is that of g divided by g_2, so relative accuracy ends as g nears ζ(3).
func Alpha3(g float64) float64 {
	switch {
	case g == 0:
		return math.Inf(1)
	case g == Zeta3:
		return 0
	case !(g > 0 && g < Zeta3):
		return math.NaN()
	}
	// ln g_3 is convex and falls with a slope between −ζ(2)/ζ(3) and −1, so Newton's
	// steps from the left never overshoot and converge from everywhere.
	alpha := math.Log(Zeta3/g) * Zeta3 / Zeta2
	for range 30 {
		value := G3(alpha)
		step := math.Log(value/g) * value / G2(alpha)
		alpha += step
		if math.Abs(step) <= 4e-16*alpha {
			break
		}
	}
	return math.Max(alpha, 0)
}

// crossover is the α below which Robinson's expansion is used. It leaves 23 terms of
// that expansion and 38 of the plain series for the worst α.
const crossover = 1

// logOrZero is ln α with the limit of α ln α at α = 0 in mind.
func logOrZero(alpha float64) float64 {
	if alpha == 0 {
		return 0
	}
	return math.Log(alpha)
}
