package synth

import (
	"math"
	"testing"
)

func TestTransmissionSolvesTheLaw(t *testing.T) {
	for _, alpha := range []float64{1, 1.9, 3} {
		for _, delta := range []float64{0, -0.5, 2} {
			for _, s := range []float64{0, 1e-6, 0.1, 2, 50} {
				for _, depth := range []float64{1e-9, 1e-3, 0.5, 3, 20, 60} {
					l := Law{Alpha: alpha, Detuning: delta, Saturation: 1000}
					tr := l.Transmission(depth, s*1000)
					got := -alpha*(1+4*delta*delta)*math.Log(tr) + s*(1-tr)
					// 1−t carries an absolute rounding of 2e-16 where t is near one.
					near(t, "residual", got, depth, 1e-14*(depth+s+alpha*(1+4*delta*delta)))
				}
			}
		}
	}
	if tr := (Law{Alpha: 1, Saturation: math.Inf(1)}).Transmission(0, 100); tr != 1 {
		t.Errorf("no atoms let %g of the light through", tr)
	}
}

// The law follows from dI/dx = −n σ0 I/[α(1+4δ²) + I/Isat] along the beam; here that is
// integrated step by step instead.
func TestTransmissionAgainstTheBeamEquation(t *testing.T) {
	l := Law{Alpha: 1.7, Detuning: 0.4, Saturation: 800}
	slope := func(i float64) float64 { return -i / (1.7*(1+4*0.16) + i/800) }
	for _, in := range []float64{10, 800, 4000} {
		i, h := in, 2.5/1000
		for range 1000 {
			a := slope(i)
			b := slope(i + h/2*a)
			c := slope(i + h/2*b)
			d := slope(i + h*c)
			i += h / 6 * (a + 2*b + 2*c + d)
		}
		near(t, "transmission", l.Transmission(2.5, in), i/in, 1e-12)
	}
}
