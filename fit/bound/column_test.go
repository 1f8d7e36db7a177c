package bound

import (
	"context"
	"fmt"
	"math"
	"testing"

	"fallshadow/model"
)

// expected draws M = k L (G * t(σ0 n, k I)) for any parameters, the law taken at each.
func expected(t testing.TB, e *Experiment, q *values) []float64 {
	t.Helper()
	p, err := newPainter(e)
	if err != nil {
		t.Fatal(err)
	}
	m := make([]float64, e.Width*e.Height)
	if err := p.density(context.Background(), q, m); err != nil {
		t.Fatal(err)
	}
	light := make([]float64, len(m))
	law := model.Law{Alpha: e.Optics.Alpha, Detuning: e.Optics.Detuning, Stray: e.Optics.Stray}
	for i := range m {
		x, y := float64(i%e.Width), float64(i/e.Width)
		w, h := float64(e.Width), float64(e.Height)
		k := math.Exp(q[Light] + q[LightX]*(x-(w-1)/2)/w + q[LightY]*(y-(h-1)/2)/h)
		light[i] = k * e.Light(x, y)
		m[i] = law.Transmit(m[i], light[i]*(1-e.Optics.Stray)/e.Optics.Saturation)
	}
	blur := e.Optics.Blur / e.Optics.Pixel
	convolve(m, make([]float64, len(m)), e.Width, e.Height, gaussianTaps(blur*blur+1.0/12))
	for i := range m {
		m[i] *= light[i]
	}
	return m
}

// TestColumnsAreSlopesOfCounts holds every column against plain central differences of the
// expected counts, in a picture without symmetry: tilted view, stray light, detuned probe
// near saturation, cloud off centre.
func TestColumnsAreSlopesOfCounts(t *testing.T) {
	e := crooked(t)
	bimodal := Cloud{T: 150e-9, ThermalAtoms: 6e4, CondensateAtoms: 3e4, Mu: 40e-9 * model.KB}
	thermal := Cloud{T: 150e-9, ThermalAtoms: 6e4, Alpha: 0.3}
	for name, c := range map[string]Cloud{"bimodal": bimodal, "thermal": thermal} {
		at, steps := truth(&e, &c)
		s, err := newSight(context.Background(), &e, &at)
		if err != nil {
			t.Fatal(err)
		}
		got := make([]float64, e.Width*e.Height)
		for _, p := range free(&e, &c) {
			if err := s.column(context.Background(), p, &at, steps[p], got); err != nil {
				t.Fatal(err)
			}
			h := 1e-5 * math.Max(math.Abs(at[p]), 1e-2)
			if p == T || p == Mu {
				h = 1e-5 * at[p]
			}
			up, down := at, at
			up[p] += h
			down[p] -= h
			a, b := expected(t, &e, &up), expected(t, &e, &down)
			sum, diff := 0.0, 0.0
			for i, v := range got {
				want := (a[i] - b[i]) / (2 * h)
				sum += want * want
				diff += (v - want) * (v - want)
			}
			within(t, fmt.Sprintf("%s: column of %s, relative misfit", name, p), math.Sqrt(diff/sum), 0, 1e-3)
		}
	}
}

// crooked is an experiment in which no symmetry hides a fault.
func crooked(t testing.TB) Experiment {
	e := roundTrap(t)
	e.Trap, e.View = model.TrapHz(30, 90, 110), model.View(0.4, 0.3, 0.8)
	e.Width, e.Height, e.X, e.Y = 90, 70, 40.3, 37.1
	e.Optics = Optics{Pixel: 8e-6, Blur: 5e-6, Alpha: 1.4, Detuning: 0.2, Saturation: 2000, Stray: 0.02}
	e.Light = func(x, y float64) float64 { return 1500 - 3*x + 2*y }
	e.Noise = Noise{Read: 5, LightShot: 1, LightRead: 25, Dark: 25}
	e.DensitySigma, e.FreeAngle = 0, true
	return e
}
