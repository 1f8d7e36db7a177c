package fit

import (
	"math"
	"testing"
	"time"
)

// benchSide is that of the picture on which the two passes are compared, benchCloud the cloud in
// it, thermal part and condensate.
const benchSide = 512

var benchCloud = DensityParams{0.8, 51, 38, 1.1, 50, 27, 250, 262, 0.2, 0.02, -0.03, 0.04}

// benchSession is a session on the picture in counts.
func benchSession(blur float64) *session {
	c := &benchCloud
	s := &session{blur: blur, ws: NewWorkspace()}
	s.tmpl = template{pixel: 1,
		thermal:    ellipse{[2]float64{c[DensityWidth1] * c[DensityWidth1], c[DensityWidth2] * c[DensityWidth2]}, c[DensityAngle]},
		condensate: ellipse{[2]float64{c[DensityRadius1] * c[DensityRadius1], c[DensityRadius2] * c[DensityRadius2]}, c[DensityAngle]}}
	pic := &Picture{Width: benchSide, Height: benchSide, Noise: Noise{Read: 6, LightShot: 1, LightRead: 36, Dark: 1, DarkIsShared: true}}
	for i := range benchSide * benchSide {
		pic.Light = append(pic.Light, 4000+float64(i*7919%251))
		pic.Atoms = append(pic.Atoms, 3900+float64(i*7919%257))
		pic.Good = append(pic.Good, true)
	}
	optics := Optics{Pixel: 1, Alpha: 2, Saturation: 9000}
	s.law = newLaw(&optics)
	for i := range 3 {
		l := new(level)
		if s.levels = append(s.levels, l); i == 0 {
			l.view(pic, &optics)
		} else {
			l.halve(s.levels[i-1])
		}
		l.freezeData()
	}
	return s
}

// benchProblem is the pass that a free fit with a free angle takes over the full picture, or, where
// it is split, over bins outside the room of the condensate.
func benchProblem(k *kernelSet, condensate bool, blur float64, split bool) (*problem, params) {
	c := &benchCloud
	q := params{pThermal: c[DensityThermal], pX: c[DensityX], pY: c[DensityY], pLight: c[DensityLight]}
	kind := kind{thermal: true, condensate: condensate, free: true, angle: true}
	if condensate {
		q[pCondensate] = c[DensityPeak]
	}
	s := benchSession(blur)
	p := s.problem(0, &q, kind)
	if split {
		p = s.split(&q, kind)
	}
	p.buf.forward.kernels, p.buf.region.forward.kernels = k, k
	tie := kind.tie()
	p.ties = &tie
	return p, q
}

// fastest is the shortest time of some calls: what is left where others use the processor, too.
type fastest time.Duration

func (f *fastest) time(call func()) {
	start := time.Now()
	call()
	if d := fastest(time.Since(start)); *f == 0 || d < *f {
		*f = d
	}
}

func (f fastest) perPixel() float64 { return float64(f) / (benchSide * benchSide) }

// BenchmarkPass times the pass over counts and the density kernel's in turn, a few of each as a fit
// takes them, on one cloud: ns for every pixel of the picture, with all derivatives, and the ratio.
func BenchmarkPass(b *testing.B) {
	img := drawDensity(&benchCloud, benchSide, benchSide, 1)
	for _, k := range allKernels() {
		for _, c := range []struct {
			name       string
			condensate bool
			blur       float64
			split      bool
		}{{"thermal", false, 0, false}, {"both", true, 0, false}, {"both, blur 1 px", true, 1, false}, {"both, blur 2 px", true, 2, false},
			{"both, split", true, 0, true}, {"both, blur 1 px, split", true, 1, true}} {
			b.Run(k.name+"/"+c.name, func(b *testing.B) {
				var ws DensityWorkspace
				ws.load(img, &benchCloud)
				d := &ws.problem
				d.kernels, d.level = k, &ws.levels[0]
				var dh [NumDensity * NumDensity]float64
				var dg [NumDensity]float64
				p, q := benchProblem(k, c.condensate, c.blur, c.split)
				h, g := make([]float64, numParams*numParams), make([]float64, numParams)
				var density, pass fastest
				for b.Loop() {
					for range 5 {
						d.passes = 0
						density.time(func() { d.Normal(benchCloud[:], dh[:], dg[:]) })
					}
					for range 5 {
						pass.time(func() { p.normal(&q, h, g) })
					}
				}
				b.ReportMetric(density.perPixel(), "density-ns/px")
				b.ReportMetric(pass.perPixel(), "ns/px")
				b.ReportMetric(float64(pass)/float64(density), "ratio")
			})
		}
	}
}

// multiplications are those of a kernel for one pixel, fused or not. A processor has as many units
// for them as for anything else a kernel does.
var multiplications = struct{ far, near, faint, thin, absorb, compare, sums, bare float64 }{18, 30, 17, 27, 53, 14, 32, 18}

// passMultiplications are those of the pass over a picture without a room.
func passMultiplications(p *problem, q *params) float64 {
	f, m, sum := &p.buf.forward, &multiplications, 0.0
	geo := p.geometry(q, p.blurOn(p.level))
	f.set(p, p.level, p.level.plate, &geo)
	columns := func(a, b int) float64 { return float64(b - a) }
	for j := range p.level.h {
		f.line(j)
		cloud, near := columns(f.cloud()), columns(f.bose.below(boseSplit, f.plate.stride))
		absorb, seen := columns(f.within(f.thick)), columns(f.within(f.seen))
		sum += near*m.near + (cloud-near)*m.far + absorb*m.absorb + (seen-absorb)*m.thin + (cloud-seen)*m.faint
		sum += cloud*(m.compare+m.sums) + (float64(f.plate.stride)-cloud)*m.bare
	}
	return sum
}

// BenchmarkPassFloor says what the pass over a thermal cloud cannot do without, in ns for every
// pixel: reading the counts once, and its multiplications at the rate of the fastest kernel. Plain
// Go, whose kernels wait for every sum, has no such rate.
func BenchmarkPassFloor(b *testing.B) {
	for _, k := range allKernels()[1:] {
		b.Run(k.name, func(b *testing.B) {
			p, q := benchProblem(k, false, 0, false)
			l := p.level.plate
			row := make([]float64, l.stride)
			var sums productSums
			var read, multiply fastest
			for b.Loop() {
				read.time(func() {
					for o := 0; o < len(l.atoms); o += l.stride {
						k.times(row, l.atoms[o:o+l.stride], l.light[o:o+l.stride])
						k.times(row, l.smooth[o:o+l.stride], l.variance[o:o+l.stride])
					}
				})
				multiply.time(func() {
					for range benchSide {
						k.products(&sums, l.atoms, l.atoms, kernelLanes, benchSide)
					}
				})
			}
			n := passMultiplications(p, &q) / (benchSide * benchSide)
			one := multiply.perPixel() / (productRows * productColumns)
			b.ReportMetric(n, "multiplications/px")
			b.ReportMetric(read.perPixel(), "read-ns/px")
			b.ReportMetric(n*one, "arithmetic-ns/px")
			b.ReportMetric(math.Max(n*one, read.perPixel()), "floor-ns/px")
		})
	}
}
