package fit

import (
	"context"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"

	"fallshadow/model/bose"
)

// densityAt is the model at a pixel, straight from its definition.
func densityAt(p *DensityParams, w, h int, x, y float64) float64 {
	s, c := math.Sincos(p[DensityAngle])
	x0, y0 := x-p[DensityX], y-p[DensityY]
	u, v := x0*c+y0*s, y0*c-x0*s
	sq := func(x float64) float64 { return x * x }
	t := 0.5 * (sq(u/p[DensityWidth1]) + sq(v/p[DensityWidth2]))
	q := max(0, 1-sq(u/p[DensityRadius1])-sq(v/p[DensityRadius2]))
	return p[DensityThermal]*bose.G2(t)/bose.Zeta2 + p[DensityPeak]*q*math.Sqrt(q) + p[DensityLight] +
		p[DensityLightX]*(x-0.5*float64(w-1))/float64(w) + p[DensityLightY]*(y-0.5*float64(h-1))/float64(h)
}

// drawDensity is a density image of p with noise that varies over the image, and some pixels
// that must not count.
func drawDensity(p *DensityParams, w, h int, seed uint64) *DensityImage {
	r := rand.New(rand.NewPCG(seed, 11))
	img := &DensityImage{Width: w, Height: h, Density: make([]float64, w*h), Sigma: make([]float64, w*h)}
	for i := range img.Density {
		x, y := float64(i%w), float64(i/w)
		img.Sigma[i] = 0.02 + 0.02*(x+y)/float64(w+h)
		img.Density[i] = densityAt(p, w, h, x, y) + img.Sigma[i]*r.NormFloat64()
		if r.IntN(200) == 0 {
			img.Density[i], img.Sigma[i] = 50, math.Inf(1)
		}
	}
	return img
}

// densityDerivatives are those of densityAt by the parameters.
func densityDerivatives(p *DensityParams, w, h int, x, y float64) (d DensityParams) {
	s, c := math.Sincos(p[DensityAngle])
	u, v := (x-p[DensityX])*c+(y-p[DensityY])*s, (y-p[DensityY])*c-(x-p[DensityX])*s
	add := func(axis int, outer float64) { // outer is the derivative by ½ of the square form
		w1, w2 := p[axis], p[axis+1]
		d[axis] -= outer * u * u / (w1 * w1 * w1)
		d[axis+1] -= outer * v * v / (w2 * w2 * w2)
		fu, fv := outer*u/(w1*w1), outer*v/(w2*w2)
		d[DensityX] += s*fv - c*fu
		d[DensityY] -= s*fu + c*fv
		d[DensityAngle] += v*fu - u*fv
	}
	t := 0.5 * (math.Pow(u/p[DensityWidth1], 2) + math.Pow(v/p[DensityWidth2], 2))
	q := max(0, 1-math.Pow(u/p[DensityRadius1], 2)-math.Pow(v/p[DensityRadius2], 2))
	d[DensityThermal] = bose.G2(t) / bose.Zeta2
	d[DensityPeak] = math.Pow(q, 1.5)
	add(DensityWidth1, -p[DensityThermal]*bose.G1(t)/bose.Zeta2)
	add(DensityRadius1, -3*p[DensityPeak]*math.Sqrt(q))
	d[DensityLight] = 1
	d[DensityLightX] = (x - 0.5*float64(w-1)) / float64(w)
	d[DensityLightY] = (y - 0.5*float64(h-1)) / float64(h)
	return d
}

func TestDensityDerivatives(t *testing.T) {
	for _, at := range [...][2]float64{{50, 41}, {41.3, 37}, {60, 55}, {20, 70}} {
		d := densityDerivatives(&densityExample, 90, 77, at[0], at[1])
		for k := range d {
			e := 1e-4 * max(math.Abs(densityExample[k]), 0.1)
			f := func(n float64) float64 {
				q := densityExample
				q[k] += n * e
				return densityAt(&q, 90, 77, at[0], at[1])
			}
			want := (f(-2) - 8*f(-1) + 8*f(1) - f(2)) / (12 * e)
			if !(math.Abs(d[k]-want) <= 1e-9*(1+math.Abs(want))) {
				t.Errorf("derivative by %d at %v is %v, by differences %v", k, at, d[k], want)
			}
		}
	}
}

// densityDirect is χ² with its normal matrix and half its gradient, pixel by pixel.
func densityDirect(img *DensityImage, p *DensityParams) (f float64, h [NumDensity * NumDensity]float64, g [NumDensity]float64) {
	for i, d := range img.Density {
		x, y, s := float64(i%img.Width), float64(i/img.Width), img.Sigma[i]
		if math.IsInf(s, 1) {
			continue
		}
		row := densityDerivatives(p, img.Width, img.Height, x, y)
		r := (densityAt(p, img.Width, img.Height, x, y) - d) / s
		f += r * r
		for a := range row {
			g[a] += row[a] / s * r
			for b := range row {
				h[a*NumDensity+b] += row[a] * row[b] / (s * s)
			}
		}
	}
	return f, h, g
}

