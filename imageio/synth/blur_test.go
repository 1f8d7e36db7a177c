package synth

import (
	"math"
	"testing"
)

func TestBlurConservesLightAndAddsItsVariance(t *testing.T) {
	cases := []struct{ rms, tolVariance float64 }{{0, 1e-8}, {0.35, 1e-4}, {0.8, 1e-4}, {2.2, 1e-3}}
	for _, c := range cases {
		s := plain()
		s.Blur = c.rms
		taps := spread(s.cells(), c.rms)
		sum := 0.0
		for _, w := range taps {
			sum += w
		}
		near(t, "weights", sum, 1, 1e-14)
		// The shadow of a thin cloud: what the light frame has more than the atoms frame.
		s.Cloud = disc(1e-3, 24, 20, 3, 2)
		e := expect(t, s, 1)
		var lost, mx, mxx float64
		for i, a := range e.Atoms {
			x := float64(i%s.Width) - 24
			d := e.Light[i] - a
			lost, mx, mxx = lost+d, mx+d*x, mxx+d*x*x
		}
		// A thin gaussian keeps 1 − e^−d = d − d²/2: the integral of d² is half of peak × integral.
		near(t, "light lost", lost/(2000*1e-3*2*math.Pi*6), 1-1e-3/4, 1e-6)
		near(t, "centre", mx/lost, 0, 1e-8)
		pixel := 1.0 / 12
		if c.rms == 0 { // three sample points to the pixel
			pixel = 2.0 / 27
		}
		near(t, "variance", mxx/lost, 9*(1+1e-3/8)+c.rms*c.rms+pixel, 9*c.tolVariance)
	}
}

func TestBlurLeavesEvenLightAlone(t *testing.T) {
	s := plain()
	s.Blur = 1.3
	for i, v := range expect(t, s, 1).Light {
		if math.Abs(v-2000) > 1e-9 {
			t.Fatalf("pixel %d of an even light has %g electrons", i, v)
		}
	}
}
