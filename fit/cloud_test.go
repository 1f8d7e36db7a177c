package fit

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"fallshadow/imageio/synth"
	"fallshadow/model"
)

// scene is a shot drawn by the renderer, which shares no profile and no law with the fit.
type scene struct {
	lab          *Lab
	flight       float64
	T            float64 // K
	thermal      float64 // atoms
	alpha        float64
	condensate   float64 // atoms
	x, y         float64
	w, h         int
	electrons    float64
	read         float64
	second       bool // a small second cloud elsewhere
	hot          int
	seed         uint64
	fringes      []synth.Fringe
	trueLab      *Lab // where the laboratory that drew the shot is not the one that fits it
	powerNoise   float64
	withoutNoise bool
	// thermalColumn takes the place of the ideal thermal part: σ0 n by the offset in px
	thermalColumn func(x, y float64) float64
}

func (sc *scene) column(t testing.TB) synth.Cloud {
	t.Helper()
	lab := sc.lab
	if sc.trueLab != nil {
		lab = sc.trueLab
	}
	sp, px := lab.Species, lab.Optics.Pixel
	bt, err := model.ExpandThermal(lab.Trap, sc.flight, lab.Release)
	if err != nil {
		t.Fatal(err)
	}
	thermal := lab.View.Project(model.ThermalVariances(sc.T, sp.Mass, lab.Trap, bt))
	var cond func(x, y float64) float64
	switch {
	case sc.condensate > 0 && sp.ScatteringLength > 0:
		bc, err := model.ExpandCondensate(lab.Trap, sc.flight, lab.Release)
		if err != nil {
			t.Fatal(err)
		}
		mu, err := model.Mu(sc.condensate, sp.Mass, sp.ScatteringLength, lab.Trap)
		if err != nil {
			t.Fatal(err)
		}
		s := lab.View.Project(model.RadiiSquared(mu, sp.Mass, lab.Trap, bc))
		cond = func(x, y float64) float64 { return model.CondensateColumn(sc.condensate, s, x, y) }
	case sc.condensate > 0:
		s, err := gaussianShape(lab, sc.flight, sc.condensate)
		if err != nil {
			t.Fatal(err)
		}
		cond = func(x, y float64) float64 { return model.GaussianColumn(sc.condensate, s, x, y) }
	default:
		cond = func(_, _ float64) float64 { return 0 }
	}
	sigma := sp.Sigma0()
	return func(x, y float64) float64 {
		dx, dy := (x-sc.x)*px, (y-sc.y)*px
		d := sigma * cond(dx, dy)
		switch {
		case sc.thermalColumn != nil:
			d += sc.thermalColumn(x-sc.x, y-sc.y)
		case sc.thermal > 0:
			d += sigma * model.ThermalColumn(sc.thermal, sc.alpha, thermal, dx, dy)
		}
		if sc.second {
			ex, ey := x-0.15*float64(sc.w), y-0.85*float64(sc.h)
			d += 0.5 * math.Exp(-(ex*ex+ey*ey)/18)
		}
		return d
	}
}

