package synth

import (
	"math"
	"slices"
	"strings"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"
)

func moments(p []uint16) (mean, variance float64) {
	for _, v := range p {
		mean += float64(v)
	}
	mean /= float64(len(p))
	for _, v := range p {
		d := float64(v) - mean
		variance += d * d
	}
	return mean, variance / float64(len(p)-1)
}

// Counts of gain g have mean offset + λ/g and variance (λ + r²)/g², and rounding adds
// 1/12 (the photon-transfer relation; common practice).
func TestPhotonTransfer(t *testing.T) {
	for _, c := range []struct{ electrons, gain, read, dark float64 }{
		{5, 1, 6, 0}, {20, 1, 6, 4}, {3000, 0.8, 4, 10}, {40000, 2.3, 12, 0},
	} {
		s := plain()
		s.Width, s.Height = 180, 180
		s.Probe.Electrons = c.electrons
		camera := Camera{ElectronsPerCount: c.gain, ReadNoise: c.read, Offset: 200, DarkElectrons: c.dark}
		f := draw(t, s, camera, source(11))
		n := float64(len(f.Light))
		for _, frame := range []struct {
			plane  []uint16
			lambda float64
		}{{f.Light, c.electrons + c.dark}, {f.Dark, c.dark}} {
			mean, variance := moments(frame.plane)
			want := (frame.lambda+c.read*c.read)/(c.gain*c.gain) + 1.0/12
			near(t, "mean", mean, 200+frame.lambda/c.gain, 4*math.Sqrt(want/n))
			near(t, "variance over its value", variance/want, 1, 4*math.Sqrt(2.1/n))
		}
	}
}

func TestPoissonDistribution(t *testing.T) {
	const draws = 100000
	for _, lambda := range []float64{0.05, 1, 7.5, 29.9, 30.1, 140} {
		d := distuv.Poisson{Lambda: lambda}
		top := int(lambda+8*math.Sqrt(lambda)) + 8
		seen := make([]float64, top)
		rng := source(21)
		for range draws {
			seen[min(int(poisson(lambda, rng)), top-1)]++
		}
		chi, dof, rest, restWant := 0.0, 0.0, 0.0, 0.0
		for k, n := range seen {
			want := draws * d.Prob(float64(k))
			if want < 10 {
				rest, restWant = rest+n, restWant+want
				continue
			}
			chi += (n - want) * (n - want) / want
			dof++
		}
		chi += (rest - restWant) * (rest - restWant) / math.Max(restWant, 1)
		if !(chi <= dof+5*math.Sqrt(2*dof)) {
			t.Errorf("mean %g: chi² %.1f over %g classes", lambda, chi, dof)
		}
	}
	if n := poisson(0, source(1)); n != 0 {
		t.Errorf("mean zero gave %g", n)
	}
}

func TestClippingHotPixelsAndPattern(t *testing.T) {
	s := plain()
	c := Camera{ElectronsPerCount: 1, ReadNoise: 2, Offset: 50, OffsetPattern: 4, FullScale: 1023, Hot: 5, HotElectrons: 400, Seed: 3}
	f := draw(t, s, c, source(2))
	if slices.Min(f.Light) != 1023 || slices.Max(f.Light) != 1023 {
		t.Error("2000 electrons should clip at full scale 1023")
	}
	sensor, err := NewSensor(c, s.Width, s.Height)
	if err != nil {
		t.Fatal(err)
	}
	hot := sensor.HotPixels()
	if len(hot) != 5 {
		t.Fatalf("%d hot pixels, want 5", len(hot))
	}
	for i, v := range f.Dark {
		if (v > 150) != slices.Contains(hot, i) {
			t.Errorf("pixel %d reads %d in the dark, hot pixels are %v", i, v, hot)
		}
	}
	// The fixed pattern is common to two frames, the read noise is not.
	again := draw(t, s, c, source(9))
	var cross float64
	mean, _ := moments(f.Dark)
	for i, v := range f.Dark {
		if !slices.Contains(hot, i) {
			cross += (float64(v) - mean) * (float64(again.Dark[i]) - mean)
		}
	}
	near(t, "common variance", cross/float64(len(f.Dark)), 16, 3)
}

func TestCameraRefusesNonsense(t *testing.T) {
	cases := []struct {
		change func(*Camera)
		want   string
	}{
		{func(c *Camera) { c.ElectronsPerCount = 0 }, "electrons per count"},
		{func(c *Camera) { c.ReadNoise = math.NaN() }, "figure"},
		{func(c *Camera) { c.FullScale = 70000 }, "full scale"},
		{func(c *Camera) { c.Hot = 101 }, "hot pixels"},
	}
	for _, c := range cases {
		camera := quiet()
		c.change(&camera)
		if _, err := NewSensor(camera, 10, 10); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("want an error about %q, got %v", c.want, err)
		}
	}
	if _, err := NewSensor(quiet(), 0, 10); err == nil {
		t.Error("a sensor without pixels was made")
	}
}
