package fit

import (
	"math"

	"fallshadow/model/bose"
)

// densitySkip is the t beyond which e^−t is below 1e-10 and only the background is left.
const densitySkip = 23

// densityKept is for how many passes over the full image one matrix serves.
const densityKept = 3

// densityProblem is χ² of one level with its gradient and normal matrix, as fit/lm asks for
// it. Along a row every derivative is g, h or k times a monomial of degree up to two in the
// coordinates, or c = k³, or the background: so a row needs a few sums, and the matrix
// follows from the sums over the rows. No Jacobian is stored.
type densityProblem struct {
	level *densityLevel
	// The matrix is summed on binned levels, in the first pass over the full image, and from
	// the fourth on, where a fit is slow because it has changed. Else it is the one kept.
	passes int
	normal [NumDensity * NumDensity]float64

	kernels    *kernelSet
	g, h, k, r []float64
	tail       []float64
	geo        densityGeometry
	bose       boseRow
	moments    densityMoments
	sum        kernelSums
	total      kernelTotals
}

// densityGeometry holds what the parameters mean for a pass. Lengths are in units of the
// width along axis 1, from the centre: X along the row, Y along the column.
type densityGeometry struct {
	p             *DensityParams
	unit          float64
	cos, sin      float64
	inv           [4]float64 // 1/σ₁², 1/σ₂², 1/R₁², 1/R₂² in 1/px²
	t20, t11, t02 float64    // t = t20 X² + t11 XY + t02 Y²
	q20, q11, q02 float64
	x0, dx        float64 // X of the first column, and the step
}

// set prepares a pass over level l at p, and says whether p has a picture.
func (geo *densityGeometry) set(p *DensityParams, l *densityLevel) bool {
	unit := math.Abs(p[DensityWidth1])
	geo.p, geo.unit, geo.dx, geo.x0 = p, unit, float64(l.bin)/unit, (l.at(0)-p[DensityX])/unit
	geo.sin, geo.cos = math.Sincos(p[DensityAngle])
	for i, k := range [...]int{DensityWidth1, DensityWidth2, DensityRadius1, DensityRadius2} {
		geo.inv[i] = 1 / (p[k] * p[k])
	}
	quadratic := func(a, b float64) (xx, xy, yy float64) {
		c, s, u := geo.cos, geo.sin, unit*unit
		return u * (c*c*a + s*s*b), 2 * u * c * s * (a - b), u * (s*s*a + c*c*b)
	}
	geo.t20, geo.t11, geo.t02 = quadratic(0.5*geo.inv[0], 0.5*geo.inv[1])
	geo.q20, geo.q11, geo.q02 = quadratic(geo.inv[2], geo.inv[3])
	sum := geo.q20 + geo.q02 + geo.t20 + geo.t02
	for _, v := range p {
		sum += math.Abs(v)
	}
	return sum <= math.MaxFloat64
}

// Dim is the number of parameters.
func (p *densityProblem) Dim() int { return NumDensity }

// Normal is χ² at x with its normal matrix and half its gradient.
func (p *densityProblem) Normal(x, h, g []float64) float64 {
	l := p.level
	params := (*DensityParams)(x)
	if !p.geo.set(params, l) {
		return math.Inf(1)
	}
	n := l.stride + 2*kernelLanes
	for _, b := range [...]*[]float64{&p.g, &p.h, &p.k, &p.r, &p.tail} {
		*b = growTo(*b, n)
	}
	p.moments = densityMoments{}
	full := h != nil && (l.bin > 1 || p.passes == 0 || p.passes >= densityKept)
	geo := &p.geo
	p.bose.kernels, p.bose.x0 = p.kernels, geo.x0
	p.bose.line = kernelLine{
		dx: geo.dx, db: params[DensityLightX] * float64(l.bin) / float64(l.fullW),
		t2: geo.t20, amp: params[DensityThermal] * (1 / bose.Zeta2), q2: geo.q20, peak: params[DensityPeak],
	}
	p.bose.bend()
	for j := range l.h {
		p.row(j, full)
	}
	p.assemble(h, g, full)
	if full {
		copy(p.normal[:], h)
	}
	p.passes++
	return p.moments.rr
}