func (sc *scene) draw(t testing.TB) *Picture {
	t.Helper()
	lab := sc.lab
	if sc.trueLab != nil {
		lab = sc.trueLab
	}
	o := lab.Optics
	s := synth.Scene{
		Width: sc.w, Height: sc.h, Cloud: sc.column(t), Blur: o.Blur / o.Pixel,
		Law: synth.Law{Alpha: o.Alpha, Detuning: o.Detuning, Saturation: o.Saturation, Stray: o.Stray},
		Probe: synth.Probe{
			Electrons: sc.electrons, X: 0.5 * float64(sc.w), Y: 0.45 * float64(sc.h), Waist: 1.6 * float64(sc.w),
			PowerNoise: sc.powerNoise, Fringes: sc.fringes,
		},
	}
	rng := rand.New(rand.NewPCG(sc.seed, 4))
	pic := &Picture{Width: sc.w, Height: sc.h, Noise: Noise{Read: sc.read, LightShot: 1, LightRead: sc.read * sc.read}}
	if sc.withoutNoise {
		e, err := s.Expect(rng)
		if err != nil {
			t.Fatal(err)
		}
		pic.Atoms, pic.Light = e.Atoms, e.Light
		for range pic.Atoms {
			pic.Good = append(pic.Good, true)
		}
		return pic
	}
	pic.Noise.Dark, pic.Noise.DarkIsShared = sc.read*sc.read, true
	sensor, err := synth.NewSensor(synth.Camera{ElectronsPerCount: 1, ReadNoise: sc.read, Offset: 100}, sc.w, sc.h)
	if err != nil {
		t.Fatal(err)
	}
	f, err := s.Draw(sensor, rng)
	if err != nil {
		t.Fatal(err)
	}
	for i := range f.Atoms {
		pic.Atoms = append(pic.Atoms, float64(f.Atoms[i])-float64(f.Dark[i]))
		pic.Light = append(pic.Light, float64(f.Light[i])-float64(f.Dark[i]))
		pic.Good = append(pic.Good, true)
	}
	for i := range sc.hot {
		o := (sc.h/4+3*i)*sc.w + sc.w/3 + 7*i
		pic.Atoms[o] = 0.1 * pic.Light[o]
	}
	return pic
}

// pancakeLab is a sodium machine of our own: flat trap, camera at an angle.
func pancakeLab(t testing.TB) *Lab {
	t.Helper()
	na, err := model.LookupSpecies("23Na")
	if err != nil {
		t.Fatal(err)
	}
	return &Lab{
		Species: na, Trap: model.TrapHz(38, 142, 95), View: model.View(-0.2, 0.25, 0.4),
		Optics: Optics{Pixel: 5e-6, Blur: 4e-6, Alpha: 1.7, Saturation: 6000},
	}
}

func (sc *scene) saturated() float64 {
	return model.ThermalNumber(sc.T, 0, sc.lab.Trap)
}

func standardScene(t testing.TB, T, n0 float64, seed uint64) *scene {
	sc := &scene{lab: pancakeLab(t), flight: 12e-3, T: T, condensate: n0, x: 77.3, y: 66.8, w: 152, h: 136, electrons: 1500, read: 7, seed: seed, powerNoise: 0.02}
	sc.thermal = sc.saturated()
	return sc
}

