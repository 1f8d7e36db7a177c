package predict

import (
	"context"
	"encoding/csv"
	"errors"
	"math"
	"os"
	"strconv"
	"testing"

	"fallshadow/fit/bound"
	"fallshadow/model"
)

// within passes only if got is within tol of want, relative to want; NaN fails.
func within(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol*math.Abs(want)) {
		t.Errorf("%s: got %.9g, want %.9g within %.1g", what, got, want, tol)
	}
}

// table reads a reference table as numbers by column; what is no number is NaN.
func table(t *testing.T, name string) []map[string]float64 {
	t.Helper()
	f, err := os.Open("../../testdata/reference/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	lines, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows []map[string]float64
	for _, l := range lines[1:] {
		row := map[string]float64{}
		for i, c := range lines[0] {
			v, err := strconv.ParseFloat(l[i], 64)
			if err != nil {
				v = math.NaN()
			}
			row[c] = v
		}
		rows = append(rows, row)
	}
	return rows
}

// machine is that of evap_truth.csv: 87Rb in 20, 120, 120 Hz seen under 4 degrees.
func machine(t *testing.T) bound.Experiment {
	t.Helper()
	rb, err := model.LookupSpecies("87Rb")
	if err != nil {
		t.Fatal(err)
	}
	return bound.Experiment{
		Species: rb, Trap: model.TrapHz(20, 120, 120), View: model.View(4*math.Pi/180, 0, 0),
		Optics: bound.Optics{Pixel: 6.45e-6 / 2, Blur: 3e-6, Alpha: 2, Saturation: 9000},
		Width:  320, Height: 320, X: 159.5, Y: 159.5,
		Light: func(_, _ float64) float64 { return 1360 },
		Noise: bound.Noise{Read: 6, LightShot: 1, LightRead: 36},
	}
}

// TestAgainstGenerator compares with the truth of a night that another program drew
// (evap_truth.csv) and with its table of bounds (evap_bound.csv), which has the light of a
// real beam. That program condenses by 1 − t³: only shots without a condensate compare.
func TestAgainstGenerator(t *testing.T) {
	bounds := table(t, "evap_bound.csv")
	for i, row := range table(t, "evap_truth.csv") {
		p := &Plan{Experiment: machine(t), Atoms: row["N"], T: row["T_nK"] * 1e-9}
		g, err := p.Gas()
		if err != nil {
			t.Fatal(err)
		}
		within(t, "Tc0", g.Tc0, row["Tc0_nK"]*1e-9, 1e-9)
		within(t, "t", g.Reduced, row["t_red"], 1e-9)
		within(t, "ideal fraction", g.IdealFraction, row["f0"], 1e-9)
		if row["N0"] > 0 {
			if !(g.Fraction() < row["f0"]) {
				t.Errorf("the semi-ideal fraction %g is not below %g", g.Fraction(), row["f0"])
			}
			continue
		}
		within(t, "z", math.Exp(-g.Alpha), row["z"], 1e-9)
		s, err := p.See(&g, row["tof_ms"]*1e-3)
		if err != nil {
			t.Fatal(err)
		}
		within(t, "width 1", s.Width[0], row["s1_um"]*1e-6, 1e-9)
		within(t, "width 2", s.Width[1], row["s2_um"]*1e-6, 1e-9)
		if !math.IsNaN(s.Radius[0]) {
			t.Errorf("a radius of %g without a condensate", s.Radius[0])
		}
		if i%2 == 0 {
			if err := p.Measure(context.Background(), &g, &s); err != nil {
				t.Fatal(err)
			}
			within(t, "error of T", s.Errors.T, bounds[i]["sT_nK"]*1e-9, 0.1)
			within(t, "error of N", s.Errors.Atoms, bounds[i]["sN"], 0.1)
		}
	}
}

// TestSee holds the picture of a condensed cloud against the formulas one by one: columns
// at the centre add up, and the law of a strong probe shows less.
func TestSee(t *testing.T) {
	p := &Plan{Experiment: machine(t), Atoms: 1e5, T: 80e-9}
	g, err := p.Gas()
	if err != nil {
		t.Fatal(err)
	}
	s, err := p.See(&g, 0.02)
	if err != nil {
		t.Fatal(err)
	}
	b, err := model.ExpandCondensate(p.Experiment.Trap, 0.02, model.Release{})
	if err != nil {
		t.Fatal(err)
	}
	within(t, "radius 1", s.Radius[0], math.Sqrt(2*g.Mu/p.Experiment.Species.Mass)/(2*math.Pi*20)*b[0], 1e-9)
	within(t, "radius 2", s.Radius[1], math.Sqrt(2*g.Mu/p.Experiment.Species.Mass)/(2*math.Pi*120)*b[1], 1e-9)
	// A Thomas-Fermi column is 5N0/(2 pi R1R2) at its centre, a Bose one of z = 1 has
	// N g2/(2 pi s1s2 g3), with zeta(2)/zeta(3) = 1.3684327776.
	depth := 5*g.Condensate/(2*math.Pi*s.Radius[0]*s.Radius[1]) + 1.3684327776*g.Thermal/(2*math.Pi*s.Width[0]*s.Width[1])
	within(t, "depth", s.Depth, depth*p.Experiment.Species.Sigma0()/2, 1e-8)
	within(t, "I/Isat", p.Saturation(), 1360./9000, 1e-12)
	// u of alpha u + s(1 − e^−u) = sigma0 n, alpha = 2
	within(t, "as counts show it", 2*s.Shown+p.Saturation()*-math.Expm1(-s.Shown), 2*s.Depth, 1e-9)

	first, err := p.First(&g, 0.002, 0.05, func(s *Sight) bool { return s.Depth < 3 })
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		flight float64
		thin   bool
	}{{first * 1.002, true}, {first * 0.998, false}} {
		if at, err := p.See(&g, c.flight); err != nil || at.Depth < 3 != c.thin {
			t.Errorf("depth %g after %g s, %v", at.Depth, c.flight, err)
		}
	}
	if never, err := p.First(&g, 0.002, 0.003, func(s *Sight) bool { return s.Depth < 3 }); err != nil || !math.IsNaN(never) {
		t.Errorf("thin after %g s, %v", never, err)
	}
	if !p.Inside(&s) {
		t.Error("the cloud is not inside")
	}
	p.Experiment.X = 30
	if p.Inside(&s) {
		t.Error("a cloud at the border is inside")
	}
}

