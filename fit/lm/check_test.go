package lm

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// checkJacobian compares the Jacobian at x with differences of the residuals of fourth
// order. It allows 1e-6 of the largest entry of a column.
func checkJacobian(p Residuals, x []float64) error {
	m, n := p.Size()
	j := mat.NewDense(m, n, nil)
	p.Jacobian(x, j)
	at := func(k int, h float64) []float64 {
		y, r := append([]float64(nil), x...), make([]float64, m)
		y[k] += h
		p.Residuals(y, r)
		return r
	}
	for k := range n {
		h := 1e-4 * max(math.Abs(x[k]), 1e-12)
		a, b, c, d := at(k, -2*h), at(k, -h), at(k, h), at(k, 2*h)
		biggest := 0.0
		for i := range m {
			biggest = max(biggest, math.Abs(j.At(i, k)))
		}
		for i := range m {
			want := (a[i] - 8*b[i] + 8*c[i] - d[i]) / (12 * h)
			if d := math.Abs(j.At(i, k) - want); !(d <= 1e-6*biggest) {
				return fmt.Errorf("derivative of residual %d by parameter %d is %g, by differences %g", i, k, j.At(i, k), want)
			}
		}
	}
	return nil
}

// bent is a model with one derivative a thousandth off.
type bent struct{ *nist }

func (b bent) Jacobian(x []float64, j *mat.Dense) {
	b.nist.Jacobian(x, j)
	j.Set(3, 1, j.At(3, 1)*1.001)
}

func TestCheckerRejects(t *testing.T) {
	p := readNIST(t, nistFolder+"/Gauss1.dat")
	x := append([]float64(nil), p.want...)
	x[1] *= 1.1
	if err := checkJacobian(p, x); err != nil {
		t.Fatal(err)
	}
	if checkJacobian(bent{p}, x) == nil {
		t.Error("a wrong derivative passed")
	}
}
