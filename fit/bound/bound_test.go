package bound

import (
	"context"
	"errors"
	"math"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"

	"fallshadow/model"
)

var condensed = Cloud{T: 150e-9, ThermalAtoms: 6e4, CondensateAtoms: 3e4, Mu: 40e-9 * model.KB}

// TestErrorsFollowLight: without read noise all variances grow as the counts do.
func TestErrorsFollowLight(t *testing.T) {
	e := crooked(t)
	e.Noise = Noise{LightShot: 1}
	dim := bound(t, e, condensed)
	light := e.Light
	e.Light = func(x, y float64) float64 { return 4 * light(x, y) }
	e.Optics.Saturation *= 4
	bright := bound(t, e, condensed)
	near(t, "T", dim.T, 2*bright.T, 1e-9)
	near(t, "atoms", dim.Atoms, 2*bright.Atoms, 1e-9)
	near(t, "fraction", dim.Fraction, 2*bright.Fraction, 1e-9)
	near(t, "mu", dim.Mu, 2*bright.Mu, 1e-9)
}

// TestReference: for a faint cloud a reference without noise halves the variance of one
// light frame, and a basis of K frames leaves (1 + 1/K)/2 of it.
func TestReference(t *testing.T) {
	e := crooked(t)
	faint := condensed
	faint.ThermalAtoms, faint.CondensateAtoms = 60, 30
	var v []float64
	for _, shot := range []float64{1, 0.1, 0} {
		e.Noise = Noise{LightShot: shot}
		v = append(v, math.Pow(bound(t, e, faint).Atoms, 2))
	}
	near(t, "basis of ten", v[1], v[0]*1.1/2, 1e-3)
	near(t, "perfect reference", v[2], v[0]/2, 1e-3)
}

// TestDark: a dark shared by both frames cancels where no atoms are, two darks never do.
func TestDark(t *testing.T) {
	e := crooked(t)
	e.Noise.Dark = 0
	none := bound(t, e, condensed)
	e.Noise.Dark = 100
	two := bound(t, e, condensed)
	e.Noise.DarkIsShared = true
	one := bound(t, e, condensed)
	if !(none.Atoms < one.Atoms && one.Atoms < two.Atoms) {
		t.Errorf("error of atoms: %g without a dark's noise, %g with one dark, %g with two", none.Atoms, one.Atoms, two.Atoms)
	}
	e.Noise.DarkIsShared = false
	e.Noise.Dark, e.Noise.Read = 0, math.Sqrt(125)
	e.Noise.LightRead += 100
	near(t, "two darks are more read noise", bound(t, e, condensed).Atoms, two.Atoms, 1e-12)
}

// TestCovarianceIsWhole: the errors are its diagonal, and it is positive.
func TestCovarianceIsWhole(t *testing.T) {
	got := bound(t, crooked(t), condensed)
	want := map[Parameter]float64{Thermal: got.Thermal, T: got.T, Condensate: got.Condensate, Mu: got.Mu}
	for i, p := range got.Free {
		if w, ok := want[p]; ok {
			near(t, p.String(), math.Sqrt(got.Covariance.At(i, i)), w, 1e-12)
			delete(want, p)
		}
	}
	if len(want) > 0 || len(got.Free) != 10 {
		t.Errorf("free parameters %v lack %v", got.Free, want)
	}
	unit := make([]float64, len(got.Free))
	for i := range unit {
		unit[i] = 1 / math.Sqrt(got.Covariance.At(i, i))
	}
	if !new(mat.Cholesky).Factorize(rescaled(got.Covariance, unit)) {
		t.Error("covariance is not positive")
	}
}

