package lm

import (
	"fmt"
	"math"
)

// Covariance fills dst (n×n, row-major) with the inverse of H over the free parameters,
// which is the covariance of the parameters where the residuals have variance 1. Rows and
// columns of parameters that were fixed or are held at a bound are 0. It fails, and names
// the parameter, where the data do not determine one apart from those before it.
func (r Result) Covariance(dst []float64) error {
	n := len(r.X)
	if len(dst) != n*n {
		return fmt.Errorf("lm: covariance of %d parameters needs %d numbers, got %d", n, n*n, len(dst))
	}
	clear(dst)
	index := make([]int, 0, n)
	for i := range n {
		if !r.AtBound[i] && !r.fixed[i] {
			index = append(index, i)
		}
	}
	u, scale, bad := r.upper(index)
	if bad >= 0 {
		return fmt.Errorf("lm: the data do not determine parameter %d apart from those before it: the normal matrix is singular", index[bad])
	}
	k := len(index)
	invertUpper(u, k)
	for a, i := range index {
		for b, j := range index {
			s := 0.0
			for l := max(a, b); l < k; l++ {
				s += u[a*k+l] * u[b*k+l]
			}
			dst[i*n+j] = s * scale[a] * scale[b]
		}
	}
	return nil
}

// upper is the triangle U (k×k) over the parameters of index and the weights s with
// H = S⁻¹UᵀU S⁻¹, and the first row that rounding makes singular, or -1.
func (r Result) upper(index []int) (u, s []float64, bad int) {
	n, k := len(r.X), len(index)
	u, s = make([]float64, k*k), make([]float64, k)
	for a, i := range index {
		s[a] = 1 / math.Sqrt(r.H[i*n+i])
		if !finite(s[a]) {
			return nil, nil, a
		}
	}
	if r.factor == nil {
		for a, i := range index {
			for b, j := range index[:a+1] {
				u[a*k+b] = r.H[i*n+j] * s[a] * s[b]
			}
		}
		bad = cholesky(u, k)
		for a := range k {
			for b := range a {
				u[b*k+a], u[a*k+b] = u[a*k+b], 0
			}
		}
		return u, s, bad
	}
	full := make([]float64, n*k)
	for i := range n {
		for b, j := range index {
			full[i*k+b] = r.factor[i*n+j] * s[b]
		}
	}
	householder(full, n, k, make([]float64, n))
	copy(u, full)
	return u, s, dependent(u, k)
}

// invertUpper replaces the upper triangle u (k×k) by its inverse.
func invertUpper(u []float64, k int) {
	for j := range k {
		inverse := 1 / u[j*k+j]
		for i := range j {
			s := 0.0
			for l := i; l < j; l++ {
				s += u[i*k+l] * u[l*k+j]
			}
			u[i*k+j] = -s * inverse
		}
		u[j*k+j] = inverse
	}
}
