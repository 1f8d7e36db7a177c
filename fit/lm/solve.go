package lm

import "math"

const epsilon = 0x1p-52

// normalForm is the linear view of a Problem: JᵀJ and Jᵀρ at the centre and at the point
// tried last, solved by Cholesky with unit diagonal.
type normalForm struct {
	p            Problem
	h, g         []float64
	triedH       []float64
	triedG       []float64
	a, b, weight []float64
	index        []int
}

func (q *normalForm) reset(p Problem) {
	n := p.Dim()
	q.p = p
	q.h, q.triedH, q.a = grow(q.h, n*n), grow(q.triedH, n*n), grow(q.a, n*n)
	q.g, q.triedG = grow(q.g, n), grow(q.triedG, n)
	q.b, q.weight, q.index = grow(q.b, n), grow(q.weight, n), grow(q.index, n)
}

func (q *normalForm) try(x []float64) float64 { return q.p.Normal(x, q.triedH, q.triedG) }

func (q *normalForm) accept() bool {
	if !allFinite(q.triedH) || !allFinite(q.triedG) {
		return false
	}
	q.h, q.triedH = q.triedH, q.h
	q.g, q.triedG = q.triedG, q.g
	return true
}

func (q *normalForm) gradient() []float64 { return q.g }

func (q *normalForm) norms(dst []float64) {
	for i := range dst {
		dst[i] = q.h[i*len(dst)+i]
	}
}

func (q *normalForm) normal(h []float64) { copy(h, q.h) }

func (q *normalForm) decrease(d []float64) float64 {
	n, s := len(d), 0.0
	for i, di := range d {
		t := 2 * q.g[i]
		for j, dj := range d {
			t += q.h[i*n+j] * dj
		}
		s -= di * t
	}
	return s
}

func (q *normalForm) solve(d []float64, free []bool, lambda float64, scale []float64) bool {
	n, k := len(d), 0
	for i, f := range free {
		if f {
			q.index[k] = i
			k++
		}
	}
	index := q.index[:k]
	for r, i := range index {
		q.weight[r] = 1
		if v := q.h[i*n+i]; v > 0 {
			q.weight[r] = 1 / math.Sqrt(v)
		}
		t := q.g[i]
		for j, f := range free {
			if !f {
				t += q.h[i*n+j] * d[j]
			}
		}
		q.b[r] = -t * q.weight[r]
		for c, j := range index[:r+1] {
			q.a[r*k+c] = q.h[i*n+j] * q.weight[r] * q.weight[c]
		}
		q.a[r*k+r] += lambda * scale[i] * q.weight[r] * q.weight[r]
		if q.h[i*n+i] == 0 {
			q.a[r*k+r] = 1
		}
	}
	if cholesky(q.a, k) >= 0 {
		return false
	}
	choleskySolve(q.a, k, q.b)
	for r, i := range index {
		d[i] = q.b[r] * q.weight[r]
	}
	return true
}

// cholesky factors the k×k matrix a in place, reading and writing its lower triangle. It
// returns the first row that depends on those before it to rounding of a diagonal of
// order 1, or -1.
func cholesky(a []float64, k int) int {
	for i := range k {
		for j := range i + 1 {
			s := a[i*k+j]
			for l := range j {
				s -= a[i*k+l] * a[j*k+l]
			}
			if j < i {
				a[i*k+j] = s / a[j*k+j]
				continue
			}
			if !(s > 4*epsilon*float64(k)) {
				return i
			}
			a[i*k+i] = math.Sqrt(s)
		}
	}
	return -1
}

// choleskySolve replaces b by the solution of L Lᵀ x = b.
func choleskySolve(l []float64, k int, b []float64) {
	for i := range k {
		for j := range i {
			b[i] -= l[i*k+j] * b[j]
		}
		b[i] /= l[i*k+i]
	}
	for i := k - 1; i >= 0; i-- {
		for j := i + 1; j < k; j++ {
			b[i] -= l[j*k+i] * b[j]
		}
		b[i] /= l[i*k+i]
	}
}

func finite(v float64) bool { return math.Abs(v) <= math.MaxFloat64 }

func allFinite(s []float64) bool {
	for _, v := range s {
		if !finite(v) {
			return false
		}
	}
	return true
}