var densityExample = DensityParams{0.8, 12, 9, 1.1, 11, 6.5, 47.3, 40.2, 0.23, 0.02, -0.03, 0.04}

// The one pass, by every set of kernels, against sums over the pixels: for clouds within the
// image and across its border, wide and narrow, with and without a condensate. Scales are
// those of the statistical errors, so 1e-6 is a millionth of one; the thermal part that is
// left out beyond densitySkip counts there where nothing else is in the image.
func TestDensityNormal(t *testing.T) {
	for name, change := range map[string]func(p *DensityParams){
		"example":    func(*DensityParams) {},
		"narrow":     func(p *DensityParams) { p[DensityWidth1], p[DensityWidth2] = 3, 2.5 },
		"wide":       func(p *DensityParams) { p[DensityWidth1], p[DensityWidth2] = 60, 40 },
		"corner":     func(p *DensityParams) { p[DensityX], p[DensityY] = -5, 2 },
		"condensate": func(p *DensityParams) { p[DensityWidth1], p[DensityWidth2], p[DensityRadius1] = 0.4, 0.3, 40 },
		"negative":   func(p *DensityParams) { p[DensityWidth1] *= -1; p[DensityRadius2] *= -1 },
		"turned":     func(p *DensityParams) { p[DensityAngle] = 1.9 },
	} {
		p := densityExample
		img := drawDensity(&p, 90, 77, 1)
		change(&p)
		wf, wh, wg := densityDirect(img, &p)
		for _, k := range allKernels() {
			ws := loaded(t, img, &p, k)
			var h [NumDensity * NumDensity]float64
			var g [NumDensity]float64
			if f := ws.problem.Normal(p[:], h[:], g[:]); !(math.Abs(f-wf) <= 1e-11*wf) {
				t.Errorf("%s, %s: χ² %v, direct %v", name, k.name, f, wf)
			}
			for a := range g {
				scale := math.Sqrt(wh[a*NumDensity+a])
				if !(math.Abs(g[a]-wg[a]) <= 1e-6*scale) {
					t.Errorf("%s, %s: gradient by %d is %v, direct %v, of scale %v", name, k.name, a, g[a], wg[a], scale)
				}
				for b := range g {
					i := a*NumDensity + b
					if !(math.Abs(h[i]-wh[i]) <= 1e-8*scale*math.Sqrt(wh[b*NumDensity+b])) {
						t.Errorf("%s, %s: matrix at %d,%d is %v, direct %v", name, k.name, a, b, h[i], wh[i])
					}
				}
			}
		}
	}
}

// loaded is a workspace with the levels of img, at the finest.
func loaded(t testing.TB, img *DensityImage, p *DensityParams, k *kernelSet) *DensityWorkspace {
	t.Helper()
	ws := new(DensityWorkspace)
	ws.init()
	ws.problem.kernels = k
	if _, err := ws.load(img, p); err != nil {
		t.Fatal(err)
	}
	ws.problem.level = &ws.levels[0]
	return ws
}

// A cloud that is not in the image leaves the background alone; one that is none at all has
// no χ².
func TestDensityOutside(t *testing.T) {
	p := densityExample
	img := drawDensity(&p, 90, 77, 1)
	p[DensityX], p[DensityY] = 1e6, -1e6
	ws := loaded(t, img, &p, &scalarKernels)
	var h [NumDensity * NumDensity]float64
	var g [NumDensity]float64
	f := ws.problem.Normal(p[:], h[:], g[:])
	wf, _, wg := densityDirect(img, &p)
	if !(math.Abs(f-wf) <= 1e-11*wf && math.Abs(g[DensityLight]-wg[DensityLight]) <= 1e-9*math.Abs(wg[DensityLight])) || g[DensityX] != 0 {
		t.Errorf("χ² %v and slope %v, direct %v and %v", f, g[DensityLight], wf, wg[DensityLight])
	}
	for _, k := range [...]int{DensityWidth1, DensityRadius2} {
		q := densityExample
		q[k] = 0
		if f := ws.problem.Normal(q[:], h[:], g[:]); !math.IsInf(f, 1) {
			t.Errorf("χ² of a cloud with parameter %d = 0 is %v", k, f)
		}
	}
}

func farStart(truth DensityParams) DensityParams {
	for i, f := range [...]float64{0.8, 1.2, 0.85, 1.2, 0.8, 1.2} {
		truth[i] *= f
	}
	truth[DensityX] += 2
	truth[DensityY] -= 1.5
	truth[DensityAngle] -= 0.08
	truth[DensityLight], truth[DensityLightX], truth[DensityLightY] = 0, 0, 0
	return truth
}

