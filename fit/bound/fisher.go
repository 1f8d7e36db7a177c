package bound

import (
	"context"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// fisher returns the information of a picture on the parameters f of a cloud.
func fisher(ctx context.Context, e *Experiment, c *Cloud, f []Parameter) (*mat.SymDense, error) {
	at, steps := truth(e, c)
	s, err := newSight(ctx, e, &at)
	if err != nil {
		return nil, err
	}
	columns := make([][]float64, len(f))
	for i, p := range f {
		columns[i] = make([]float64, len(s.weight))
		if err := s.column(ctx, p, &at, steps[p], columns[i]); err != nil {
			return nil, err
		}
	}
	return information(columns, s.weight), nil
}

// richardson writes the derivatives at 0 of the functions that f evaluates together to dst:
// the central differences of step and of half of it, extrapolated to an error of the fourth
// order. scratch has the length of dst.
func richardson(dst, scratch []float64, step float64, f func(h float64, dst []float64) error) error {
	clear(dst)
	for _, s := range [4]struct{ at, factor float64 }{{1, -1.0 / 6}, {-1, 1.0 / 6}, {0.5, 4.0 / 3}, {-0.5, -4.0 / 3}} {
		if err := f(s.at*step, scratch); err != nil {
			return err
		}
		for i, v := range scratch {
			dst[i] += s.factor / step * v
		}
	}
	return nil
}

// information returns Σ w J Jᵀ over pixels.
func information(columns [][]float64, weight []float64) *mat.SymDense {
	m := mat.NewSymDense(len(columns), nil)
	for i, a := range columns {
		for j, b := range columns[:i+1] {
			sum := 0.0
			for o, w := range weight {
				sum += w * a[o] * b[o]
			}
			m.SetSym(i, j, sum)
		}
	}
	return m
}

// invert returns the inverse of the information on the parameters f. The error names the
// parameter of which the picture has none, or says that they cannot be told apart.
func invert(info *mat.SymDense, f []Parameter) (*mat.SymDense, error) {
	scale := make([]float64, len(f))
	for i, p := range f {
		d := info.At(i, i)
		if !(d > 0) || math.IsInf(d, 1) {
			return nil, fmt.Errorf("the picture does not tell the parameter %s: is the cloud in it, and are its numbers right?", p)
		}
		scale[i] = 1 / math.Sqrt(d)
	}
	cov := rescaled(info, scale)
	var c mat.Cholesky
	if !c.Factorize(cov) {
		return nil, fmt.Errorf("the picture cannot tell the parameters %v apart", f)
	}
	if err := c.InverseTo(cov); err != nil {
		return nil, fmt.Errorf("the picture cannot tell the parameters %v apart: %w", f, err)
	}
	return rescaled(cov, scale), nil
}

// rescaled returns the matrix m_ij s_i s_j.
func rescaled(m *mat.SymDense, s []float64) *mat.SymDense {
	r := mat.NewSymDense(len(s), nil)
	for i := range s {
		for j := range i + 1 {
			r.SetSym(i, j, m.At(i, j)*s[i]*s[j])
		}
	}
	return r
}
