package fit

import (
	"math"
	"testing"

	"fallshadow/model"
	"fallshadow/model/numbers"
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
		sum += math.Pow(far(v, sc.T), 2)
	}
	if with < 5 || without < 5 {
		t.Errorf("%g shots with an interval and %d without: the scene tests nothing", with, without)
	}
	within(t, "rms pull", math.Sqrt(sum/with), 1, 0.5)
}

// faintScene is a faint picture of a gas just below its transition, or just above without n0.
func faintScene(t *testing.T, n0 float64, seed uint64) *scene {
	sc := standardScene(t, 250e-9, n0, seed)
	sc.electrons, sc.read = 40, 6
	if n0 == 0 {
		sc.alpha = 0.05
		sc.thermal = model.ThermalNumber(sc.T, sc.alpha, sc.lab.Trap)
	}
	return sc
}

// far is how many errors a value is from the truth: in sides of its interval, if it has one.
func far(v numbers.Value, truth float64) float64 {
	switch up := truth > v.V; {
	case up && !math.IsNaN(v.High):
		return (v.V - truth) / (v.High - v.V)
	case !up && !math.IsNaN(v.Low):
		return (v.V - truth) / (v.V - v.Low)
	}
	return (v.V - truth) / v.Err
}

// TestMuInterval: mu of a condensate that is just seen has an interval that says how far it is off.
func TestMuInterval(t *testing.T) {
	seen, sum := 0.0, 0.0
	for i := range uint64(24) {
		sc := faintScene(t, 8000, 2000+i)
		r := mustFit(t, sc, sc.draw(t), Options{})
		v := r.Numbers.Mu
		if r.Model != ModelBimodal || !(v.Err > lopsided*v.V) {
			continue
		}
		if !(v.Low < v.V && v.V < v.High) {
			t.Errorf("shot %d: mu is %.3g ± %.2g with the interval %.3g to %.3g", i, v.V, v.Err, v.Low, v.High)
		}
		seen++
		mu, err := model.Mu(sc.condensate, sc.lab.Species.Mass, sc.lab.Species.ScatteringLength, sc.lab.Trap)
		if err != nil {
			t.Fatal(err)
		}
		sum += math.Pow(far(v, mu), 2)
	}
	if seen < 15 {
		t.Errorf("%g shots have a poorly known mu: the scene tests nothing", seen)
	}
	within(t, "rms pull", math.Sqrt(sum/seen), 1, 0.4)
}

// TestUndecided: a condensate too faint to be believed makes a thermal cloud look colder than it
// is; the interval of T knows that. Without a condensate N has no interval.
func TestUndecided(t *testing.T) {
	hidden, plain, told := 0.0, 0.0, 0.0
	for i := range uint64(30) {
		sc := faintScene(t, 4500, 2000+i)
		r := mustFit(t, sc, sc.draw(t), Options{})
		if r.Model != ModelThermal {
			continue
		}
		v := r.Numbers.T
		hidden++
		plain += math.Pow((v.V-sc.T)/v.Err, 2)
		told += math.Pow(far(v, sc.T), 2)
	}
	if hidden < 8 || !(math.Sqrt(plain/hidden) > 1.4) {
		t.Errorf("%g thermal clouds with pulls of T of rms %.2f: the scene tests nothing", hidden, math.Sqrt(plain/hidden))
	}
	within(t, "rms pull", math.Sqrt(told/hidden), 1, 0.4)
	wide := 0
	for i := range uint64(10) {
		sc := faintScene(t, 0, 2000+i)
		if r := mustFit(t, sc, sc.draw(t), Options{}); !math.IsNaN(r.Numbers.Atoms.High) {
			wide++
		}
	}
	if wide > 1 {
		t.Errorf("%d of 10 clouds without a condensate have an interval of N", wide)
	}
}