func mustFit(t testing.TB, sc *scene, pic *Picture, opt Options) *Result {
	t.Helper()
	r, err := Cloud(context.Background(), pic, sc.lab, sc.flight, opt, NewWorkspace())
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// TestExpectedPicture: with no noise at all, every number comes back; what is left is how the
// renderer integrates over pixels (3x3 cells) and how the fit blurs (on the pixel grid).
func TestExpectedPicture(t *testing.T) {
	sc := standardScene(t, 260e-9, 9e4, 1)
	sc.withoutNoise, sc.powerNoise = true, 0
	r := mustFit(t, sc, sc.draw(t), Options{})
	if r.Model != ModelBimodal || r.Form != "bose+tf" {
		t.Fatalf("model %s, form %s", r.Model, r.Form)
	}
	n := r.Numbers
	mu, _ := model.Mu(sc.condensate, sc.lab.Species.Mass, sc.lab.Species.ScatteringLength, sc.lab.Trap)
	for _, c := range []struct {
		name           string
		got, want, tol float64
	}{
		{"N", n.Atoms.V, sc.thermal + sc.condensate, 1e-3},
		{"N0", n.Condensate.V, sc.condensate, 2e-3},
		{"T", n.T.V, sc.T, 2e-3},
		{"mu", n.Mu.V, mu, 2e-3},
		{"fraction", n.Fraction.V, sc.condensate / (sc.thermal + sc.condensate), 2e-3},
		{"N_th over saturated", r.Checks.ThermalOverSaturated, 1, 6e-3},
		{"mu over mu of N0", r.Checks.MuOverMuAtoms, 1, 3e-3},
	} {
		within(t, c.name, c.got/c.want, 1, c.tol)
	}
	within(t, "x", r.X, sc.x, 5e-3)
	within(t, "y", r.Y, sc.y, 5e-3)
	if len(r.Flags) != 1 || r.Flags[0] != FlagNoise { // chi2 is 0
		t.Errorf("flags %v", r.Flags)
	}
}

// TestPulls: values scatter about the truth as their errors say, over shots of four kinds.
// 12 shots give the rms of a pull to 20 %.
func TestPulls(t *testing.T) {
	for _, c := range []struct {
		name  string
		T, n0 float64
		alpha float64
		model string
	}{
		{"far above Tc", 420e-9, 0, 0.6, ModelThermal},
		{"fraction near one half", 240e-9, 1.1e5, 0, ModelBimodal},
		{"nearly pure", 90e-9, 1e5, 0, ModelBimodal},
	} {
		t.Run(c.name, func(t *testing.T) {
			const shots = 12
			sums := map[string]float64{}
			for i := range uint64(shots) {
				sc := standardScene(t, c.T, c.n0, 10+i)
				sc.alpha = c.alpha
				if c.alpha > 0 {
					sc.thermal = model.ThermalNumber(c.T, c.alpha, sc.lab.Trap)
				}
				r := mustFit(t, sc, sc.draw(t), Options{})
				if r.Model != c.model {
					t.Errorf("shot %d: model %s, want %s", i, r.Model, c.model)
					continue
				}
				n := r.Numbers
				pull := func(name string, v, err, truth float64) {
					z := (v - truth) / err
					sums[name] += z * z / shots
				}
				pull("N", n.Atoms.V, n.Atoms.Err, sc.thermal+sc.condensate)
				pull("T", n.T.V, n.T.Err, sc.T)
				if c.n0 > 0 {
					mu, _ := model.Mu(c.n0, sc.lab.Species.Mass, sc.lab.Species.ScatteringLength, sc.lab.Trap)
					pull("N0", n.Condensate.V, n.Condensate.Err, c.n0)
					pull("mu", n.Mu.V, n.Mu.Err, mu)
				}
			}
			for _, name := range []string{"N", "T", "N0", "mu"} {
				if v, ok := sums[name]; ok {
					t.Logf("%s: rms pull %.2f", name, math.Sqrt(v))
					within(t, "rms pull of "+name, math.Sqrt(v), 1, 0.55)
				}
			}
		})
	}
}

// TestEndedFugacity: a fugacity at an end of its range leaves T less free than the picture does;
// the interval then says how far T may be off.
func TestEndedFugacity(t *testing.T) {
	const shots = 10
	ended, sum := 0, 0.0
	for i := range uint64(shots) {
		sc := standardScene(t, 420e-9, 0, 300+i)
		sc.alpha, sc.electrons = 0.15, 12
		sc.thermal = model.ThermalNumber(sc.T, sc.alpha, sc.lab.Trap)
		r := mustFit(t, sc, sc.draw(t), Options{})
		v := r.Numbers.T
		sum += math.Pow((v.V-sc.T)/v.Err, 2) / shots
		if z := r.Numbers.Fugacity.V; r.Model != ModelThermal || z < 0.99 && z > math.Exp(-0.9999*alphaMost) {
			continue
		}
		ended++
		if !(v.Low < v.V && v.V < v.High) {
			t.Errorf("shot %d: T is %.3g with the interval %.3g to %.3g", i, v.V, v.Low, v.High)
		}
		within(t, fmt.Sprintf("shot %d: error against half of the interval", i), v.Err/(0.5*(v.High-v.Low)), 1, 0.4)
	}
	if ended < 2 {
		t.Errorf("the fugacity ended in %d of %d shots: the scene tests nothing", ended, shots)
	}
	within(t, "rms pull of T", math.Sqrt(sum), 1, 0.5)
}

// TestFindsTheCloud: without help, from corner to corner, beside hot pixels and a second cloud.
func TestFindsTheCloud(t *testing.T) {
	for i, c := range []scene{
		{x: 40, y: 90, condensate: 5e4, T: 200e-9},
		{x: 118, y: 48, condensate: 2e5, T: 120e-9, hot: 2},
		{x: 90, y: 60, condensate: 3e4, T: 240e-9, second: true},
		{x: 80, y: 70, condensate: 4e3, T: 250e-9, hot: 2},
	} {
		sc := standardScene(t, c.T, c.condensate, uint64(100+i))
		sc.x, sc.y, sc.hot, sc.second = c.x, c.y, c.hot, c.second
		r := mustFit(t, sc, sc.draw(t), Options{})
		if r.Model != ModelBimodal {
			t.Errorf("scene %d: %s", i, r.Model)
			continue
		}
		tol := 0.05
		if c.second {
			tol = 0.15
		}
		within(t, fmt.Sprintf("scene %d: x", i), r.X, c.x, 1.5)
		within(t, fmt.Sprintf("scene %d: y", i), r.Y, c.y, 1.5)
		within(t, fmt.Sprintf("scene %d: N0", i), r.Numbers.Condensate.V/c.condensate, 1, 4*tol)
		within(t, fmt.Sprintf("scene %d: N", i), r.Numbers.Atoms.V/(sc.thermal+sc.condensate), 1, tol)
	}
}

// TestLostThermalPart: a faint thermal part that noise has made so wide that its number is lost in
// the light is tied to its number.
func TestLostThermalPart(t *testing.T) {
	sc := standardScene(t, 100e-9, 9e4, 905)
	sc.electrons, sc.read = 40, 6
	r := mustFit(t, sc, sc.draw(t), Options{})
	n := r.Numbers.Atoms
	if r.Form != "bose+tf,number" || !slices.Contains(r.Flags, FlagByNumber) || !(n.Err < 0.1*n.V) {
		t.Errorf("form %s, N %.4g ± %.2g, flags %v", r.Form, n.V, n.Err, r.Flags)
	}
	within(t, "N", n.V, sc.thermal+sc.condensate, 4*n.Err)
	within(t, "T", r.Numbers.T.V, sc.T, 4*r.Numbers.T.Err)
}

// TestEmptyPicture has no cloud and says how many atoms could hide.
func TestEmptyPicture(t *testing.T) {
	sc := standardScene(t, 200e-9, 0, 5)
	sc.thermal = 0
	r := mustFit(t, sc, sc.draw(t), Options{})
	if r.Model != ModelNone || !slices.Contains(r.Flags, FlagNoCloud) {
		t.Errorf("model %s, flags %v", r.Model, r.Flags)
	}
	if !(r.Numbers.Atoms.High > 0 && r.Numbers.Atoms.High < 3e4) {
		t.Errorf("upper limit %g", r.Numbers.Atoms.High)
	}
}

// TestLimits: a thermal cloud has an upper limit of N0, a pure condensate one of T above the
// truth and an interval of N0 that reaches down for the thermal atoms it may hide.
func TestLimits(t *testing.T) {
	sc := standardScene(t, 300e-9, 0, 8)
	sc.alpha = 0.3
	sc.thermal = model.ThermalNumber(sc.T, sc.alpha, sc.lab.Trap)
	r := mustFit(t, sc, sc.draw(t), Options{})
	if f := r.Numbers.Fraction.High; r.Model != ModelThermal || !(f > 0 && f < 0.02) {
		t.Errorf("%s with fraction below %g", r.Model, f)
	}
	for seed := range uint64(6) {
		sc = standardScene(t, 25e-9, 1e5, 9+seed)
		r = mustFit(t, sc, sc.draw(t), Options{})
		if r.Model != ModelCondensate || !(r.Numbers.T.High > sc.T && r.Numbers.T.High < 90e-9) {
			t.Errorf("%s with T below %g", r.Model, r.Numbers.T.High)
		}
		n := r.Numbers.Condensate
		if !(n.Low-n.Err < sc.condensate && sc.condensate < n.High+n.Err && n.Low < n.V-n.Err && n.Low > 0.9*n.V) {
			t.Errorf("N0 is %g, from %g to %g, not %g", n.V, n.Low, n.High, sc.condensate)
		}
	}
}

// TestAttractive fits the gaussian of variational width and flags it.
func TestAttractive(t *testing.T) {
	li, err := model.LookupSpecies("7Li")
	if err != nil {
		t.Fatal(err)
	}
	lab := &Lab{Species: li, Trap: model.TrapHz(150, 150, 130), Optics: Optics{Pixel: 2e-6, Blur: 2e-6, Alpha: 1, Saturation: math.Inf(1)}, View: model.View(0, 0, 0)}
	sc := &scene{lab: lab, flight: 4e-3, T: 60e-9, condensate: 1000, x: 60, y: 55, w: 120, h: 112, electrons: 2000, read: 5, seed: 3}
	sc.thermal = sc.saturated()
	r := mustFit(t, sc, sc.draw(t), Options{})
	if r.Model == ModelThermal || r.Model == ModelNone || !slices.Contains(r.Flags, FlagAttractive) {
		t.Fatalf("model %s, flags %v", r.Model, r.Flags)
	}
	within(t, "N0", r.Numbers.Condensate.V, sc.condensate, 4*r.Numbers.Condensate.Err)
	if !math.IsNaN(r.Numbers.Mu.V) {
		t.Errorf("mu from a radius that does not exist: %g", r.Numbers.Mu.V)
	}
	within(t, "part of the collapse number", r.Numbers.Collapse.V, sc.condensate/model.CriticalNumber(lab.Trap, li.Mass, li.ScatteringLength), 0.25)

	sc.T, sc.condensate = 220e-9, 0
	sc.alpha = 0.2
	sc.thermal = model.ThermalNumber(sc.T, sc.alpha, lab.Trap)
	r = mustFit(t, sc, sc.draw(t), Options{})
	if n := r.Numbers.Condensate; r.Model != ModelThermal || !(n.High > 1 && n.High < 0.1*sc.thermal) {
		t.Errorf("without a condensate: %s, N0 below %g", r.Model, n.High)
	}
}

// TestBadInput gets one sentence.
func TestBadInput(t *testing.T) {
	sc := standardScene(t, 200e-9, 5e4, 5)
	good := sc.draw(t)
	for _, c := range []struct {
		name string
		bend func(p *Picture, l *Lab)
		want string
	}{
		{"small", func(p *Picture, _ *Lab) { p.Width, p.Height = 4, 4 }, "the picture is 4 x 4 pixels: a fit needs at least 12 on each side"},
		{"short plane", func(p *Picture, _ *Lab) { p.Light = p.Light[1:] }, "the picture says 152 x 136 pixels but its planes have another size"},
		{"not a number", func(p *Picture, _ *Lab) { p.Atoms[155] = math.NaN() }, "pixel (3, 1) is not a finite number but counts as good"},
		{"masked", func(p *Picture, _ *Lab) { clear(p.Good) }, "only 0 of 20672 pixels are good"},
		{"dark", func(p *Picture, _ *Lab) { clear(p.Light) }, "the reference holds no light"},
		{"no scattering length", func(_ *Picture, l *Lab) { l.Species.ScatteringLength = math.NaN() }, "the scattering length of 23Na is not given"},
	} {
		p := *good
		p.Atoms, p.Light, p.Good = slices.Clone(p.Atoms), slices.Clone(p.Light), slices.Clone(p.Good)
		lab := *sc.lab
		c.bend(&p, &lab)
		_, err := Cloud(context.Background(), &p, &lab, sc.flight, Options{}, NewWorkspace())
		if err == nil || err.Error() != c.want {
			t.Errorf("%s: %v", c.name, err)
		}
	}
	ctx, stop := context.WithCancel(context.Background())
	stop()
	if _, err := Cloud(ctx, good, sc.lab, sc.flight, Options{}, NewWorkspace()); !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled: %v", err)
	}
}