// TestParts: what a cloud does not have has no error, and what it has has one.
func TestParts(t *testing.T) {
	li, err := model.LookupSpecies("7Li")
	if err != nil {
		t.Fatal(err)
	}
	attractive := crooked(t)
	attractive.Species, attractive.Trap = li, model.TrapHz(150.6, 152.6, 131.5)
	attractive.Flight = 10e-3
	for _, q := range []struct {
		name                              string
		e                                 Experiment
		c                                 Cloud
		temperature, condensate, fraction bool
		mu                                bool
	}{
		{"bimodal", crooked(t), condensed, true, true, true, true},
		{"thermal", crooked(t), Cloud{T: 150e-9, ThermalAtoms: 6e4, Alpha: 0.1}, true, false, false, false},
		{"at the transition", crooked(t), Cloud{T: 150e-9, ThermalAtoms: 6e4}, true, false, false, false},
		{"condensate", crooked(t), Cloud{CondensateAtoms: 6e4, Mu: 30e-9 * model.KB}, false, true, false, true},
		{"attractive", attractive, Cloud{T: 150e-9, ThermalAtoms: 1e4, CondensateAtoms: 1000}, true, true, true, false},
	} {
		got := bound(t, q.e, q.c)
		for _, n := range []struct {
			name string
			v    float64
			has  bool
		}{
			{"T", got.T, q.temperature}, {"thermal", got.Thermal, q.temperature}, {"condensate", got.Condensate, q.condensate},
			{"fraction", got.Fraction, q.fraction}, {"mu", got.Mu, q.mu}, {"atoms", got.Atoms, true},
		} {
			if (n.v > 0 && !math.IsInf(n.v, 1)) != n.has || !n.has && !math.IsNaN(n.v) {
				t.Errorf("%s: error of %s is %g", q.name, n.name, n.v)
			}
		}
	}
}

func TestRefusals(t *testing.T) {
	for _, q := range []struct {
		spoil func(*Experiment, *Cloud)
		want  string
	}{
		{func(e *Experiment, _ *Cloud) { e.Trap.Omega[1] = 0 }, "trap frequency 2"},
		{func(e *Experiment, _ *Cloud) { e.Width = 0 }, "width"},
		{func(e *Experiment, _ *Cloud) { e.Flight = -1 }, "flight"},
		{func(e *Experiment, _ *Cloud) { e.Optics.Pixel = math.NaN() }, "pixel"},
		{func(e *Experiment, _ *Cloud) { e.Optics.Saturation = 0 }, "saturation"},
		{func(e *Experiment, _ *Cloud) { e.Optics.Stray = -0.1 }, "stray light"},
		{func(e *Experiment, _ *Cloud) { e.Optics.Stray = 1 }, "stray light is 1"},
		{func(e *Experiment, _ *Cloud) { e.Noise.Read = -6 }, "read noise"},
		{func(e *Experiment, _ *Cloud) { e.Light = nil }, "no light"},
		{func(e *Experiment, _ *Cloud) { e.Light = func(x, y float64) float64 { return 100 - 50*x } }, "light of pixel (2, 0)"},
		{func(e *Experiment, _ *Cloud) { e.DensitySigma = -1 }, "noise of the density"},
		{func(e *Experiment, _ *Cloud) { e.X = 1e6 }, "does not tell the parameter thermal"},
		{func(_ *Experiment, c *Cloud) { c.T = 0 }, "temperature"},
		{func(_ *Experiment, c *Cloud) { c.Mu = -1 }, "chemical potential"},
		{func(_ *Experiment, c *Cloud) { c.ThermalAtoms, c.CondensateAtoms = 0, 0 }, "condensed atoms"},
		{func(_ *Experiment, c *Cloud) { c.CondensateAtoms = math.Inf(1) }, "infinite"},
		{func(_ *Experiment, c *Cloud) { c.CondensateAtoms, c.Alpha = 0, -0.1 }, "−ln z"},
		{func(e *Experiment, _ *Cloud) { e.Trap, e.View = model.TrapHz(60, 60, 60), model.View(0, 0, 0) }, "angle"},
		{func(e *Experiment, c *Cloud) { e.Species.ScatteringLength *= -1; c.CondensateAtoms = 1e6 }, "condensate of"},
	} {
		e, c := crooked(t), condensed
		q.spoil(&e, &c)
		_, err := Bound(context.Background(), e, c)
		if err == nil || !strings.Contains(err.Error(), q.want) {
			t.Errorf("error is %v, want one with %q", err, q.want)
		}
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Bound(ctx, crooked(t), condensed); !errors.Is(err, context.Canceled) {
		t.Errorf("error is %v, want that of the context", err)
	}
}

// TestTaps: the kernel keeps the sum and has its variance, so that variances add.
func TestTaps(t *testing.T) {
	for _, v := range []float64{1.0 / 12, 0.3, 0.4, 0.5, 0.95, 3, 20} {
		taps := gaussianTaps(v)
		sum, second := taps[0], 0.0
		for i, k := range taps[1:] {
			n := float64(i + 1)
			sum += 2 * k
			second += 2 * k * n * n
		}
		near(t, "sum", sum, 1, 1e-14)
		near(t, "variance", second, v, 0.015)
	}
}