// row adds row j to the moments.
func (p *densityProblem) row(j int, full bool) {
	l, geo, params, bose := p.level, &p.geo, p.geo.p, &p.bose
	y := (l.at(j) - params[DensityY]) / geo.unit
	bose.b0 = params[DensityLight] + params[DensityLightY]*l.rowY(j) + params[DensityLightX]*l.columnX(0)
	line := &bose.line
	line.t1, line.t0 = geo.t11*y, geo.t02*y*y
	line.q1, line.q0 = geo.q11*y, geo.q02*y*y
	a, b := bose.below(densitySkip, l.stride)
	ca, cb := bose.columns(line.q2, line.q1, line.q0-1, l.stride)
	ca, cb = ca&^(kernelLanes-1), groups(cb)
	switch {
	case a >= b:
		a, b = ca, cb
	case ca < cb:
		a, b = min(a, ca), max(b, cb)
	}
	a, b = a&^(densityBlock-1), (b+densityBlock-1)&^(densityBlock-1)
	p.background(j, a, b, y)
	if a < b {
		bose.fill(p.g, p.h, p.r, p.pixels(j), a, b)
		p.sums(j, a, b, ca, cb, full)
		p.fold(y, ca < cb, full)
	}
}

// background adds the pixels of row j outside [a,b), whose model is the background.
func (p *densityProblem) background(j, a, b int, y float64) {
	l, m, line := p.level, &p.moments, &p.bose.line
	if a == 0 && b == l.stride {
		return
	}
	run := l.running[j*(l.stride/densityBlock+1) : (j+1)*(l.stride/densityBlock+1)]
	s := run[len(run)-1].less(&run[b/densityBlock])
	s.add(&run[a/densityBlock])
	b0, db := p.bose.b0, line.db
	r0 := b0*s[0] + db*s[1] - s[3]
	ri := b0*s[1] + db*s[2] - s[4]
	m.rr += b0*(b0*s[0]+2*db*s[1]-2*s[3]) + db*(db*s[2]-2*s[4]) + s[5]
	m.r[0] += r0
	m.r[1] += p.geo.x0*r0 + p.geo.dx*ri
	m.r[2] += y * r0
}

// pixels are the data of row j, with what the last group of a run may read beyond its end:
// the next row, or zeros in a copy.
func (p *densityProblem) pixels(j int) []float64 {
	d := p.level.data[j*p.level.stride:]
	if len(d) >= p.level.stride+kernelLanes {
		return d
	}
	clear(p.tail)
	copy(p.tail, d)
	return p.tail
}

// sums runs the kernels over [a,b) of row j, with the condensate in [ca,cb).
func (p *densityProblem) sums(j, a, b, ca, cb int, full bool) {
	k, o := p.kernels, j*p.level.stride
	weight := p.level.weight[o:]
	if ca < cb {
		k.edge(p.k[ca:cb], p.r[ca:cb], p.bose.from(ca))
	}
	line := p.bose.from(a)
	w, g, h, r := weight[a:b], p.g[a:b], p.h[a:b], p.r[a:b]
	k.slope(&p.sum, w, r, g, h, line)
	if full {
		k.cross(&p.sum, w, g, h, line)
		k.powers((*[numPowers]lanes)(p.sum[sumH0:]), w, h, line)
	}
	if ca >= cb {
		return
	}
	line = p.bose.from(ca)
	w, g, h, r = weight[ca:cb], p.g[ca:cb], p.h[ca:cb], p.r[ca:cb]
	root := p.k[ca:cb]
	k.edgeSlope(&p.sum, w, r, root, line)
	if full {
		k.peak(&p.sum, w, root, g, h, line)
		k.rootCross(&p.sum, w, root, g, h, line)
		k.powers((*[numPowers]lanes)(p.sum[sumK0:]), w, root, line)
	}
}
