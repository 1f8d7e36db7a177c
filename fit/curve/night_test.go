package curve

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"

	"fallshadow/model"
)

func rubidium(t testing.TB) Gas {
	t.Helper()
	rb, err := model.LookupSpecies("87Rb")
	if err != nil {
		t.Fatal(err)
	}
	return Gas{Mass: rb.Mass, ScatteringLength: rb.ScatteringLength, Trap: model.TrapHz(20, 120, 120)}
}

// scatter are the relative errors of the drawn nights, their correlations those that fits
// of absorption pictures have: a wider thermal part has more atoms.
var (
	scatter     = [numMeasured]float64{0.004, 0.0025, 0.012, 0.002}
	correlation = [numMeasured][numMeasured]float64{{1, -0.1, 0.6, 0.4}, {-0.1, 1, -0.1, 0.3}, {0.6, -0.1, 1, 0.25}, {0.4, 0.3, 0.25, 1}}
)

// draw makes a night of n atoms at the given t, whose fractions follow a law, with errors.
func draw(t testing.TB, g Gas, th *Theory, law string, reduced []float64, r *rand.Rand) *Night {
	t.Helper()
	l, ok := Find(law)
	if !ok {
		t.Fatalf("no law %s", law)
	}
	var c mat.Cholesky
	s := mat.NewSymDense(numMeasured, nil)
	for i := range numMeasured {
		for j := range i + 1 {
			s.SetSym(i, j, correlation[i][j])
		}
	}
	if !c.Factorize(s) {
		t.Fatal("correlations are not positive definite")
	}
	var lower mat.TriDense
	c.LTo(&lower)
	night := &Night{Gas: g}
	for k, x := range reduced {
		n := 1e5 * (1 + 0.3*math.Sin(float64(k)))
		f := th.Fraction(l, x, n)
		truth := Vector{(1 - f) * n, f * n, x * model.CriticalTemperature(n, g.Trap), g.scales().mu(f * n)}
		p := Point{Name: "drawn", Vector: truth}
		var z [numMeasured]float64
		for i := range z {
			z[i] = r.NormFloat64()
		}
		for i := range numMeasured {
			for j := range i + 1 {
				p.Vector[i] += lower.At(i, j) * z[j] * scatter[i] * truth[i]
			}
			for j := range numMeasured {
				p.Cov[i][j] = correlation[i][j] * scatter[i] * scatter[j] * truth[i] * truth[j]
			}
		}
		night.Points = append(night.Points, p)
	}
	return night
}

// scan is a series of t from 0.95 downwards.
func scan(count int) []float64 {
	list := make([]float64, count)
	for i := range list {
		list[i] = 0.95 - 0.55*float64(i)/float64(count-1)
	}
	return list
}

// pulls collects (estimate − truth)/error and judges their mean and width.
type pulls struct{ sum, squares, count float64 }

func (p *pulls) add(e Estimate, truth float64) {
	z := (e.V - truth) / e.Err
	p.sum, p.squares, p.count = p.sum+z, p.squares+z*z, p.count+1
}

// judge wants a mean within 4 of its errors and a mean square between 0.65 and 1.35.
func (p *pulls) judge(t *testing.T, what string) {
	t.Helper()
	within(t, what+": mean pull", p.sum/p.count, 0, 4/math.Sqrt(p.count))
	within(t, what+": mean square of the pulls", p.squares/p.count, 1, 0.35)
}

// TestNightAtTheTransition: clouds within the error of T of the end of their law, half of
// them measured above it, are as near to it as any.
func TestNightAtTheTransition(t *testing.T) {
	ctx, g := context.Background(), rubidium(t)
	th := NewTheory(g, 6e4, 1.5e5)
	reduced := make([]float64, 300)
	for i := range reduced {
		reduced[i] = 0.94 + 0.059*float64(i)/300
	}
	for law, share := range map[string]float64{Ideal: 0, SemiIdeal: 1} {
		n := draw(t, g, th, law, reduced, rand.New(rand.NewPCG(7, 5)))
		list, err := n.Compare(ctx, th)
		if err != nil {
			t.Fatal(err)
		}
		if best := list[Best(list)].Law.Name; best != law {
			t.Errorf("%s: the best law is %s", law, best)
		}
		for _, c := range list {
			if c.Law.Name == law {
				within(t, law+": chi2 a point", c.PerDof(), 1, 4*math.Sqrt(2./300))
			}
			if c.Law.Name == SemiIdeal {
				within(t, law+": share", c.Amplitude.V, share, 4*c.Amplitude.Err)
				within(t, law+": error of the share", c.Amplitude.Err, 0, 0.05)
			}
		}
		tr, err := n.Locate(ctx, th)
		if err != nil {
			t.Fatal(err)
		}
		for _, o := range tr.Onsets {
			if o.Law.Name == law {
				within(t, law+": onset", o.Ratio.V, 1, 4*o.Ratio.Err)
				within(t, law+": error of the onset", o.Ratio.Err, scatter[T]/math.Sqrt(300), scatter[T]/math.Sqrt(300))
			}
		}
	}
}

