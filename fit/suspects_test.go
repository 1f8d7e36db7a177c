package fit

import (
	"math"
	"slices"
	"testing"

	"fallshadow/model"
)

// cigarLab is a machine of our own on which the slips of laboratories are tried.
func cigarLab(t testing.TB) *Lab {
	t.Helper()
	rb, err := model.LookupSpecies("87Rb")
	if err != nil {
		t.Fatal(err)
	}
	return &Lab{
		Species: rb, Trap: model.TrapHz(24, 130, 112), View: model.View(0.1, 0, 0),
		Optics: Optics{Pixel: 4e-6, Blur: 3e-6, Alpha: 2, Saturation: 9000},
	}
}

// TestSlipsAreNamed fits one good picture with one wrong setting after another; each raises a
// flag whose sentence names the setting.
func TestSlipsAreNamed(t *testing.T) {
	right := cigarLab(t)
	sc := &scene{lab: right, flight: 22e-3, T: 100e-9, condensate: 3.5e4, x: 80, y: 76, w: 160, h: 152, electrons: 1200, read: 6, seed: 21, powerNoise: 0.01}
	sc.thermal = sc.saturated()
	pic := sc.draw(t)
	for _, c := range []struct {
		name string
		bend func(l *Lab, flight *float64)
		want string
	}{
		{"nothing wrong", func(*Lab, *float64) {}, ""},
		{"rad/s entered as Hz", func(l *Lab, _ *float64) {
			for i := range l.Trap.Omega {
				l.Trap.Omega[i] *= 2 * math.Pi
			}
		}, FlagFrequencyUnit},
		{"axes 1 and 2 exchanged", func(l *Lab, _ *float64) {
			w := &l.Trap.Omega
			w[0], w[1] = w[1], w[0]
		}, FlagAxes},
		{"line of sight halved", func(l *Lab, _ *float64) { l.Trap.Omega[2] /= 2 }, FlagSight},
		{"axis 2 a fifth low", func(l *Lab, _ *float64) { l.Trap.Omega[1] *= 0.8 }, FlagAxis2},
		{"flight 10 % long", func(_ *Lab, f *float64) { *f *= 1.1 }, FlagFlight},
		{"binning not told", func(l *Lab, _ *float64) { l.Optics.Pixel /= 2 }, FlagPixel},
		{"alpha 1 for 2", func(l *Lab, _ *float64) { l.Optics.Alpha = 1 }, FlagNumber},
	} {
		t.Run(c.name, func(t *testing.T) {
			lab, wrong := *right, *sc
			c.bend(&lab, &wrong.flight)
			wrong.lab = &lab
			r := mustFit(t, &wrong, pic, Options{})
			t.Logf("mu1/mu2 %.2f, mu(R)/mu(N0) %.2f, N_th/N_sat %.2f: %v", r.Checks.MuRatio, r.Checks.MuOverMuAtoms, r.Checks.ThermalOverSaturated, r.Flags)
			if c.want == "" {
				if len(r.Flags) > 0 {
					t.Errorf("flags %v", r.Flags)
				}
				return
			}
			if !slices.Contains(r.Flags, c.want) {
				t.Errorf("flags %v do not name %s", r.Flags, c.want)
			}
		})
	}
}

// TestThermalContradiction: a thermal cloud holds what its temperature and fugacity say, unless the
// pixel is wrong.
func TestThermalContradiction(t *testing.T) {
	right := cigarLab(t)
	sc := &scene{lab: right, flight: 22e-3, T: 120e-9, alpha: 0.05, x: 80, y: 76, w: 160, h: 152, electrons: 1200, read: 6, seed: 22, powerNoise: 0.01}
	sc.thermal = model.ThermalNumber(sc.T, sc.alpha, right.Trap)
	pic := sc.draw(t)
	if r := mustFit(t, sc, pic, Options{}); len(r.Flags) > 0 {
		t.Errorf("nothing is wrong: %v", r.Flags)
	}
	lab, wrong := *right, *sc
	lab.Optics.Pixel *= 0.7
	wrong.lab = &lab
	if r := mustFit(t, &wrong, pic, Options{}); !slices.Contains(r.Flags, FlagRatios) {
		t.Errorf("a pixel three tenths small: %v", r.Flags)
	}
}

// TestFlagTable: every flag has a sentence, no name twice.
func TestFlagTable(t *testing.T) {
	seen := map[string]bool{}
	for _, f := range Flags {
		if f.Name == "" || len(f.Sentence) < 20 || seen[f.Name] {
			t.Errorf("flag %q: %q", f.Name, f.Sentence)
		}
		seen[f.Name] = true
	}
}

// TestOtherFormIsSuspected: an ideal cloud fitted as a semi-ideal one accuses the form at most, and no
// setting.
func TestOtherFormIsSuspected(t *testing.T) {
	lab := cigarLab(t)
	for i, n0 := range []float64{2e4, 5e4, 1e5} {
		sc := &scene{lab: lab, flight: 22e-3, T: 100e-9, condensate: n0, x: 80, y: 76, w: 160, h: 152, electrons: 3000, read: 6, seed: 41 + uint64(i), powerNoise: 0.01}
		sc.thermal = sc.saturated()
		r := mustFit(t, sc, sc.draw(t), Options{MeanField: true})
		for _, f := range r.Flags {
			switch f {
			case FlagForm, FlagDense, FlagMisfit:
			default:
				t.Errorf("N0 %g: %v", n0, r.Flags)
			}
		}
	}
}
