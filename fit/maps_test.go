package fit

import (
	"math"
	"testing"
)

// Without noise the model that is seen through the camera lies on the density that is
// measured, the one without blur does not, and pixels that do not count are not a number.
func TestMapsAreSeenThroughTheCamera(t *testing.T) {
	sc := standardScene(t, 260e-9, 9e4, 3)
	sc.withoutNoise = true
	pic := sc.draw(t)
	pic.Good[0] = false
	r := mustFit(t, sc, pic, Options{Maps: true})
	m := r.Maps
	worst, sharp := 0.0, 0.0
	for o := range m.Density {
		if o == 0 {
			continue
		}
		d := math.Abs(float64(m.Density[o] - m.Seen[o]))
		if !(d <= 0.02*r.PeakOD) {
			t.Fatalf("pixel %d shows %g, the model %g, with a peak of %g", o, m.Density[o], m.Seen[o], r.PeakOD)
		}
		worst = math.Max(worst, d)
		sharp = math.Max(sharp, math.Abs(float64(m.Density[o]-m.Total[o])))
	}
	if !(sharp > 3*worst) {
		t.Errorf("the model without blur is off by %g, with it by %g", sharp, worst)
	}
	for name, pix := range map[string][]float32{"density": m.Density, "seen": m.Seen} {
		if v := float64(pix[0]); !math.IsNaN(v) {
			t.Errorf("%s of a bad pixel is %g", name, v)
		}
	}
	if mustFit(t, sc, pic, Options{}).Maps != nil {
		t.Error("maps that nobody asked for")
	}
}
