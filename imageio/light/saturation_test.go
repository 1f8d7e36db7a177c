package light

import (
	"math"
	"testing"

	"fallshadow/imageio"
)

// TestClippedNoise: where full scale clips the noise of the light frame, what is left unmasked still
// has the ratio of the two frames, within four standard errors; a light frame that is clipped all
// over is refused.
func TestClippedNoise(t *testing.T) {
	s := newScene(120, 110, 71)
	s.waist, s.electrons, s.offset = 260, 3960, 60
	const depth, full = 0.05, 4095
	s.depth = func(_, _ float64) float64 { return depth }
	raws := s.night(24)
	clip := func() {
		for _, r := range raws {
			for _, role := range []imageio.Role{imageio.Atoms, imageio.Light} {
				f := r.Frames[role]
				for i, v := range f.Pix {
					f.Pix[i] = min(v, full)
				}
			}
		}
	}
	clip()
	camera := s.camera()
	camera.FullScale = full
	n := prepare(t, camera, raws)
	sum, variance, masked := 0.0, 0.0, 0
	for _, r := range raws {
		a, l, err := n.litPair(r)
		if err != nil {
			t.Fatal(err)
		}
		for i, v := range a.pix {
			if l.bad[i] || a.bad[i] {
				masked++
				continue
			}
			sum += v - math.Exp(-depth)*l.pix[i]
			variance += v + l.pix[i] + 2*s.read*s.read
		}
	}
	if z := sum / math.Sqrt(variance); !(math.Abs(z) < 4) {
		t.Errorf("the frames differ by %.1f standard errors where nothing is masked", z)
	}
	if masked < 400 {
		t.Errorf("%d pixels masked: nothing was clipped", masked)
	}

	s.waist, s.electrons = 0, full-40
	raws = s.night(2)
	clip()
	if _, _, err := n.litPair(raws[0]); err == nil {
		t.Error("a light frame at full scale all over is not refused")
	}
}
