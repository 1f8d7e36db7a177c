package bound

import (
	"context"
	"math/rand/v2"
	"testing"

	"fallshadow/imageio/synth"
	"fallshadow/model"
)

// TestCountsAreThoseOfFrames holds the expected counts to frames that are drawn by other code,
// with so much stray light near saturation that either meaning of its fraction shows.
func TestCountsAreThoseOfFrames(t *testing.T) {
	e := roundTrap(t)
	e.Width, e.Height, e.X, e.Y = 60, 50, 29.3, 25.6
	e.Optics = Optics{Pixel: 4e-6, Blur: 3e-6, Alpha: 1.4, Detuning: 0.2, Saturation: 1200, Stray: 0.3}
	const electrons = 1500.0
	e.Light = func(_, _ float64) float64 { return electrons }
	e.DensitySigma = 0
	c := Cloud{T: 150e-9, ThermalAtoms: 1e5, Alpha: 0.3}
	at, _ := truth(&e, &c)
	got, err := newSight(context.Background(), &e, &at)
	if err != nil {
		t.Fatal(err)
	}

	b, err := model.ExpandThermal(e.Trap, e.Flight, e.Release)
	if err != nil {
		t.Fatal(err)
	}
	shape := e.View.Project(model.ThermalVariances(c.T, e.Species.Mass, e.Trap, b))
	scene := synth.Scene{
		Width: e.Width, Height: e.Height, Blur: e.Optics.Blur / e.Optics.Pixel,
		Cloud: func(x, y float64) float64 {
			return e.Species.Sigma0() * model.ThermalColumn(c.ThermalAtoms, c.Alpha, shape, (x-e.X)*e.Optics.Pixel, (y-e.Y)*e.Optics.Pixel)
		},
		Law:   synth.Law{Alpha: e.Optics.Alpha, Detuning: e.Optics.Detuning, Saturation: e.Optics.Saturation, Stray: e.Optics.Stray},
		Probe: synth.Probe{Electrons: electrons, X: e.X, Y: e.Y, Waist: 1e7},
	}
	want, err := scene.Expect(rand.New(rand.NewPCG(1, 1)))
	if err != nil {
		t.Fatal(err)
	}
	const margin = 6 // light from outside enters the drawn frame at its border
	for i, w := range want.Atoms {
		if x, y := i%e.Width, i/e.Width; x < margin || y < margin || x >= e.Width-margin || y >= e.Height-margin {
			continue
		}
		if v := got.passed[i] * got.light[i]; !(v-w <= 1e-3*electrons && w-v <= 1e-3*electrons) {
			t.Fatalf("pixel %d: %g electrons, the drawn frame has %g", i, v, w)
		}
	}
}
