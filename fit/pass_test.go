package fit

import (
	"math"
	"math/rand/v2"
	"testing"

	"fallshadow/model"
)

func within(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.12g, want %.12g within %.3g", what, got, want, tol)
	}
}

// testLab is a rubidium machine with an oblique camera.
func testLab(t testing.TB) *Lab {
	t.Helper()
	rb, err := model.LookupSpecies("87Rb")
	if err != nil {
		t.Fatal(err)
	}
	return &Lab{
		Species: rb, Trap: model.TrapHz(35, 110, 90), View: model.View(0.15, 0.3, 0.5),
		Optics: Optics{Pixel: 4e-6, Blur: 3e-6, Alpha: 1.6, Detuning: 0.2, Saturation: 5000},
	}
}

// testProblem draws noise around a model, its light uneven, a few pixels bad.
func testProblem(t testing.TB, lab *Lab, linear bool, q params, r room) *problem {
	t.Helper()
	tmpl, err := newTemplate(lab, 0.018, 0)
	if err != nil {
		t.Fatal(err)
	}
	const w, h = 61, 53
	rng := rand.New(rand.NewPCG(7, 9))
	pic := &Picture{Width: w, Height: h, Noise: Noise{Read: 6, LightShot: 1, LightRead: 36, Dark: 36, DarkIsShared: true}}
	for i := range w * h {
		l := 900 + 100*math.Sin(float64(i)/31) + 30*rng.NormFloat64()
		pic.Light = append(pic.Light, l)
		pic.Atoms = append(pic.Atoms, l)
		pic.Good = append(pic.Good, i%97 != 0)
	}
	if linear {
		pic.Density, pic.DensitySigma = make([]float64, w*h), 0.05
	}
	p := &problem{tmpl: &tmpl, law: newLaw(&lab.Optics), room: r, buf: new(buffers)}
	p.blur = lab.Optics.Blur / lab.Optics.Pixel
	p.level = new(level)
	p.level.view(pic, &lab.Optics)
	p.fine = p.level
	p.level.freezeData()
	kappa := make([]float64, w*h)
	p.freeze(&q, kappa, kappa)
	for i, k := range kappa {
		if linear {
			pic.Density[i] = k + 0.05*rng.NormFloat64()
		} else {
			pic.Atoms[i] = k*p.level.smooth[i] + 30*rng.NormFloat64()
		}
	}
	p.level.cast()
	p.freeze(&q, kappa, kappa)
	return p
}

var testParams = params{pThermal: 0.7, pWidth1: -0.9, pWidth2: -0.8, pCondensate: 1.1, pRadius1: -0.9, pRadius2: -0.85,
	pX: 31.3, pY: 25.8, pAngle: 0.07, pAlpha: 0.2, pLight: 0.03, pLightX: 0.02, pLightY: -0.03}

// TestNormalMatchesDifferences holds gradient and normal matrix against central differences
// of the residuals, which are rendered by other code. Steps of 1e-5 leave about 1e-6 of a
// column; the edge of the condensate costs a little more.
func TestNormalMatchesDifferences(t *testing.T) {
	for _, c := range []struct {
		name   string
		linear bool
		room   room
		cond   float64
		weak   bool
		gauss  bool
	}{
		{"counts, thermal only, no room", false, room{}, 0, false, false},
		{"counts, both, in a room", false, room{5, 4, 55, 50}, 1.1, false, false},
		{"counts, weak probe", false, room{10, 10, 50, 50}, 1.1, true, false},
		{"counts, gaussian condensate", false, room{2, 3, 59, 50}, 1.1, false, true},
		{"density, both, in a room", true, room{5, 4, 55, 50}, 1.1, false, false},
		{"density, thermal only", true, room{}, 0, false, false},
	} {
		t.Run(c.name, func(t *testing.T) {
			lab := testLab(t)
			if c.weak {
				lab.Optics.Saturation = math.Inf(1)
			}
			q := testParams
			q[pCondensate] = c.cond
			p := testProblem(t, lab, c.linear, q, c.room)
			if p.tmpl.gaussian = c.gauss; c.gauss {
				p.tmpl.condensate.square = [2]float64{25, 9}
			}
			checkNormal(t, p, q)
		})
	}
}

