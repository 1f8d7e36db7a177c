package model

import (
	"errors"
	"math"
	"testing"
)

// TestRungeKuttaCoefficients: the conditions that any method of order 8 meets and a
// misprinted digit breaks: rows sum to the nodes, Σ b_i c_i^k = 1/(k+1) up to k = 7, rows
// of the higher stages integrate t and t² (Σ a_ij c_j = c_i²/2, Σ a_ij c_j² = c_i³/3), and
// Σ b_i a_ij = b_j(1 − c_j). Both error estimates vanish for a constant.
func TestRungeKuttaCoefficients(t *testing.T) {
	for i := range rkStages {
		var row, first, second float64
		for j, a := range rkMatrix[i][:i] {
			row += a
			first += a * rkNodes[j]
			second += a * rkNodes[j] * rkNodes[j]
		}
		c := rkNodes[i]
		within(t, "row sum", row, c, 1e-14)
		if i >= 2 {
			within(t, "integral of t", first, c*c/2, 1e-14)
		}
		if i >= 3 {
			within(t, "integral of t²", second, c*c*c/3, 1e-14)
		}
	}
	for k := range 8 {
		sum := 0.0
		for i, b := range rkWeights {
			sum += b * math.Pow(rkNodes[i], float64(k))
		}
		within(t, "quadrature", sum, 1/float64(k+1), 1e-14)
	}
	for j, b := range rkWeights {
		sum := 0.0
		for i := range rkStages {
			sum += rkWeights[i] * rkMatrix[i][j]
		}
		within(t, "column", sum, b*(1-rkNodes[j]), 1e-13)
	}
	var five, third float64
	for i := range rkStages {
		five += rkError5[i]
		third += rkThird[i]
	}
	within(t, "error estimate of order 5", five, 0, 1e-15)
	within(t, "embedded formula of order 3", third, 1, 1e-15)
}

// TestIntegrateOrder: halving one step of the pendulum divides the local error by 2^9.
func TestIntegrateOrder(t *testing.T) {
	pendulum := func(_ float64, y, dy *odeState) { dy[0], dy[1] = y[1], -math.Sin(y[0]) }
	step := func(h float64, steps int) odeState {
		y, next := odeState{1, 0.5}, odeState{}
		var k [rkStages]odeState
		for range steps {
			pendulum(0, &y, &k[0])
			rkStep(pendulum, 2, 0, h, &y, &k, &next)
			y = next
		}
		return y
	}
	exact := step(0.05, 16)
	coarse, fine := step(0.8, 1)[0]-exact[0], step(0.4, 2)[0]-exact[0]
	if ratio := math.Abs(coarse / fine); !(ratio > 150 && ratio < 700) {
		t.Errorf("halving the step divides the error by %.0f, want about 256", ratio)
	}
}

// TestIntegrate follows the harmonic oscillator over 16 periods and a forced equation whose
// right-hand side depends on time only; a pole ends in an error.
func TestIntegrate(t *testing.T) {
	oscillator := func(_ float64, y, dy *odeState) { dy[0], dy[1] = y[1], -y[0] }
	y := odeState{1, 0}
	if err := integrate(oscillator, 2, 0, 100, 1e-13, &y); err != nil {
		t.Fatal(err)
	}
	within(t, "cosine", y[0], math.Cos(100), 1e-11)
	within(t, "sine", y[1], -math.Sin(100), 1e-11)

	y = odeState{0}
	if err := integrate(func(t float64, _, dy *odeState) { dy[0] = math.Exp(-t) }, 1, 0, 40, 1e-13, &y); err != nil {
		t.Fatal(err)
	}
	within(t, "quadrature", y[0], 1, 1e-13)

	y = odeState{1}
	if err := integrate(func(_ float64, y, dy *odeState) { dy[0] = y[0] * y[0] }, 1, 0, 2, 1e-10, &y); !errors.Is(err, errTooManySteps) {
		t.Errorf("integration through a pole gave %g and error %v", y[0], err)
	}
}
