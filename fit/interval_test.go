package fit

import (
	"math"
	"testing"
)

// TestColdInterval: the T of a nearly pure condensate has an interval where its error is above a
// tenth and none below. The upper side is the longer one, and the sides say how far the truth is.
func TestColdInterval(t *testing.T) {
	with, without, sum := 0.0, 0, 0.0
	for i := range uint64(20) {
		sc := standardScene(t, 100e-9, 1.2e5, 500+i)
		sc.electrons = []float64{1500, 600}[i%2]
		r := mustFit(t, sc, sc.draw(t), Options{})
		v := r.Numbers.T
		if r.Model != ModelBimodal {
			t.Errorf("shot %d: %s", i, r.Model)
			continue
		}
		if !(v.Err > 0.1*v.V) {
			without++
			if !math.IsNaN(v.Low) || !math.IsNaN(v.High) {
				t.Errorf("shot %d: T is %.3g ± %.2g with an interval %.3g to %.3g", i, v.V, v.Err, v.Low, v.High)
			}
			continue
		}
		with++
		down, up := v.V-v.Low, v.High-v.V
		if !(down > 0 && up > 1.05*down) {
			t.Errorf("shot %d: T is %.3g ± %.2g with the interval %.3g to %.3g", i, v.V, v.Err, v.Low, v.High)
		}
		side := down
		if sc.T > v.V {
			side = up
		}
		sum += math.Pow((v.V-sc.T)/side, 2)
	}
	if with < 5 || without < 5 {
		t.Errorf("%g shots with an interval and %d without: the scene tests nothing", with, without)
	}
	within(t, "rms pull", math.Sqrt(sum/with), 1, 0.5)
}