// TestSameBits: a workspace that served other pictures changes nothing.
func TestSameBits(t *testing.T) {
	ws := NewWorkspace()
	var first *Result
	for i, seed := range []uint64{5, 6, 5} {
		sc := standardScene(t, 200e-9, 5e4, seed)
		if i == 1 {
			sc.w, sc.h, sc.x, sc.y = 180, 150, 90, 75
		}
		r, err := Cloud(context.Background(), sc.draw(t), sc.lab, sc.flight, Options{}, ws)
		if err != nil {
			t.Fatal(err)
		}
		if i == 0 {
			first = r
		} else if i == 2 && fmt.Sprint(*r) != fmt.Sprint(*first) {
			t.Errorf("the same picture gave\n%v\nand then\n%v", *first, *r)
		}
	}
}

// TestMeanField fits a semi-ideal cloud: the plain form reads T low by several errors, the form
// that knows what the condensate did to the thermal part does not. The cloud itself comes from
// package model, where it is held against atoms flown one by one.
func TestMeanField(t *testing.T) {
	lab := cigarLab(t)
	const T, n = 110e-9, 1.1e5
	sc := &scene{lab: lab, flight: 22e-3, T: T, x: 80, y: 76, w: 160, h: 152, electrons: 1500, read: 6, seed: 31, powerNoise: 0.01}
	mix, err := model.SolveSemiIdeal(n, T, lab.Species.Mass, lab.Species.ScatteringLength, lab.Trap)
	if err != nil {
		t.Fatal(err)
	}
	cloud, err := model.NewSemiIdealCloud(T, mix.Mu, lab.Species.Mass, lab.Trap, lab.View, sc.flight, lab.Release)
	if err != nil {
		t.Fatal(err)
	}
	sc.condensate, sc.thermal = mix.Condensate, mix.Thermal
	// The renderer samples often; a quarter of the picture, every other pixel, is enough here.
	const step = 2.0
	grid := map[[2]int]float64{}
	at := func(i, j int) float64 {
		k := [2]int{i, j}
		v, ok := grid[k]
		if !ok {
			v = lab.Species.Sigma0() * cloud.Column(float64(i)*step*lab.Optics.Pixel, float64(j)*step*lab.Optics.Pixel)
			grid[k] = v
		}
		return v
	}
	sc.thermalColumn = func(x, y float64) float64 {
		x, y = x/step, y/step
		i, j := int(math.Floor(x)), int(math.Floor(y))
		x, y = x-float64(i), y-float64(j)
		return (at(i, j)*(1-x)+at(i+1, j)*x)*(1-y) + (at(i, j+1)*(1-x)+at(i+1, j+1)*x)*y
	}
	pic := sc.draw(t)
	plain, fine := mustFit(t, sc, pic, Options{}), mustFit(t, sc, pic, Options{MeanField: true})
	if fine.Form != "semi-ideal+tf" {
		t.Errorf("form %s", fine.Form)
	}
	pull := func(r *Result) (temperature, n0 float64) {
		v := r.Numbers
		return (v.T.V - T) / v.T.Err, (v.Condensate.V - mix.Condensate) / v.Condensate.Err
	}
	pt, p0 := pull(plain)
	ft, f0 := pull(fine)
	t.Logf("plain: T %+.1f, N0 %+.1f errors; semi-ideal: T %+.1f, N0 %+.1f", pt, p0, ft, f0)
	if !(pt < -3) {
		t.Errorf("the plain form is off by %.1f errors only: the scene tests nothing", pt)
	}
	if slices.Contains(fine.Flags, FlagForm) || len(fine.Flags) > 0 {
		t.Errorf("flags of the semi-ideal form: %v", fine.Flags)
	}
	t.Logf("flags of the plain form: %v, N_th/N_sat %.2f", plain.Flags, plain.Checks.ThermalOverSaturated)
	within(t, "pull of T", ft, 0, 3)
	within(t, "pull of N0", f0, 0, 3)
	tied := mustFit(t, sc, pic, Options{MeanField: true, Fugacity: FugacityNumber}).Numbers
	within(t, "T from the semi-ideal number", tied.T.V, T, 0.02*T)
	if !(tied.T.Err < 0.7*fine.Numbers.T.Err) {
		t.Errorf("T from the number is known to %g, from the widths to %g", tied.T.Err, fine.Numbers.T.Err)
	}
}

