package lm

import (
	"context"
	"math"
	"testing"
)

// The certified residual sum of squares must come out at the certified parameters before a
// fit can say anything. The parameters are printed with 11 digits; Lanczos1's sum (1.4e-25)
// is rounding.
func TestNISTResiduals(t *testing.T) {
	for _, p := range allNIST(t) {
		r := make([]float64, len(p.y))
		p.Residuals(p.want, r)
		rss := 0.0
		for _, v := range r {
			rss += v * v
		}
		tol := 1e-9 * p.rss
		if p.name == "Lanczos1" {
			tol = 1e-20
		}
		if d := math.Abs(rss - p.rss); !(d <= tol) {
			t.Errorf("%s: sum of squares %g at the certified parameters, certified %g", p.name, rss, p.rss)
		}
	}
}

type nistScore struct {
	parameters, errors float64
	result             Result
}

func score(p *nist, r Result) nistScore {
	n := len(p.want)
	s := nistScore{parameters: digits(r.X, p.want), result: r}
	c := make([]float64, n*n)
	if r.Covariance(c) != nil {
		return s
	}
	e := make([]float64, n)
	for i := range e {
		e[i] = math.Sqrt(c[i*n+i] * r.F / float64(len(p.y)-n))
	}
	s.errors = digits(e, p.wantE)
	return s
}

func TestNIST(t *testing.T) {
	ctx := context.Background()
	t.Logf("%-9s %5s %28s   %28s", "", "start", "QR: digits (errors)", "normal form: digits (errors)")
	for _, p := range allNIST(t) {
		for k, x0 := range p.start {
			s := &Settings{XTol: 1e-11, FTol: -1, MaxIterations: 3000}
			r, err := MinimizeDense(ctx, p, x0, s)
			if err != nil {
				t.Errorf("%s start %d: %v", p.name, k+1, err)
			}
			a := score(p, r)
			r, err = Minimize(ctx, sum(p), x0, s, nil)
			if err != nil {
				t.Errorf("%s start %d: %v", p.name, k+1, err)
			}
			b := score(p, r)
			t.Logf("%-9s %5d %6.1f (%4.1f) %3d it %-18s %6.1f (%4.1f) %3d it %s", p.name, k+1,
				a.parameters, a.errors, a.result.Iterations, a.result.Reason,
				b.parameters, b.errors, b.result.Iterations, b.result.Reason)
		}
	}
}