func checkNormal(t *testing.T, p *problem, q params) {
	t.Helper()
	n := p.level.w * p.level.h
	h, g := make([]float64, numParams*numParams), make([]float64, numParams)
	f := p.normal(&q, h, g)
	within(t, "value without derivatives", p.normal(&q, nil, nil), f, 1e-9*f)
	rho := func(q params) []float64 {
		kappa, r := make([]float64, n), make([]float64, n)
		p.render(&q, kappa, kappa)
		p.residuals(kappa, r)
		for i, v := range r {
			if math.IsNaN(v) {
				r[i] = 0
			}
		}
		return r
	}
	r0 := rho(q)
	sum := 0.0
	for _, v := range r0 {
		sum += v * v
	}
	within(t, "sum of squares", f, sum, 1e-7*sum)
	var cols [numParams][]float64
	for i := range numParams {
		if q[pCondensate] == 0 && (i == pCondensate || i == pRadius1 || i == pRadius2) {
			continue
		}
		const step = 1e-5
		a, b := q, q
		a[i] += step
		b[i] -= step
		ra, rb := rho(a), rho(b)
		cols[i] = make([]float64, n)
		for k := range ra {
			cols[i][k] = (ra[k] - rb[k]) / (2 * step)
		}
	}
	for i := range numParams {
		if cols[i] == nil {
			continue
		}
		gi := dot(cols[i], r0)
		scale := math.Sqrt(dot(cols[i], cols[i]))
		within(t, "gradient", g[i]/scale, gi/scale, 2e-4)
		for k := range numParams {
			if cols[k] == nil {
				continue
			}
			norm := scale * math.Sqrt(dot(cols[k], cols[k]))
			if d := math.Abs(h[i*numParams+k]-dot(cols[i], cols[k])) / norm; !(d <= 2e-4) {
				t.Errorf("normal matrix %d,%d: off by %.3g", i, k, d)
			}
		}
	}
}

// The pass gives the same bits with every set of kernels, the same again with other work in
// between, and asks for no memory; with and without a room, an excess, a gaussian condensate.
func TestNormalBits(t *testing.T) {
	for _, c := range []struct {
		name     string
		room     room
		gaussian bool
		excess   bool
		linear   bool
	}{
		{name: "no room"},
		{name: "room", room: room{5, 4, 44, 50}},
		{name: "gaussian", room: room{5, 4, 44, 50}, gaussian: true},
		{name: "excess", room: room{20, 10, 40, 50}, excess: true},
		{name: "density", room: room{20, 10, 40, 50}, linear: true},
	} {
		t.Run(c.name, func(t *testing.T) {
			p := testProblem(t, testLab(t), c.linear, testParams, c.room)
			p.tmpl.gaussian = c.gaussian
			if c.excess {
				p.tmpl.excess = testExcess()
			}
			var want, h [numParams * numParams]float64
			var wantG, g [numParams]float64
			var f float64
			for i, k := range allKernels() {
				p.buf = new(buffers)
				p.buf.forward.kernels, p.buf.region.forward.kernels = k, k
				other := testParams
				other[pX] -= 3
				p.normal(&other, h[:], g[:])
				h, g = [numParams * numParams]float64{}, [numParams]float64{}
				got := p.normal(&testParams, h[:], g[:])
				if i == 0 {
					f, want, wantG = got, h, g
				}
				if got != f || h != want || g != wantG {
					t.Errorf("%s: χ² %v, want %v, or its derivatives differ", k.name, got, f)
				}
				if n := testing.AllocsPerRun(3, func() { p.normal(&testParams, h[:], g[:]) }); n != 0 {
					t.Errorf("%s: %v allocations", k.name, n)
				}
			}
		})
	}
}

// Where no thermal part is sought the pass looks at none, and says the same of the light.
func TestNormalOfLightAlone(t *testing.T) {
	q := testParams
	q[pThermal], q[pCondensate] = 0, 0
	p := testProblem(t, testLab(t), false, q, room{})
	var h [2][numParams * numParams]float64
	var g [2][numParams]float64
	var f [2]float64
	none := kind{}.tie()
	for i, ties := range []*tie{nil, &none} {
		p.ties = ties
		f[i] = p.normal(&q, h[i][:], g[i][:])
	}
	within(t, "value", f[1], f[0], 1e-12*f[0])
	if h[1][pThermal*numParams+pThermal] != 0 || h[0][pThermal*numParams+pThermal] == 0 {
		t.Error("the derivative by the thermal part is not left out, or was never there")
	}
	for _, i := range []int{pLight, pLightX, pLightY} {
		scale := math.Sqrt(h[0][i*numParams+i])
		within(t, "gradient", g[1][i], g[0][i], 1e-12*scale*math.Sqrt(f[0]))
		for _, k := range []int{pLight, pLightX, pLightY} {
			within(t, "normal matrix", h[1][i*numParams+k], h[0][i*numParams+k], 1e-12*scale*math.Sqrt(h[0][k*numParams+k]))
		}
	}
}

// testExcess falls off from the middle.
func testExcess() *excess {
	e := &excess{values: make([]float64, excessW*excessH)}
	for i := range e.values {
		e.values[i] = 1.3 - 0.04*excessStep*float64(i%excessW)
	}
	return e
}

func dot(a, b []float64) float64 {
	s := 0.0
	for i := range a {
		s += a[i] * b[i]
	}
	return s
}

func BenchmarkNormal(b *testing.B) {
	for _, c := range []struct {
		name string
		room room
		full bool
	}{{"thermal", room{}, true}, {"value", room{}, false}, {"room", room{0, 0, 61, 53}, true}} {
		b.Run(c.name, func(b *testing.B) {
			p := testProblem(b, testLab(b), false, testParams, c.room)
			h, g := make([]float64, numParams*numParams), make([]float64, numParams)
			if !c.full {
				h, g = nil, nil
			}
			b.ReportAllocs()
			for b.Loop() {
				p.normal(&testParams, h, g)
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*p.level.w*p.level.h), "ns/pixel")
		})
	}
}