// TestFugacity: a fugacity left free beside a condensate comes back near 1; a thermal number
// that follows from T makes T three times as sure as its widths alone, and true.
func TestFugacity(t *testing.T) {
	sc := standardScene(t, 240e-9, 9e4, 41)
	pic := sc.draw(t)
	model0, free, tied := mustFit(t, sc, pic, Options{}), mustFit(t, sc, pic, Options{Fugacity: FugacityFree}), mustFit(t, sc, pic, Options{Fugacity: FugacityNumber})
	if z := free.Numbers.Fugacity.V; !(z > 0.9) || free.Form != "bose-z+tf" {
		t.Errorf("fugacity %g, form %s", z, free.Form)
	}
	if tied.Form != "bose+tf,number" || !(tied.Numbers.T.Err < 0.6*model0.Numbers.T.Err) {
		t.Errorf("form %s, error of T %g against %g", tied.Form, tied.Numbers.T.Err, model0.Numbers.T.Err)
	}
	within(t, "T from the number", tied.Numbers.T.V, sc.T, 4*tied.Numbers.T.Err)
	within(t, "thermal over saturated", tied.Checks.ThermalOverSaturated, 1, 1e-3)
	sc = standardScene(t, 400e-9, 0, 42)
	sc.alpha = 0.5
	sc.thermal = model.ThermalNumber(sc.T, sc.alpha, sc.lab.Trap)
	pic = sc.draw(t)
	model0, tied = mustFit(t, sc, pic, Options{}), mustFit(t, sc, pic, Options{Fugacity: FugacityNumber})
	if !(tied.Numbers.T.Err < 0.6*model0.Numbers.T.Err) {
		t.Errorf("above the transition: error of T %g against %g", tied.Numbers.T.Err, model0.Numbers.T.Err)
	}
	within(t, "T from the number above the transition", tied.Numbers.T.V, sc.T, 4*tied.Numbers.T.Err)
}

