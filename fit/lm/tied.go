package lm

import "fmt"

// Tied is a problem in fewer parameters y, to which those of another hang linearly:
// x = T y + x0. A parameter of x that is no combination of y has a row of zeros in T and
// keeps the value in x0; one that goes alone has a single 1.
type Tied struct {
	inner      Problem
	t, x0      []float64
	n, k       int
	x, h, g, w []float64
}

// Tie makes the problem p in k parameters y by x = T y + x0, T being n×k and row-major,
// n = p.Dim(). It keeps t and x0.
func Tie(p Problem, t, x0 []float64, k int) (*Tied, error) {
	n := p.Dim()
	if len(x0) != n || k < 1 || len(t) != n*k {
		return nil, fmt.Errorf("lm: a tie of %d parameters to %d needs a %d×%d matrix and %d offsets, got %d and %d numbers", n, k, n, k, n, len(t), len(x0))
	}
	return &Tied{inner: p, t: t, x0: x0, n: n, k: k,
		x: make([]float64, n), h: make([]float64, n*n), g: make([]float64, n), w: make([]float64, n*k)}, nil
}

// Dim is the number of parameters y.
func (t *Tied) Dim() int { return t.k }

// Normal is that of the inner problem at T y + x0, with H and G carried over to y:
// TᵀHT and TᵀG.
func (t *Tied) Normal(y, h, g []float64) float64 {
	t.Expand(y, t.x)
	if h == nil && g == nil {
		return t.inner.Normal(t.x, nil, nil)
	}
	f := t.inner.Normal(t.x, t.h, t.g)
	if g != nil {
		for a := range t.k {
			g[a] = 0
			for i := range t.n {
				g[a] += t.t[i*t.k+a] * t.g[i]
			}
		}
	}
	if h != nil {
		t.carry(h)
	}
	return f
}

func (t *Tied) carry(h []float64) {
	for i := range t.n {
		for b := range t.k {
			s := 0.0
			for j := range t.n {
				s += t.h[i*t.n+j] * t.t[j*t.k+b]
			}
			t.w[i*t.k+b] = s
		}
	}
	for a := range t.k {
		for b := range t.k {
			s := 0.0
			for i := range t.n {
				s += t.t[i*t.k+a] * t.w[i*t.k+b]
			}
			h[a*t.k+b] = s
		}
	}
}

// Expand fills x (n) with T y + x0.
func (t *Tied) Expand(y, x []float64) {
	for i := range t.n {
		x[i] = t.x0[i]
		for a := range t.k {
			x[i] += t.t[i*t.k+a] * y[a]
		}
	}
}

// Covariance fills dst (n×n) with that of x, T C Tᵀ, from the covariance c (k×k) of y.
func (t *Tied) Covariance(dst, c []float64) {
	for i := range t.n {
		for j := range t.n {
			s := 0.0
			for a := range t.k {
				for b := range t.k {
					s += t.t[i*t.k+a] * c[a*t.k+b] * t.t[j*t.k+b]
				}
			}
			dst[i*t.n+j] = s
		}
	}
}
