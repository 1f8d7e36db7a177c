package synth

import (
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

// near fails unless got lies within tol of want; NaN fails.
func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.9g, want %.9g within %.2g", what, got, want, tol)
	}
}

func source(seed uint64) *rand.Rand { return rand.New(rand.NewPCG(seed, 1)) }

// disc is a gaussian cloud of the given peak density and rms sizes.
func disc(peak, x0, y0, sx, sy float64) Cloud {
	return func(x, y float64) float64 {
		u, v := (x-x0)/sx, (y-y0)/sy
		return peak * math.Exp(-(u*u+v*v)/2)
	}
}

func plain() Scene {
	return Scene{
		Width: 48, Height: 40,
		Law:   Law{Alpha: 1, Saturation: math.Inf(1)},
		Probe: Probe{Electrons: 2000},
	}
}

func quiet() Camera { return Camera{ElectronsPerCount: 1, ReadNoise: 3, Offset: 100} }

func draw(t *testing.T, s Scene, c Camera, rng *rand.Rand) Frames {
	t.Helper()
	sensor, err := NewSensor(c, s.Width, s.Height)
	if err != nil {
		t.Fatal(err)
	}
	f, err := s.Draw(sensor, rng)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func expect(t *testing.T, s Scene, seed uint64) Expected {
	t.Helper()
	e, err := s.Expect(source(seed))
	if err != nil {
		t.Fatal(err)
	}
	return e
}

func TestSameSeedSameFrames(t *testing.T) {
	s := plain()
	s.Cloud, s.Granularity, s.Blur = disc(1, 20, 21, 5, 6), 8, 0.8
	s.Probe.PowerNoise = 0.02
	s.Probe.Fringes = []Fringe{{Contrast: 0.05, KX: 0.3, KY: 0.1, Wander: 2, Jitter: 0.3}}
	c := quiet()
	c.Hot, c.HotElectrons, c.OffsetPattern = 3, 500, 2
	a, b, other := draw(t, s, c, source(7)), draw(t, s, c, source(7)), draw(t, s, c, source(8))
	for i, p := range a.Planes() {
		if !slices.Equal(p, b.Planes()[i]) {
			t.Errorf("plane %d differs under the same seed", i)
		}
		if slices.Equal(p, other.Planes()[i]) {
			t.Errorf("plane %d is the same under another seed", i)
		}
	}
}

func TestPlainSumFindsTheAtoms(t *testing.T) {
	cases := []struct {
		name string
		law  Law
		blur float64
		tol  float64 // the logarithm of a mean: blur and pixels lower the sum by half the variance they smear
	}{
		{"weak", Law{Alpha: 1, Saturation: math.Inf(1)}, 0, 2e-4},
		{"weak, blurred", Law{Alpha: 1, Saturation: math.Inf(1)}, 0.8, 1.2e-3},
		{"saturated", Law{Alpha: 1.9, Saturation: 1000}, 0, 2e-4},
		{"detuned", Law{Alpha: 1.2, Detuning: 0.7, Saturation: 4000}, 0, 2e-4},
	}
	for _, c := range cases {
		s := plain()
		s.Law, s.Blur, s.Cloud = c.law, c.blur, disc(0.1, 23.3, 19.6, 4, 5)
		e := expect(t, s, 1)
		sum, mx, my := 0.0, 0.0, 0.0
		for i, a := range e.Atoms {
			b := e.Light[i]
			od := c.law.Alpha*(1+4*c.law.Detuning*c.law.Detuning)*math.Log(b/a) + (b-a)/c.law.Saturation
			sum += od
			mx += od * float64(i%s.Width)
			my += od * float64(i/s.Width)
		}
		want := 2 * math.Pi * 0.1 * 4 * 5
		near(t, c.name+" sum", sum/want, 1, c.tol)
		near(t, c.name+" x", mx/sum, 23.3, 2e-3)
		near(t, c.name+" y", my/sum, 19.6, 2e-3)
	}
}

func TestStrayLightIsACeilingOfTheDensity(t *testing.T) {
	// OD 3 with an unabsorbed fraction ε of the absorbable light reads
	// −ln[(e^−3 + ε)/(1 + ε)]: 2.981, 2.827, 2.354 (closed form).
	for _, c := range []struct{ epsilon, want float64 }{{1e-3, 2.981}, {1e-2, 2.827}, {5e-2, 2.354}} {
		s := plain()
		s.Law.Stray = c.epsilon / (1 + c.epsilon)
		s.Cloud = func(x, y float64) float64 { return 3 }
		e := expect(t, s, 1)
		near(t, "density read", math.Log(e.Light[500]/e.Atoms[500]), c.want, 6e-4)
	}
}

func TestWholeAtomsScatterAsPoisson(t *testing.T) {
	const perDensity, mean = 4000, 2.0
	s := plain()
	s.Width, s.Height, s.Granularity = 200, 200, perDensity
	s.Cloud = func(x, y float64) float64 { return mean / perDensity }
	e := expect(t, s, 3)
	var sum, square float64
	for i, a := range e.Atoms {
		n := perDensity * math.Log(e.Light[i]/a)
		sum += n
		square += n * n
	}
	n := float64(len(e.Atoms))
	near(t, "atoms a pixel", sum/n, mean, 4*math.Sqrt(mean/n))
	near(t, "variance of atoms", square/n-sum*sum/n/n, mean, 4*mean*math.Sqrt(2.5/n))
}

func TestPowerAndFringesDifferAsAsked(t *testing.T) {
	s := plain()
	s.Probe.Fringes = []Fringe{{Contrast: 0.1, KX: 2 * math.Pi / 12, Wander: 3}}
	e := expect(t, s, 5)
	if !slices.Equal(e.Atoms, e.Light) {
		t.Error("no jitter and no noise: the frames' light should agree")
	}
	moved := expect(t, s, 6)
	if slices.Equal(e.Light, moved.Light) {
		t.Error("fringes stand still from shot to shot")
	}
	s.Probe = Probe{Electrons: 2000, PowerNoise: 0.03}
	var square float64
	const shots = 400
	for k := range uint64(shots) {
		e := expect(t, s, k)
		r := math.Log(e.Atoms[7] / e.Light[7])
		square += r * r
	}
	// Two draws, so √2 times the noise; 400 shots know it to 3.5 %.
	near(t, "power noise", math.Sqrt(square/shots)/(0.03*math.Sqrt2), 1, 0.12)
}

func TestFringeContrastAndWaveVector(t *testing.T) {
	s := plain()
	s.Width, s.Height = 60, 60
	s.Probe.Fringes = []Fringe{{Contrast: 0.08, KX: 2 * math.Pi / 12, KY: 2 * math.Pi / 20, Phase: 0.4}}
	e := expect(t, s, 1)
	var re, im float64
	for i, v := range e.Light {
		x, y := float64(i%60), float64(i/60)
		sin, cos := math.Sincos(2 * math.Pi * (x/12 + y/20))
		re += v * cos
		im -= v * sin
	}
	n := float64(len(e.Light)) * 2000 / 2
	// A pixel made of three cells averages a wave over (1 + 2 cos(k/3))/3 along each axis.
	mean := (1 + 2*math.Cos(2*math.Pi/36)) / 3 * (1 + 2*math.Cos(2*math.Pi/60)) / 3
	near(t, "contrast", math.Hypot(re, im)/n, 0.08*mean, 1e-6)
	near(t, "phase", math.Atan2(im, re), 0.4, 1e-6)
}

func TestProbeShape(t *testing.T) {
	s := plain()
	s.Probe = Probe{Electrons: 1000, X: 10, Y: 12, Waist: 30, SlopeX: 0.002, SlopeY: -0.001}
	e := expect(t, s, 1)
	at := func(x, y int) float64 { return e.Light[y*s.Width+x] }
	// The mean over a pixel exceeds the value at its centre by the curvature, below 1e-3 here.
	near(t, "centre", at(10, 12), 1000, 1)
	near(t, "a waist away", at(40, 12)/(1000*math.Exp(-2+30*0.002)), 1, 1e-3)
	near(t, "slope in y", at(10, 32)/at(10, 12), math.Exp(-2*400.0/900-20*0.001), 1e-3)
}

func TestSceneRefusesNonsense(t *testing.T) {
	cases := []struct {
		change func(*Scene)
		want   string
	}{
		{func(s *Scene) { s.Width = 0 }, "0 by 40"},
		{func(s *Scene) { s.Height = 1 << 20 }, "by 1048576"},
		{func(s *Scene) { s.Blur = math.NaN() }, "blur"},
		{func(s *Scene) { s.Granularity = -1 }, "atoms per pixel"},
		{func(s *Scene) { s.Oversample = 99 }, "oversampling"},
		{func(s *Scene) { s.Law.Alpha = 0 }, "alpha"},
		{func(s *Scene) { s.Law.Saturation = 0 }, "saturation"},
		{func(s *Scene) { s.Law.Detuning = math.Inf(1) }, "detuning"},
		{func(s *Scene) { s.Law.Stray = 1 }, "stray"},
		{func(s *Scene) { s.Probe.Electrons = 0 }, "electrons per pixel"},
		{func(s *Scene) { s.Probe.SlopeX = math.NaN() }, "probe"},
		{func(s *Scene) { s.Probe.PowerNoise = -1 }, "noise"},
		{func(s *Scene) { s.Probe.Fringes = []Fringe{{Contrast: 0.6}, {Contrast: -0.5}} }, "contrasts"},
		{func(s *Scene) { s.Cloud = func(x, y float64) float64 { return math.NaN() } }, "σ0 n = NaN"},
		{func(s *Scene) { s.Cloud = func(x, y float64) float64 { return -1 } }, "σ0 n = -1"},
	}
	for _, c := range cases {
		s := plain()
		c.change(&s)
		_, err := s.Expect(source(1))
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("want an error about %q, got %v", c.want, err)
		}
	}
	sensor, _ := NewSensor(quiet(), 10, 10)
	s := plain()
	if _, err := s.Draw(sensor, source(1)); err == nil {
		t.Error("a sensor of another size was taken")
	}
}

func BenchmarkDraw(b *testing.B) {
	s := plain()
	s.Width, s.Height, s.Blur = 160, 160, 0.8
	s.Cloud = disc(1.5, 80, 80, 15, 20)
	s.Law = Law{Alpha: 2, Saturation: 9000}
	for range 6 {
		s.Probe.Fringes = append(s.Probe.Fringes, Fringe{Contrast: 0.06, KX: 0.3, KY: 0.2})
	}
	sensor, err := NewSensor(quiet(), 160, 160)
	if err != nil {
		b.Fatal(err)
	}
	rng := source(1)
	for b.Loop() {
		if _, err := s.Draw(sensor, rng); err != nil {
			b.Fatal(err)
		}
	}
}
