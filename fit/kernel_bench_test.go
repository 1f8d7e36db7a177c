package fit

import (
	"fmt"
	"math"
	"testing"
)

// kernelCase is a row of kernel input that no kernel changes much.
type kernelCase struct {
	w, r, g, h, k, d, halfW, halfD []float64
	run                            []densitySums
	line                           kernelLine
	far                            kernelFar
	sum                            kernelSums
	total                          kernelTotals
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
	return c
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
	}
}

func BenchmarkKernels(b *testing.B) {
	const n = 256
	for _, s := range allKernels() {
		c := newKernelCase(n)
		for _, k := range kernelCalls(s, c) {
			b.Run(fmt.Sprint(s.name, "/", k.name), func(b *testing.B) {
				for b.Loop() {
					k.call()
				}
				b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/n, "ns/px")
			})
		}
	}
}