// TestScaledErrors: noise stated at half of what it is makes χ² a pixel large; scaled errors grow
// by its root.
func TestScaledErrors(t *testing.T) {
	sc := standardScene(t, 240e-9, 9e4, 43)
	pic := sc.draw(t)
	pic.Noise.Read, pic.Noise.LightRead, pic.Noise.Dark = 0, 0, 0
	plain, scaled := mustFit(t, sc, pic, Options{}), mustFit(t, sc, pic, Options{ScaleErrors: true})
	within(t, "growth of the error", scaled.Numbers.Atoms.Err/plain.Numbers.Atoms.Err, math.Sqrt(plain.ChiPerDof), 1e-9)
	if !(plain.ChiPerDof > 1.02) {
		t.Errorf("chi2 a pixel is %g", plain.ChiPerDof)
	}
}

// TestNextToNothing: noise alone, and clouds that hardly stand out of it, are fitted whatever the
// first look makes of them, and next to no noise is taken for a cloud, no thermal cloud for a
// condensate.
func TestNextToNothing(t *testing.T) {
	clouds, condensates := 0, 0
	ws := NewWorkspace()
	for i := range 160 {
		sc := &scene{lab: cigarLab(t), flight: 22e-3, T: 50e-9, x: 66, y: 61, w: 128, h: 120, electrons: 1200, read: 6, seed: 500 + uint64(i), powerNoise: 0.02}
		if i%2 == 1 {
			sc.thermal = 700
		}
		r, err := Cloud(context.Background(), sc.draw(t), sc.lab, sc.flight, Options{}, ws)
		switch {
		case err != nil:
			t.Errorf("picture %d: %v", i, err)
		case sc.thermal == 0 && r.Model != ModelNone:
			clouds++
		case r.Model == ModelCondensate || r.Model == ModelBimodal:
			condensates++
		}
	}
	if clouds > 1 || condensates > 0 {
		t.Errorf("%d of 80 empty pictures with a cloud, %d of 80 thermal clouds with a condensate", clouds, condensates)
	}
}

