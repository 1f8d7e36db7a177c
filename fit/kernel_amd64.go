package fit

//lint:file-ignore U1000 the assembly reads the constants and their table

import (
	"math"

	"fallshadow/model/bose"
)

// allKernels are the kernels that this processor has, the best one last.
func allKernels() []*kernelSet {
	all := []*kernelSet{&scalarKernels}
	switch vectorWidth() {
	case 8:
		return append(all, &avx2Kernels, &avx512Kernels)
	case 4:
		return append(all, &avx2Kernels)
	}
	return all
}

// kernelWide are the constants of the kernels, one a row, repeated over the lanes. They stand in
// an object of their own, which starts with a cache line as a variable does not always: a row
// across two lines is loaded at half the pace.
var kernelWide = widen()

const (
	wideIota = iota
	wideEight
	wideOne
	wideTwo
	wideHalf
	wideMinusQuarter
	wideZeta2
	wideLn2
	wideLeast
	wideMost
	wideSplit    // bits: bias less √½
	wideExponent // bits
	wideBias
	wideLeastWeight
	wideOrder // of the numbers that two unpacked registers hold, as integers
	wideBend
	wideBend4
	wideBendInv2
	wideAbsorbMost
	wideTwoThirds
	wideMinusThird
	wideSixth
	wideMinus24th
	wideMinusHalf
	wideMinusLog2E
	wideExpMagic
	wideFarG
	wideFarH  = wideFarG + 7
	wideNearG = wideFarH + 7
	wideNearH = wideNearG + 6
	wideLog   = wideNearH + 6
	wideExp   = wideLog + 5
	wideRough = wideExp + 9
	numWide   = wideRough + 6
)

func widen() *[numWide]lanes {
	w := new([numWide]lanes)
	split := uint64(biasBits)
	split -= rootHalf
	for i := range kernelLanes {
		w[wideIota][i] = float64(i)
		for k, v := range map[int]float64{
			wideEight: kernelLanes, wideOne: 1, wideTwo: 2, wideHalf: 0.5, wideMinusQuarter: -0.25,
			wideZeta2: bose.Zeta2, wideLn2: math.Ln2, wideLeast: nearLeast, wideMost: nearMost,
			wideSplit: math.Float64frombits(split), wideExponent: math.Float64frombits(exponentBits), wideBias: exponentBias,
			wideLeastWeight: leastWeight, wideOrder: math.Float64frombits(uint64([...]int{0, 2, 4, 6, 1, 3, 5, 7}[i])),
			wideBend: absorbBend, wideBend4: 4 * absorbBend, wideBendInv2: 1 / (2 * absorbBend), wideAbsorbMost: absorbMost,
			wideTwoThirds: 2.0 / 3, wideMinusThird: -1.0 / 3, wideSixth: 1.0 / 6, wideMinus24th: -1.0 / 24, wideMinusHalf: -0.5,
			wideMinusLog2E: minusLog2E, wideExpMagic: expMagic,
		} {
			w[k][i] = v
		}
		fill := func(at int, c []float64) {
			for k, v := range c {
				w[at+k][i] = v
			}
		}
		fill(wideFarG, boseFarG[:])
		fill(wideFarH, boseFarH[:])
		fill(wideNearG, boseNearG[:])
		fill(wideNearH, boseNearH[:])
		fill(wideLog, boseLog[:])
		fill(wideExp, expForm[:])
		fill(wideRough, expRough[:])
	}
	return w
}

// avx2Kernels take four pixels at a time.
var avx2Kernels = kernelSet{
	name: "avx2", far: far2, near: near2, edge: edge2, slope: slope2, cross: cross2, powers: powers2,
	edgeSlope: edgeSlope2, peak: peak2, rootCross: rootCross2,
	weigh: weigh2, halve: halve2, blocks: blocks2, totals: totals2,
	absorb: absorb2, thin: thin2, faint: faint2, compare: compare2, bare: bare2,
	tilt: tilt2, lightCross: lightCross2, lightPowers: lightPowers2,
	times: times2, shape: shape2, smear: smear2, products: products2,
}

//go:noescape
func far2(g, h, r, d []float64, f *kernelFar, l *kernelLine)

//go:noescape
func near2(g, h, r, d []float64, l *kernelLine)

//go:noescape
func edge2(k, r []float64, l *kernelLine)

//go:noescape
func slope2(s *kernelSums, w, r, g, h []float64, l *kernelLine)

//go:noescape
func cross2(s *kernelSums, w, g, h []float64, l *kernelLine)

//go:noescape
func powers2(s *[numPowers]lanes, w, v []float64, l *kernelLine)

//go:noescape
func edgeSlope2(s *kernelSums, w, r, k []float64, l *kernelLine)

//go:noescape
func peak2(s *kernelSums, w, k, g, h []float64, l *kernelLine)

//go:noescape
func rootCross2(s *kernelSums, w, k, g, h []float64, l *kernelLine)

// avx512Kernels take eight pixels at a time.
var avx512Kernels = kernelSet{
	name: "avx512", far: far512, near: near512, edge: edge512, slope: slope512, cross: cross512, powers: powers512,
	edgeSlope: edgeSlope512, peak: peak512, rootCross: rootCross512,
	weigh: weigh512, halve: halve512, blocks: blocks512, totals: totals512,
	absorb: absorb512, thin: thin512, faint: faint512, compare: compare512, bare: bare512,
	tilt: tilt512, lightCross: lightCross512, lightPowers: lightPowers512,
	times: times512, shape: shape512, smear: smear512, products: products512,
}

//go:noescape
func far512(g, h, r, d []float64, f *kernelFar, l *kernelLine)

//go:noescape
func near512(g, h, r, d []float64, l *kernelLine)

//go:noescape
func edge512(k, r []float64, l *kernelLine)

//go:noescape
func slope512(s *kernelSums, w, r, g, h []float64, l *kernelLine)

//go:noescape
func cross512(s *kernelSums, w, g, h []float64, l *kernelLine)

//go:noescape
func powers512(s *[numPowers]lanes, w, v []float64, l *kernelLine)

//go:noescape
func edgeSlope512(s *kernelSums, w, r, k []float64, l *kernelLine)

//go:noescape
func peak512(s *kernelSums, w, k, g, h []float64, l *kernelLine)

//go:noescape
func rootCross512(s *kernelSums, w, k, g, h []float64, l *kernelLine)

//go:noescape
func weigh2(w, sigma []float64)

//go:noescape
func halve2(w, d, w0, d0, w1, d1 []float64)

//go:noescape
func blocks2(run []densitySums, w, d []float64)

//go:noescape
func weigh512(w, sigma []float64)

//go:noescape
func halve512(w, d, w0, d0, w1, d1 []float64)

//go:noescape
func blocks512(run []densitySums, w, d []float64)

//go:noescape
func totals2(t []float64, s []lanes)

//go:noescape
func totals512(t []float64, s []lanes)