// TestDrawnNights fits nights whose law, transition and number factor are known.
func TestDrawnNights(t *testing.T) {
	ctx, g := context.Background(), rubidium(t)
	th := NewTheory(g, 6e4, 1.5e5)
	for _, law := range []string{Ideal, SemiIdeal} {
		var ratio, excess, amplitude, slope, factor pulls
		chi2, points, best := 0.0, 0, 0
		const nights = 60
		for seed := range uint64(nights) {
			n := draw(t, g, th, law, scan(14), rand.New(rand.NewPCG(seed, 5)))
			list, err := n.Compare(ctx, th)
			if err != nil {
				t.Fatal(err)
			}
			for _, c := range list {
				if c.Law.Name == law {
					chi2, points = chi2+c.Chi2, points+c.Points
				}
				if c.Law.Name == SemiIdeal {
					amplitude.add(c.Amplitude, map[string]float64{Ideal: 0, SemiIdeal: 1}[law])
				}
			}
			if list[Best(list)].Law.Name == law {
				best++
			}
			tr, err := n.Locate(ctx, th)
			if err != nil {
				t.Fatal(err)
			}
			ratio.add(tr.Saturation.Ratio, 1)
			excess.add(tr.Saturation.Excess, map[string]float64{Ideal: 0, SemiIdeal: 1}[law])
			m, err := n.CheckMeanField(ctx)
			if err != nil {
				t.Fatal(err)
			}
			slope.add(m.Slope, 0.4)
			f, err := n.FindFactor(ctx)
			if err != nil {
				t.Fatal(err)
			}
			factor.add(f.of(law, Alpha).Factor, 1)
		}
		within(t, law+": chi2 a point", chi2/float64(points), 1, 0.15)
		if best != nights {
			t.Errorf("%s: named in %d of %d nights", law, best, nights)
		}
		ratio.judge(t, law+": Tc/Tc0")
		excess.judge(t, law+": excess")
		amplitude.judge(t, law+": share of the semi-ideal law")
		slope.judge(t, law+": exponent of mu")
		factor.judge(t, law+": factor of alpha")
	}
}

// of returns the hypothesis of a law and a setting.
func (f Factors) of(law, setting string) Factor {
	for _, h := range f.List {
		if h.Law == law && h.Setting == setting {
			return h
		}
	}
	return Factor{}
}

// TestFindFactor spoils a night by one setting and asks which.
func TestFindFactor(t *testing.T) {
	ctx, g := context.Background(), rubidium(t)
	th := NewTheory(g, 6e4, 1.5e5)
	for _, c := range []struct {
		law, setting string
		factor       float64 // of the right setting over the one used
	}{{Ideal, Alpha, 1.1}, {Ideal, Alpha, 0.9}, {Ideal, Magnification, 1.05}, {Ideal, Magnification, 0.95},
		{SemiIdeal, Alpha, 1.1}, {SemiIdeal, Magnification, 0.95}, {Ideal, ScatteringLength, 1.1}, {SemiIdeal, ScatteringLength, 1.1}} {
		right, names := pulls{}, 0
		const nights = 25
		for seed := range uint64(nights) {
			n := draw(t, g, th, c.law, scan(40), rand.New(rand.NewPCG(seed, uint64(100*c.factor))))
			for i := range n.Points {
				spoil(&n.Points[i], c.setting, 1/c.factor)
			}
			if c.setting == ScatteringLength {
				n.Gas.ScatteringLength /= c.factor
			}
			f, err := n.FindFactor(ctx)
			if err != nil {
				t.Fatal(err)
			}
			if f.List[0].Setting == c.setting && f.List[0].Law == c.law {
				names++
			}
			right.add(f.of(c.law, c.setting).Factor, c.factor)
		}
		if names < nights-2 {
			t.Errorf("%s with %s wrong by %g: named in %d of %d nights", c.law, c.setting, c.factor, names, nights)
		}
		right.judge(t, c.law+" "+c.setting)
	}
}

