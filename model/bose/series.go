package bose

import "math"

// Values of the gamma function in the singular term Γ(1−n) α^(n−1) of half-integer n.
const (
	sqrtPi       = 1.772453850905516027298
	gammaMinus12 = -2 * sqrtPi
	gammaMinus32 = 4 * sqrtPi / 3
)

// terms is the length of the plain series: at α = crossover the first term left out is
// e^−38 = 3e-17 of the first.
const terms = 38

// inverse holds 1/k^n for k = 1...terms.
type inverse [terms]float64

var (
	inverse12 = inversePowers(0.5)
	inverse32 = inversePowers(1.5)
	inverse2  = inversePowers(2)
	inverse52 = inversePowers(2.5)
	inverse3  = inversePowers(3)
	inverse4  = inversePowers(4)
)

func inversePowers(n float64) (p inverse) {
	for i := range p {
		p[i] = math.Pow(float64(i+1), -n)
	}
	return p
}

// series sums Σ z^k/k^n from the small terms to the large, with only as many terms as
// α ≥ crossover needs.
func series(p *inverse, alpha float64) float64 {
	if math.IsNaN(alpha) {
		return alpha
	}
	z := math.Exp(-alpha)
	sum := 0.0
	for k := min(terms, 2+int(37/alpha)); k > 0; k-- {
		sum = sum*z + p[k-1]
	}
	return sum * z
}

// robinson sums Σ c_k α^k for 0 ≤ α < crossover; NaN for α < 0. J. E. Robinson, Phys.
// Rev. 83, 678 (1951): g_n(e^−α) = Γ(1−n) α^(n−1) + Σ ζ(n−k)(−α)^k/k! for |α| < 2π; for
// integer n the term k = n−1 becomes (−α)^(n−1)/(n−1)! [H_(n−1) − ln α], of which the
// part without the logarithm stands in the table.
func robinson(c *[23]float64, alpha float64) float64 {
	if alpha < 0 {
		return math.NaN()
	}
	sum := c[22]
	for k := 21; k >= 0; k-- {
		sum = sum*alpha + c[k]
	}
	return sum
}
