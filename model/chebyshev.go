package model

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// chebyshev is a grid for even functions of r on [−R, R]: the n positive ones of 2n
// Chebyshev points, from R down. It integrates, differentiates and interpolates with an
// error that falls exponentially in n for analytic functions. Source: Trefethen,
// Spectral Methods in MATLAB (SIAM 2000), chapters 6, 11 and 12.
type chebyshev struct {
	r      []float64 // points, r[0] = R
	weight []float64 // Σ weight f = ∫_0^R f dr for even f
	slope  *mat.Dense
	laplas *mat.Dense // f'' + 2f'/r
}

func newChebyshev(n int, radius float64) *chebyshev {
	c := &chebyshev{r: make([]float64, n), weight: clenshawCurtis(n)}
	full := chebyshevSlopes(2 * n)
	var curve mat.Dense
	curve.Mul(full, full)
	even := func(m *mat.Dense, j, k int) float64 { return m.At(j, k) + m.At(j, 2*n-1-k) }
	c.slope, c.laplas = mat.NewDense(n, n, nil), mat.NewDense(n, n, nil)
	for j := range n {
		x := math.Cos(math.Pi * float64(j) / float64(2*n-1))
		c.r[j] = radius * x
		c.weight[j] *= radius
		for k := range n {
			c.slope.Set(j, k, even(full, j, k)/radius)
			c.laplas.Set(j, k, (even(&curve, j, k)+2/x*even(full, j, k))/(radius*radius))
		}
	}
	return c
}

// chebyshevSlopes returns the derivative matrix on the given number of Chebyshev points
// of [−1, 1]; the diagonal makes constants have no slope.
func chebyshevSlopes(points int) *mat.Dense {
	d := mat.NewDense(points, points, nil)
	last := points - 1
	for j := range points {
		sum := 0.
		for k := range points {
			if j == k {
				continue
			}
			// x_j − x_k without cancellation.
			a, b := math.Pi*float64(j)/float64(last), math.Pi*float64(k)/float64(last)
			v := endWeight(j, last) / endWeight(k, last) / (-2 * math.Sin((a+b)/2) * math.Sin((a-b)/2))
			if (j+k)%2 == 1 {
				v = -v
			}
			d.Set(j, k, v)
			sum += v
		}
		d.Set(j, j, -sum)
	}
	return d
}

func endWeight(j, last int) float64 {
	if j == 0 || j == last {
		return 2
	}
	return 1
}

// clenshawCurtis returns the quadrature weights on [0, 1] of the n positive ones of 2n
// Chebyshev points, for even functions.
func clenshawCurtis(n int) []float64 {
	last := 2*n - 1
	w := make([]float64, n)
	for j := range w {
		sum := 1.
		for k := 1; 2*k <= last; k++ {
			sum -= 2 * math.Cos(2*math.Pi*float64(j*k)/float64(last)) / float64(4*k*k-1)
		}
		w[j] = 2 * sum / float64(last) / endWeight(j, last)
	}
	return w
}

// integral returns 4π ∫ f r² dr over the ball, f given at the points.
func (c *chebyshev) integral(f func(j int) float64) float64 {
	sum := 0.
	for j, r := range c.r {
		sum += c.weight[j] * r * r * f(j)
	}
	return 4 * math.Pi * sum
}

// at interpolates the even function with the given values at the points (barycentric
// form); 0 beyond the ball.
func (c *chebyshev) at(values []float64, r float64) float64 {
	r = math.Abs(r)
	if r >= c.r[0] {
		return 0
	}
	above, below := 0., 0.
	for j, x := range c.r {
		if x == r {
			return values[j]
		}
		// The weight (−1)^j of ±x in one term: 1/(r−x) + (−1)^{2n−1}/(r+x).
		w := 2 * x / ((r - x) * (r + x)) / endWeight(j, 2*len(c.r)-1)
		if j%2 == 1 {
			w = -w
		}
		above += w * values[j]
		below += w
	}
	return above / below
}