// TestDensityImage: the density of a cloud is fitted with the goodness that its noise allows,
// whatever the workspace did before.
func TestDensityImage(t *testing.T) {
	sc := standardScene(t, 180e-9, 6e4, 4)
	density := sc.column(t)
	rng := rand.New(rand.NewPCG(3, 5))
	const sigma = 0.03
	pic := &Picture{Width: sc.w, Height: sc.h, DensitySigma: sigma}
	for o := range sc.w * sc.h {
		pic.Density = append(pic.Density, density(float64(o%sc.w), float64(o/sc.w))+sigma*rng.NormFloat64())
		pic.Good = append(pic.Good, true)
	}
	lab := *sc.lab
	lab.Optics.Blur = 0
	ws := NewWorkspace()
	var first *Result
	for i := range 2 {
		r, err := Cloud(context.Background(), pic, &lab, sc.flight, Options{}, ws)
		if err != nil {
			t.Fatal(err)
		}
		within(t, "chi2 a pixel", r.ChiPerDof, 1, 0.05)
		within(t, "chi2 of the cloud", r.ChiCloud, 1, 0.4)
		within(t, "N", r.Numbers.Atoms.V, sc.thermal+sc.condensate, 4*r.Numbers.Atoms.Err+0.005*r.Numbers.Atoms.V)
		if i == 0 {
			first = r
		} else if fmt.Sprint(*r) != fmt.Sprint(*first) {
			t.Errorf("the same picture gave\n%v\nand then\n%v", *first, *r)
		}
		other := standardScene(t, 240e-9, 3e4, 6)
		if _, err := Cloud(context.Background(), other.draw(t), other.lab, other.flight, Options{}, ws); err != nil {
			t.Fatal(err)
		}
	}
}