// The fit through the levels ends at the minimum that Gauss-Newton steps over the direct
// sums find, within a thousandth of the errors, and its matrix is that of the minimum.
func TestDensityFit(t *testing.T) {
	for _, size := range [...][2]int{{90, 77}, {128, 128}, {203, 140}} {
		truth := densityExample
		scale := float64(min(size[0], size[1])) / 77
		for k := DensityWidth1; k <= DensityY; k++ {
			if k != DensityPeak {
				truth[k] *= scale
			}
		}
		img, start := drawDensity(&truth, size[0], size[1], 5), farStart(truth)
		r, err := DensityFit(context.Background(), img, &start, new(DensityWorkspace))
		if err != nil || !r.Reason.Usable() {
			t.Fatalf("%v: %v, %v", size, err, r.Reason)
		}
		best := r.Params
		var h, c []float64
		for range 4 {
			_, hh, g := densityDirect(img, &best)
			h, c = hh[:], inverse(t, hh[:])
			for a := range best {
				for b := range best {
					best[a] -= c[a*NumDensity+b] * g[b]
				}
			}
		}
		f, _, _ := densityDirect(img, &best)
		if !(math.Abs(r.Chi2-f) <= 1e-9*f) {
			t.Errorf("%v: χ² %v, at the minimum %v", size, r.Chi2, f)
		}
		for a := range best {
			e := math.Sqrt(c[a*NumDensity+a])
			if d := math.Abs(r.Params[a]-best[a]) / e; !(d <= 1e-3) {
				t.Errorf("%v: parameter %d is %v errors from the minimum", size, a, d)
			}
			i := a*NumDensity + a
			if !(math.Abs(r.Normal[i]/h[i]-1) <= 0.03) {
				t.Errorf("%v: matrix at %d is %v, direct %v", size, a, r.Normal[i], h[i])
			}
		}
	}
}

func inverse(t *testing.T, h []float64) []float64 {
	t.Helper()
	var m mat.Dense
	if err := m.Inverse(mat.NewDense(NumDensity, NumDensity, h)); err != nil {
		t.Fatal(err)
	}
	return m.RawMatrix().Data
}

// The same image gives the same bits with every set of kernels, with a workspace that has
// served other images, and without new memory.
func TestDensityFitBits(t *testing.T) {
	ctx := context.Background()
	truth := densityExample
	img, start := drawDensity(&truth, 101, 99, 6), farStart(truth)
	big := drawDensity(&truth, 160, 130, 7)
	var want DensityResult
	for i, k := range allKernels() {
		ws := loaded(t, big, &start, k)
		if _, err := DensityFit(ctx, big, &start, ws); err != nil {
			t.Fatal(err)
		}
		r, err := DensityFit(ctx, img, &start, ws)
		if err != nil {
			t.Fatal(err)
		}
		if i == 0 {
			want = r
		}
		if r != want {
			t.Errorf("%s: %v, want %v", k.name, r, want)
		}
		if n := testing.AllocsPerRun(5, func() { _, err = DensityFit(ctx, img, &start, ws) }); n != 0 || err != nil {
			t.Errorf("%s: %v allocations, %v", k.name, n, err)
		}
	}
}

func TestDensityBadImage(t *testing.T) {
	p := densityExample
	good := drawDensity(&p, 60, 50, 1)
	for name, spoil := range map[string]func(m *DensityImage){
		"size":    func(m *DensityImage) { m.Width++ },
		"empty":   func(m *DensityImage) { *m = DensityImage{} },
		"density": func(m *DensityImage) { m.Density[7] = math.NaN() },
		"sigma":   func(m *DensityImage) { m.Sigma[1234] = 0 },
	} {
		bad := *good
		bad.Density, bad.Sigma = slices.Clone(good.Density), slices.Clone(good.Sigma)
		spoil(&bad)
		if _, err := DensityFit(context.Background(), &bad, &p, new(DensityWorkspace)); err == nil {
			t.Errorf("%s: fitted", name)
		}
	}
}

func BenchmarkDensityPass(b *testing.B) {
	p := benchCloud
	img := drawDensity(&p, benchSide, benchSide, 1)
	var ws DensityWorkspace
	ws.load(img, &p)
	ws.problem.level = &ws.levels[0]
	var h [NumDensity * NumDensity]float64
	var g [NumDensity]float64
	perPixel := func(b *testing.B) {
		b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/(benchSide*benchSide), "ns/px")
	}
	b.Run("normal", func(b *testing.B) {
		for b.Loop() {
			ws.problem.passes = 0
			ws.problem.Normal(p[:], h[:], g[:])
		}
		perPixel(b)
	})
	b.Run("gradient", func(b *testing.B) {
		for b.Loop() {
			ws.problem.passes = 1
			ws.problem.Normal(p[:], h[:], g[:])
		}
		perPixel(b)
	})
	b.Run("levels", func(b *testing.B) {
		for b.Loop() {
			ws.load(img, &p)
		}
		perPixel(b)
	})
}
