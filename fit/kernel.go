package fit

import "sync"

// The kernels run along a row in groups of kernelLanes pixels, one pixel a lane. Every sum
// is kept lane by lane, in the order of the pixels, and every multiplication that feeds an
// addition is either fused or rounded on its own as written in kernel_scalar.go: so a
// kernel in vector instructions gives the scalar one's exact bits.
const kernelLanes = 8

type lanes [kernelLanes]float64

// kernelFar is the state of the recurrence for z = e^−t along a row on which t is a
// parabola: z falls by the ratio r from group to group, and r by q.
type kernelFar struct {
	z, r lanes
	q    float64
}

// kernelLine is a row's arithmetic from the first pixel of a run on: the pixel i lies at
// X = x0 + i·dx, where the background is b0 + i·db, t = (t2·X + t1)·X + t0 and likewise q.
type kernelLine struct {
	x0, dx     float64
	b0, db     float64
	t2, t1, t0 float64
	amp        float64 // of the thermal part, over g₂(1)
	q2, q1, q0 float64
	peak       float64 // of the condensate
}

// The sums that a run of pixels adds to, named by what is multiplied with the weight: r the
// residual, g and h the Bose functions, c = k³ and k = √(1−q) of the condensate, and the
// power of X. They stand in groups that are totalled together.
const (
	sumRR = iota
	sumR0
	sumR1
	sumRG
	sumRH0
	sumRH1
	sumRH2
	sumGG
	sumG0
	sumG1
	sumGH0
	sumGH1
	sumGH2
	sumH0
	sumH1
	sumH2
	sumH3
	sumHH0
	sumHH1
	sumHH2
	sumHH3
	sumHH4
	_
	_
	sumRC
	sumRK0
	sumRK1
	sumRK2
	sumCC
	sumC0
	sumC1
	sumGC
	sumCH0
	sumCH1
	sumCH2
	sumCK0
	sumCK1
	sumCK2
	_
	_
	sumGK0
	sumGK1
	sumGK2
	sumHK0
	sumHK1
	sumHK2
	sumHK3
	sumHK4
	sumK0
	sumK1
	sumK2
	sumK3
	sumKK0
	sumKK1
	sumKK2
	sumKK3
	sumKK4
	numSums = (iota + kernelLanes - 1) / kernelLanes * kernelLanes
)

// kernelSums are the sums lane by lane, kernelTotals those over the lanes.
type (
	kernelSums   [numSums]lanes
	kernelTotals [numSums]float64
)

// numPowers is how many sums the kernel for powers adds to.
const numPowers = sumHH4 - sumH0 + 1

// kernelSet is one implementation of the kernels. All slices of a call have the same
// length, a multiple of kernelLanes.
type kernelSet struct {
	name string
	// far fills g, h and the residual r = model − data of the thermal part and the background
	// where t ≥ boseSplit.
	far func(g, h, r, d []float64, f *kernelFar, l *kernelLine)
	// near does so where t ≤ boseSplit; beyond it the values are wrong but finite.
	near func(g, h, r, d []float64, l *kernelLine)
	// edge fills k = √max(0, 1−q) and adds the condensate, peak·k³, to the residual r.
	edge func(k, r []float64, l *kernelLine)
	// slope adds to the sums up to sumRH2, cross from there to sumGH2, and powers w·v times 1
	// to X³ and w·v² times 1 to X⁴ to nine of them.
	slope  func(s *kernelSums, w, r, g, h []float64, l *kernelLine)
	cross  func(s *kernelSums, w, g, h []float64, l *kernelLine)
	powers func(s *[numPowers]lanes, w, v []float64, l *kernelLine)
	// edgeSlope adds to the sums up to sumRK2, peak from there on, rootCross up to sumHK4.
	edgeSlope func(s *kernelSums, w, r, k []float64, l *kernelLine)
	peak      func(s *kernelSums, w, k, g, h []float64, l *kernelLine)
	rootCross func(s *kernelSums, w, k, g, h []float64, l *kernelLine)
	// weigh fills w with 1/σ².
	weigh func(w, sigma []float64)
	// halve fills w and d with the weights and the weighted means of pairs of pixels from two
	// rows, which are twice as long.
	halve func(w, d, w0, d0, w1, d1 []float64)
	// blocks fills run, from run[0] on, with the sums up to each block of densityBlock pixels.
	blocks func(run []densitySums, w, d []float64)
	// totals fills t with the sums over the lanes of s, of which there are a multiple of
	// kernelLanes, and clears s.
	totals func(t []float64, s []lanes)

	// absorb carries d = σ0n/a through the absorption law: t is the transmitted fraction,
	// d becomes −∂t/∂d, c is t and its derivative by the logarithm of the light together, and
	// g and h are multiplied with the new d. s is the smooth reference. thin does so where
	// d ≤ thinMost, faint where d ≤ faintMost.
	absorb func(t, c, d, g, h, s []float64, l *kernelLight)
	thin   func(t, c, d, g, h, s []float64, l *kernelLight)
	faint  func(t, c, d, g, h, s []float64, l *kernelLight)
	// compare fills the weight w and the weighted residual e of derivatives, both over their
	// common factor, from transmission t, counts a, reference b, smooth reference s and the
	// frozen variance v of a, and adds the sum of squares to rr. bare does so where t = 1, and
	// adds to the sums up to passLL2 instead.
	compare func(rr *lanes, w, e, t, a, b, s, v []float64, l *kernelLight)
	bare    func(sum *passSums, a, b, s, v []float64, l *kernelLight, line *kernelLine)
	// tilt adds to the sums from passRL0 to passRH2, lightCross from there to passGL1,
	// lightPowers to the others.
	tilt        func(s *passSums, w, e, g, h, c []float64, l *kernelLine)
	lightCross  func(s *passSums, w, g, h, c []float64, l *kernelLine)
	lightPowers func(s *passSums, w, h, c []float64, l *kernelLine)
	// times fills dst with v·w.
	times func(dst, v, w []float64)
	// shape fills dst with the derivative that f makes of g, h and k.
	shape func(dst, g, h, k []float64, f *kernelShape, l *kernelLine)
	// smear fills dst with the sums of src from at on, steps apart, times the taps of a
	// symmetric kernel.
	smear func(dst, src []float64, at, step int, taps []float64)
	// products adds the products of productRows rows with productColumns columns, each of n
	// numbers and stride apart.
	products func(s *productSums, rows, columns []float64, stride, n int)
}

// bestKernels asks the processor once: where it is a virtual one each question takes long.
var bestKernels = sync.OnceValue(func() *kernelSet {
	all := allKernels()
	return all[len(all)-1]
})
