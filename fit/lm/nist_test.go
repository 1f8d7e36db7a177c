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

// Every problem, from both starts, with one setting and the Gauss-Newton first step that is
// the default: at least 6 digits in every parameter and 4 in every standard error, by QR
// and by the normal equations alike. Lanczos1's certified errors rest on residuals of
// 1e-13, which double precision does not resolve.
func TestNIST(t *testing.T) {
	ctx := context.Background()
	s := &Settings{XTol: 1e-11, FTol: -1, MaxIterations: 3000}
	t.Logf("%-9s start   QR: digits (errors)  steps   normal form: digits (errors)  steps", "")
	for _, p := range allNIST(t) {
		for k, x0 := range p.start {
			dense, err := MinimizeDense(ctx, p, x0, s)
			if err != nil {
				t.Errorf("%s start %d: %v", p.name, k+1, err)
			}
			normal, err := Minimize(ctx, sum(p), x0, s, nil)
			if err != nil {
				t.Errorf("%s start %d: %v", p.name, k+1, err)
			}
			a, b := score(p, dense), score(p, normal)
			t.Logf("%-9s %5d %12.1f (%4.1f) %9d %18.1f (%4.1f) %13d", p.name, k+1,
				a.parameters, a.errors, dense.Iterations, b.parameters, b.errors, normal.Iterations)
			for _, c := range [...]nistScore{a, b} {
				if !c.result.Reason.Usable() {
					t.Errorf("%s start %d ended: %s", p.name, k+1, c.result.Reason.Sentence())
				}
				if !(c.parameters >= 6) || !(c.errors >= 4) && p.name != "Lanczos1" {
					t.Errorf("%s start %d: %.1f digits in the parameters, %.1f in the errors", p.name, k+1, c.parameters, c.errors)
				}
			}
		}
	}
}

// The derivatives of the 27 models, at points away from both starts and the minimum.
func TestNISTDerivatives(t *testing.T) {
	for _, p := range allNIST(t) {
		x := make([]float64, len(p.want))
		for i, v := range p.want {
			x[i] = v * (1.02 + 0.013*float64(i))
		}
		if err := checkJacobian(p, x); err != nil {
			t.Errorf("%s: %v", p.name, err)
		}
	}
}

func BenchmarkNISTThurber(b *testing.B) {
	p := readNIST(b, nistFolder+"/Thurber.dat")
	for b.Loop() {
		if _, err := MinimizeDense(context.Background(), p, p.start[1], nil); err != nil {
			b.Fatal(err)
		}
	}
}