// TestFewCondensed: beside a thermal cloud the limit of N0 holds also for so few atoms that their
// size is that of the trap's lowest state, by the variational theory of package model.
func TestFewCondensed(t *testing.T) {
	over := 0
	const atoms, shots = 60, 40
	for i := range shots {
		lab := cigarLab(t)
		sc := &scene{lab: lab, flight: 22e-3, T: 110e-9, x: 80, y: 76, w: 160, h: 152, electrons: 1200, read: 6, seed: 700 + uint64(i), powerNoise: 0.01}
		shape, err := gaussianShape(lab, sc.flight, atoms)
		if err != nil {
			t.Fatal(err)
		}
		bt, err := model.ExpandThermal(lab.Trap, sc.flight, lab.Release)
		if err != nil {
			t.Fatal(err)
		}
		px, sigma := lab.Optics.Pixel, lab.Species.Sigma0()
		wide := lab.View.Project(model.ThermalVariances(sc.T, lab.Species.Mass, lab.Trap, bt))
		n := sc.saturated()
		sc.thermalColumn = func(x, y float64) float64 {
			return sigma * (model.ThermalColumn(n, 0, wide, x*px, y*px) + model.GaussianColumn(atoms, shape, x*px, y*px))
		}
		r := mustFit(t, sc, sc.draw(t), Options{})
		if r.Model == ModelThermal && r.Numbers.Condensate.High < atoms {
			over++
		}
	}
	if over > 5 {
		t.Errorf("the 95 %% limit is below the truth in %d of %d pictures", over, shots)
	}
	t.Logf("the 95 %% limit is below the truth in %d of %d pictures", over, shots)
}

// TestIdealFormStandsIn: after so short a flight that the semi-ideal cloud is not known, the ideal
// form is fitted and said to be.
func TestIdealFormStandsIn(t *testing.T) {
	lab := cigarLab(t)
	lab.Trap, lab.Optics.Pixel, lab.Optics.Blur = model.TrapHz(4, 12, 9), 2e-6, 1e-6
	sc := &scene{lab: lab, flight: 1e-3, T: 8e-9, condensate: 4000, x: 80, y: 76, w: 160, h: 152, electrons: 1200, read: 6, seed: 33, powerNoise: 0.01}
	sc.thermal = sc.saturated()
	r := mustFit(t, sc, sc.draw(t), Options{MeanField: true})
	if r.Model != ModelBimodal || r.Form != "bose+tf" || !slices.Contains(r.Flags, FlagPlain) {
		t.Errorf("%s %s %v", r.Model, r.Form, r.Flags)
	}
	within(t, "T", r.Numbers.T.V, sc.T, 5*r.Numbers.T.Err)
}