// spoil gives a point the numbers that a wrong setting would show.
func spoil(p *Point, setting string, factor float64) {
	for i := range numMeasured {
		k := math.Pow(factor, exponents[setting][i])
		p.Vector[i] *= k
		for j := range numMeasured {
			p.Cov[i][j] *= k
			p.Cov[j][i] *= k
		}
	}
}

func TestFactorNeedsShots(t *testing.T) {
	n := draw(t, rubidium(t), NewTheory(rubidium(t), 6e4, 1.5e5), Ideal, []float64{0.5, 0.6}, rand.New(rand.NewPCG(1, 1)))
	if _, err := n.FindFactor(context.Background()); !errors.Is(err, ErrNoFactor) {
		t.Errorf("two shots give %v", err)
	}
}

// TestCalibrationErrors: alpha moves all atom numbers together, so that s and with it
// (Tc/Tc0)^-3 goes with alpha; a calibration of unknown uncertainty leaves no error, but
// only where it moves the number.
func TestCalibrationErrors(t *testing.T) {
	ctx, g := context.Background(), rubidium(t)
	th := NewTheory(g, 6e4, 1.5e5)
	n := draw(t, g, th, Ideal, scan(20), rand.New(rand.NewPCG(2, 2)))
	const relative = 0.03
	n.Calibrations = []Calibration{{Name: Alpha, Known: true, Gas: g, Step: math.Log1p(relative)}}
	for i := range n.Points {
		p := &n.Points[i]
		p.Shifts = []Vector{{relative * p.Vector[Thermal], relative * p.Vector[Condensate], 0, 0}}
	}
	locate := func() Saturation {
		tr, err := n.Locate(ctx, th)
		if err != nil {
			t.Fatal(err)
		}
		return *tr.Saturation
	}
	within(t, "calibration error of Tc/Tc0 by alpha", locate().Ratio.Cal, relative/3, 0.1*relative/3)

	f, err := n.FindFactor(ctx)
	if err != nil {
		t.Fatal(err)
	}
	within(t, "alpha in the error of its own factor", f.of(Ideal, Alpha).Factor.Cal, 0, 0)
	within(t, "alpha in the error of a magnification", f.of(Ideal, Magnification).Factor.Cal, relative/3.5, relative/10)

	n.Calibrations[0].Known = false
	if cal := locate().Ratio.Cal; !math.IsNaN(cal) {
		t.Errorf("an unknown alpha gives the calibration error %g", cal)
	}
	for i := range n.Points {
		n.Points[i].Shifts[0] = Vector{}
	}
	within(t, "error by an unknown calibration that moves nothing", locate().Ratio.Cal, 0, 0)
}

// TestCalibrationBand: with alpha up by d, t goes down by d/3.
func TestCalibrationBand(t *testing.T) {
	g := rubidium(t)
	th := NewTheory(g, 6e4, 1.5e5)
	n := draw(t, g, th, Ideal, scan(20), rand.New(rand.NewPCG(2, 2)))
	const d = 0.03
	n.Calibrations = []Calibration{{Name: Alpha, Known: true, Gas: g}, {Name: "axis1_hz", Gas: g}}
	for i := range n.Points {
		p := &n.Points[i]
		p.Shifts = []Vector{{d * p.Vector[Thermal], d * p.Vector[Condensate], 0, 0}, {1, 0, 0, 0}}
	}
	ideal, _ := Find(Ideal)
	b := n.CalibrationBand(th, ideal, 1e5, []float64{0.7, 0.995, 1.2})
	within(t, "upper end", b.High[0], 1-math.Pow(0.7*math.Pow(1+d, -1./3), 3), 1e-6)
	within(t, "lower end", b.Low[0], 1-math.Pow(0.7*math.Pow(1+d, 1./3), 3), 1e-6)
	within(t, "lower end near Tc", b.Low[1], 0, 1e-9)
	within(t, "upper end above Tc", b.High[2], 0, 1e-9)

	astray := n.Points[0]
	astray.Vector[T] *= 0.7 / g.Reduced(astray.Vector[T], astray.Atoms())
	astray.Cov[T][T] = math.Pow(0.4*astray.Vector[T], 2)
	astray.Shifts = []Vector{{0, 0, 0.4 * astray.Vector[T], 0}, {}}
	n.Points = append(n.Points, astray)
	within(t, "upper end beside a T that nobody knows", n.CalibrationBand(th, ideal, 1e5, []float64{0.7}).High[0], b.High[0], 1e-9)
}