// TestAttractive: 7Li holds 1256 atoms in the trap of W18 (worked_examples.csv), and more
// do not make a picture.
func TestAttractive(t *testing.T) {
	li, err := model.LookupSpecies("7Li")
	if err != nil {
		t.Fatal(err)
	}
	e := machine(t)
	e.Species, e.Trap = li, model.TrapHz(150.6, 152.6, 131.5)
	p := &Plan{Experiment: e, Atoms: 1200, T: 5e-9}
	g, err := p.Gas()
	if err != nil {
		t.Fatal(err)
	}
	within(t, "share of the collapse", g.Collapse, g.Condensate/1256.4, 5e-3)
	if s, err := p.See(&g, 0.01); err != nil || !(s.Radius[0] > 0) || g.Law != "ideal" || !math.IsNaN(g.Mu) {
		t.Errorf("%+v, %v", s, err)
	}
	p.Atoms = 5000
	if g, err = p.Gas(); err != nil || !(g.Collapse > 1) {
		t.Errorf("%+v, %v", g, err)
	}
	if _, err := p.See(&g, 0.01); !errors.Is(err, model.ErrCollapse) {
		t.Errorf("a collapsed condensate is seen: %v", err)
	}
}

// TestPush: 400 photons of 7.54 kHz each move 87Rb by half its width (D2 line, 6.0666 MHz).
func TestPush(t *testing.T) {
	p := &Plan{Experiment: machine(t), Atoms: 1e5, T: 80e-9}
	push := p.Push(40e-6)
	within(t, "Doppler shift", push.Doppler, push.Photons*7.54e3/6.0666e6, 2e-3)
	s := 1360. / 9000
	within(t, "photons", push.Photons, 40e-6*math.Pi*6.0666e6*s/(2+s), 1e-3)
}

func TestNoPlan(t *testing.T) {
	for _, p := range []Plan{{Experiment: machine(t), T: 1e-7}, {Experiment: machine(t), Atoms: 1e5}, {Experiment: machine(t), Atoms: math.NaN(), T: 1e-7}} {
		if _, err := p.Gas(); !errors.Is(err, ErrPlan) {
			t.Errorf("%g atoms at %g K: %v", p.Atoms, p.T, err)
		}
	}
}
