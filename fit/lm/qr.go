package lm

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// denseForm is the linear view of Residuals: J = Q R at the centre, of which it keeps R
// (n×n) and the first n entries of Qᵀρ.
type denseForm struct {
	p          Residuals
	m, n       int
	tried      []float64 // the point tried
	rho        []float64 // residuals at the point tried
	j          *mat.Dense
	work, r    []float64
	qtr, g     []float64
	step, stpb []float64
}

func newDenseForm(p Residuals) *denseForm {
	m, n := p.Size()
	rows := max(m, n)
	return &denseForm{
		p: p, m: m, n: n,
		tried: make([]float64, n), rho: make([]float64, m), j: mat.NewDense(m, n, nil),
		work: make([]float64, rows*n+rows), r: make([]float64, n*n),
		qtr: make([]float64, n), g: make([]float64, n),
		step: make([]float64, 2*n*n), stpb: make([]float64, 2*n),
	}
}

func (q *denseForm) try(x []float64) float64 {
	copy(q.tried, x)
	q.p.Residuals(x, q.rho)
	f := 0.0
	for _, v := range q.rho {
		f += v * v
	}
	return f
}

func (q *denseForm) accept() bool {
	q.j.Zero()
	q.p.Jacobian(q.tried, q.j)
	rows := max(q.m, q.n)
	a, b := q.work[:rows*q.n], q.work[rows*q.n:]
	clear(q.work)
	for i := range q.m {
		copy(a[i*q.n:(i+1)*q.n], q.j.RawRowView(i))
	}
	copy(b, q.rho)
	if !allFinite(a) {
		return false
	}
	householder(a, rows, q.n, b)
	copy(q.r, a)
	copy(q.qtr, b)
	for j := range q.n {
		q.g[j] = 0
		for i := range j + 1 {
			q.g[j] += q.r[i*q.n+j] * q.qtr[i]
		}
	}
	return true
}

func (q *denseForm) gradient() []float64 { return q.g }

func (q *denseForm) norms(dst []float64) {
	for j := range dst {
		dst[j] = 0
		for i := range j + 1 {
			dst[j] += q.r[i*q.n+j] * q.r[i*q.n+j]
		}
	}
}

func (q *denseForm) normal(h []float64) {
	for i := range q.n {
		for j := range q.n {
			s := 0.0
			for l := range min(i, j) + 1 {
				s += q.r[l*q.n+i] * q.r[l*q.n+j]
			}
			h[i*q.n+j] = s
		}
	}
}

func (q *denseForm) decrease(d []float64) float64 {
	s := 0.0
	for i := range q.n {
		t := 0.0
		for j := i; j < q.n; j++ {
			t += q.r[i*q.n+j] * d[j]
		}
		s -= t * (2*q.qtr[i] + t)
	}
	return s
}

func (q *denseForm) solve(d []float64, free []bool, lambda float64, scale []float64) bool {
	k := 0
	for _, f := range free {
		if f {
			k++
		}
	}
	rows := q.n + k
	a, b := q.step[:rows*k], q.stpb[:rows]
	clear(a)
	clear(b)
	copy(b, q.qtr)
	c := 0
	for j, f := range free {
		for i := range j + 1 {
			if f {
				a[i*k+c] = q.r[i*q.n+j]
			} else {
				b[i] += q.r[i*q.n+j] * d[j]
			}
		}
		if f {
			a[(q.n+c)*k+c] = math.Sqrt(lambda * scale[j])
			c++
		}
	}
	householder(a, rows, k, b)
	if dependent(a, k) >= 0 {
		return false
	}
	for i := k - 1; i >= 0; i-- {
		for j := i + 1; j < k; j++ {
			b[i] -= a[i*k+j] * b[j]
		}
		if a[i*k+i] != 0 {
			b[i] /= a[i*k+i]
		}
	}
	c = 0
	for j, f := range free {
		if f {
			d[j] = -b[c]
			c++
		}
	}
	return true
}

// householder reduces the rows×n matrix a (rows ≥ n) to its upper triangle R by
// reflections and applies them to b; what stood below R is set to zero.
func householder(a []float64, rows, n int, b []float64) {
	for k := range n {
		norm := 0.0
		for i := k; i < rows; i++ {
			norm = math.Hypot(norm, a[i*n+k])
		}
		if norm == 0 {
			continue
		}
		norm = -math.Copysign(norm, a[k*n+k])
		for i := k; i < rows; i++ {
			a[i*n+k] /= -norm
		}
		a[k*n+k]++
		pivot := a[k*n+k]
		for j := k + 1; j < n; j++ {
			s := 0.0
			for i := k; i < rows; i++ {
				s += a[i*n+k] * a[i*n+j]
			}
			s /= pivot
			for i := k; i < rows; i++ {
				a[i*n+j] -= s * a[i*n+k]
			}
		}
		s := 0.0
		for i := k; i < rows; i++ {
			s += a[i*n+k] * b[i]
		}
		s /= pivot
		for i := k; i < rows; i++ {
			b[i] -= s * a[i*n+k]
			a[i*n+k] = 0
		}
		a[k*n+k] = norm
	}
}

// dependent is the first column of the triangle R (k×k) that depends on those before it
// to rounding, or -1. A column of zeros does not count.
func dependent(r []float64, k int) int {
	for j := range k {
		norm := 0.0
		for i := range j + 1 {
			norm = math.Hypot(norm, r[i*k+j])
		}
		if norm > 0 && !(math.Abs(r[j*k+j]) > 4*epsilon*float64(k)*norm) {
			return j
		}
	}
	return -1
}
