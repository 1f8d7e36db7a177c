package fit

import (
	"fmt"
	"math"
	"testing"
)

// kernelCase is a row of kernel input that no kernel changes much.
type kernelCase struct {
	w, r, g, h, k, d, halfW, halfD []float64
	t, c, e, depth, thin, long     []float64
	run                            []densitySums
	line                           kernelLine
	far                            kernelFar
	sum                            kernelSums
	total                          kernelTotals

	light    kernelLight
	shape    kernelShape
	rr       lanes
	pass     passSums
	products productSums
}

func newKernelCase(n int) *kernelCase {
	c := &kernelCase{line: kernelLine{x0: -1.3, dx: 2.1 / float64(n), b0: 0.02, db: 1e-4, t2: 0.6, t1: 0.13, t0: 0.05,
		amp: 0.7, q2: 0.9, q1: -0.1, q0: 0.2, peak: 1.3}}
	for _, p := range [...]*[]float64{&c.w, &c.r, &c.g, &c.h, &c.k, &c.d, &c.halfW, &c.halfD} {
		*p = make([]float64, n)
		for i := range *p {
			(*p)[i] = 0.5 + 0.4*math.Sin(float64(i)*1.7+float64(len(c.w)))
		}
	}
	for i := range kernelLanes {
		c.far.z[i], c.far.r[i] = 0.1*math.Exp(-0.02*float64(i)), math.Exp(-0.16-0.001*float64(i))
	}
	c.far.q = 0.999
	c.run = make([]densitySums, n/densityBlock+1)
	c.counts(n)
	return c
}

// counts fills in what the kernels over counts read.
func (c *kernelCase) counts(n int) {
	for _, p := range [...]*[]float64{&c.t, &c.c, &c.e, &c.depth, &c.thin} {
		*p = make([]float64, n)
	}
	for i := range n {
		c.t[i] = 0.5 + 0.5*math.Sin(float64(i))
		c.depth[i] = 3 * (1 + math.Sin(float64(i)*0.3))
		c.thin[i] = thinMost * (0.5 + 0.5*math.Sin(float64(i)))
	}
	c.long = make([]float64, productColumns*(n+kernelLanes))
	for i := range c.long {
		c.long[i] = math.Cos(float64(i) * 0.7)
	}
	l := &c.light
	for j := range kernelLanes {
		l.k[j], l.step[j] = 0.9+0.01*float64(j), 1.01
		l.sat[j], l.pass[j], l.stray[j] = 0.8, 0.97, 0.03
		l.shot[j], l.read[j], l.dark[j] = 0.3, 0.4, 0.2
	}
	c.shape = kernelShape{0.3, parabola{0.1, -0.2, 0.7}, parabola{-0.4, 0.2, 0.6}}
}

// kernelCalls are all kernels of a set on a case.
func kernelCalls(s *kernelSet, c *kernelCase) []struct {
	name string
	call func()
} {
	return []struct {
		name string
		call func()
	}{
		{"far", func() { s.far(c.g, c.h, c.r, c.d, &c.far, &c.line) }},
		{"near", func() { s.near(c.g, c.h, c.r, c.d, &c.line) }},
		{"edge", func() { s.edge(c.k, c.r, &c.line) }},
		{"slope", func() { s.slope(&c.sum, c.w, c.r, c.g, c.h, &c.line) }},
		{"cross", func() { s.cross(&c.sum, c.w, c.g, c.h, &c.line) }},
		{"powers", func() { s.powers((*[numPowers]lanes)(c.sum[sumH0:]), c.w, c.h, &c.line) }},
		{"edgeSlope", func() { s.edgeSlope(&c.sum, c.w, c.r, c.k, &c.line) }},
		{"peak", func() { s.peak(&c.sum, c.w, c.k, c.g, c.h, &c.line) }},
		{"weigh", func() { s.weigh(c.halfW, c.d) }},
		{"halve", func() { s.halve(c.halfW[:len(c.w)/2], c.halfD[:len(c.w)/2], c.w, c.d, c.k, c.g) }},
		{"blocks", func() { s.blocks(c.run, c.w[:len(c.w)/densityBlock*densityBlock], c.d) }},
		{"rootCross", func() { s.rootCross(&c.sum, c.w, c.k, c.g, c.h, &c.line) }},
		{"totals", func() { s.totals(c.total[:], c.sum[:]) }},
		{"compare", func() { s.compare(&c.rr, c.w, c.e, c.t, c.g, c.h, c.k, c.d, &c.light) }},
		{"bare", func() { s.bare(&c.pass, c.g, c.h, c.k, c.d, &c.light, &c.line) }},
		{"tilt", func() { s.tilt(&c.pass, c.w, c.e, c.g, c.h, c.c, &c.line) }},
		{"lightCross", func() { s.lightCross(&c.pass, c.w, c.g, c.h, c.c, &c.line) }},
		{"lightPowers", func() { s.lightPowers(&c.pass, c.w, c.h, c.c, &c.line) }},
		{"times", func() { s.times(c.r, c.w, c.e) }},
		{"shape", func() { s.shape(c.r, c.g, c.h, c.k, &c.shape, &c.line) }},
		{"smear", func() { s.smear(c.r, c.long, 7, 1, c.k[:6]) }},
		{"smear/1", func() { s.smear(c.r, c.long, 0, 1, c.k[:1]) }},
		{"products", func() { s.products(&c.products, c.long, c.long[5:], len(c.w), len(c.w)) }},
		{"absorb", func() {
			copy(c.e, c.depth)
			copy(c.g, c.d)
			copy(c.h, c.d)
			s.absorb(c.t, c.c, c.e, c.g, c.h, c.k, &c.light)
		}},
		{"thin", func() {
			copy(c.e, c.thin)
			copy(c.g, c.d)
			copy(c.h, c.d)
			s.thin(c.t, c.c, c.e, c.g, c.h, c.k, &c.light)
		}},
		{"faint", func() {
			copy(c.e, c.thin)
			copy(c.g, c.d)
			copy(c.h, c.d)
			s.faint(c.t, c.c, c.e, c.g, c.h, c.k, &c.light)
		}},
	}
}

// BenchmarkKernels times every kernel on a row that the nearest cache holds.
func BenchmarkKernels(b *testing.B) {
	const n, calls = 256, 50
	for _, s := range allKernels() {
		c := newKernelCase(n)
		for _, k := range kernelCalls(s, c) {
			b.Run(fmt.Sprint(s.name, "/", k.name), func(b *testing.B) {
				var f fastest
				for b.Loop() {
					f.time(func() {
						for range calls {
							k.call()
						}
					})
				}
				b.ReportMetric(float64(f)/(calls*n), "ns/px")
			})
		}
	}
}