// TestRelease gives flights whose radii are those of μ 21 % above that of N0.
func TestRelease(t *testing.T) {
	g := rubidium(t)
	var n Night
	n.Gas = g
	for i := range 12 {
		n0 := 5e4 * (1 + 0.05*float64(i%5))
		p := Point{Flight: 0.012 + 0.004*float64(i%4), Vector: Vector{2e4, n0, 80e-9, 1.21 * g.scales().mu(n0)}}
		p.Cov[Condensate][Condensate], p.Cov[Mu][Mu] = math.Pow(0.003*n0, 2), math.Pow(0.002*p.Vector[Mu], 2)
		n.Points = append(n.Points, p)
	}
	m, err := n.CheckMeanField(context.Background())
	if err != nil || m == nil || m.Release == nil {
		t.Fatalf("mean field %v, %v", m, err)
	}
	within(t, "release energy over 2/7 mu(N0)", m.Release.Ratio.V, 1.21, 1e-9)
	within(t, "release energy", m.Release.Energy.V, 1.21*2./7*g.scales().mu(m.Release.Atoms), 1e-9*g.scales().mu(5e4))
	for i := range n.Points {
		n.Points[i].Flight = 0.02
	}
	if m, err = n.CheckMeanField(context.Background()); err != nil || m.Release != nil {
		t.Errorf("one flight gives a release energy: %v, %v", m.Release, err)
	}
}

// TestNightsWithoutCondensate must not fail, nor find anything.
func TestNightsWithoutCondensate(t *testing.T) {
	ctx, g := context.Background(), rubidium(t)
	th := NewTheory(g, 1e5, 1e5)
	n := &Night{Gas: g, Points: []Point{{Name: "hot", Vector: Vector{1e5, 0, 2 * model.CriticalTemperature(1e5, g.Trap), math.NaN()}}}}
	if list, err := n.Compare(ctx, th); err != nil || list != nil {
		t.Errorf("comparison %v, %v", list, err)
	}
	tr, err := n.Locate(ctx, th)
	if err != nil || tr.Saturation != nil || tr.Onsets != nil || !math.IsNaN(tr.Hottest) {
		t.Errorf("transition %+v, %v", tr, err)
	}
	within(t, "coldest t without a condensate", tr.Coldest, 2, 1e-12)
	if m, err := n.CheckMeanField(ctx); err != nil || m != nil {
		t.Errorf("mean field %v, %v", m, err)
	}
	if len(n.CalibrationBand(th, Laws[0], 1e5, []float64{0.5}).T) != 1 {
		t.Error("no band")
	}
}

// TestPredictions: 0.924 against the measured Tc = 0.94(5) Tc0 of 87Rb in a trap of
// 373 Hz along z and √8 less across, N = 4e4 (J. R. Ensher et al., Phys. Rev. Lett. 77, 4984
// (1996); worked_examples.csv W16, W17).
func TestPredictions(t *testing.T) {
	g := rubidium(t)
	g.Trap = model.TrapHz(373/math.Sqrt(8), 373/math.Sqrt(8), 373)
	for _, p := range g.predictions(4e4) {
		if p.Name == "finite size and mean field" {
			within(t, p.Name, p.Ratio, 0.92363819, 1e-3)
			within(t, "sigmas", p.Sigmas(Estimate{0.94, 0.03, 0.04}), (0.94-p.Ratio)/0.05, 1e-12)
			return
		}
	}
	t.Error("no such prediction")
}
