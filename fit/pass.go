package fit

import (
	"math"

	"fallshadow/model/bose"
)

// problem is one picture at one level under one template: the sum of squares, its gradient
// and normal matrix in all parameters, in one pass over the pixels with no Jacobian stored.
//
// Pixels outside the room carry only the thermal part and light. There a column of the
// Jacobian is m·g, or m·h times a monomial of degree up to two in the distance from the
// centre, or −c times 1, X or Y, all with one factor: g = g2(τ), h = g1(τ), m = −∂t/∂d and
// c = ∂(k t)/k∂ ln k of the transmission t (forward.go). So a row needs a few sums, and the
// matrix follows from the sums over the rows. Pixels in the room are blurred and multiplied
// out (roompass.go).
type problem struct {
	level  *level // outside the room, where bins may be coarse against the pixels but not the cloud
	fine   *level // inside the room; its bins divide those of level
	tmpl   *template
	law    law
	blur   float64    // optical resolution, px rms
	room   room       // where the cloud is blurred pixel by pixel
	pull   *pull      // a measured number that is held, or nil
	number *numberTie // ties the thermal number to T and fugacity; nil: free
	ties   *tie       // what steers the fit; nil: every parameter by itself
	buf    *buffers
}

// buffers are one worker's rows and images, grown once and kept.
type buffers struct {
	forward forward
	sums    passSums
	totals  passTotals
	region  regionBuffers
}

// geometry holds what the parameters mean for a pass.
type geometry struct {
	x0, y0         float64
	amp, ampGrown  float64    // thermal peak, and after the growth of its widths by the blur
	axx, axy, ayy  float64    // inverse of the grown thermal shape
	cos, sin       float64    // of the thermal axes
	v, share       [2]float64 // grown variances, and the share of them that is the cloud's
	width          [2]float64 // roots of v
	alpha          float64
	unit, slope    float64 // of g in the depth: 1/(a g2(α)); g1(α)/g2(α)
	light          [3]float64
	xc, yc, iw, ih float64
}

func (p *problem) geometry(q *params, grow float64) geometry {
	g := geometry{
		x0: q[pX], y0: q[pY], amp: q[pThermal], alpha: q[pAlpha],
		light: [3]float64{q[pLight], q[pLightX], q[pLightY]},
		xc:    0.5 * float64(p.level.fullW-1), yc: 0.5 * float64(p.level.fullH-1),
		iw: 1 / float64(p.level.fullW), ih: 1 / float64(p.level.fullH),
	}
	e := p.tmpl.thermalOf(q)
	g.ampGrown = g.amp
	for i, s := range e.square {
		g.v[i] = s + grow
		g.share[i] = s / g.v[i]
		g.width[i] = math.Sqrt(g.v[i])
		g.ampGrown *= math.Sqrt(g.share[i])
	}
	g.cos, g.sin = math.Cos(e.angle), math.Sin(e.angle)
	a1, a2 := 1/g.v[0], 1/g.v[1]
	c, s := g.cos, g.sin
	g.axx, g.axy, g.ayy = c*c*a1+s*s*a2, c*s*(a1-a2), s*s*a1+c*c*a2
	g2 := bose.G2(g.alpha)
	g.unit, g.slope = 1/(p.scale()*g2), bose.G1(math.Max(g.alpha, alphaFloor))/g2
	return g
}

// scale is σ0n over the depth: a, or 1 on a linear level.
func (p *problem) scale() float64 {
	if p.level.linear {
		return 1
	}
	return p.law.a
}

// plane is the logarithm of the light's scale at x, y of the picture.
func (geo *geometry) plane(x, y float64) float64 {
	return geo.light[0] + geo.light[1]*(x-geo.xc)*geo.iw + geo.light[2]*(y-geo.yc)*geo.ih
}

// scale is that scale.
func (geo *geometry) scale(x, y float64) float64 { return math.Exp(geo.plane(x, y)) }

// excess returns the factor of the thermal part at x, y from the centre.
func (geo *geometry) excess(e *excess, x, y float64) float64 {
	u, v := x*geo.cos+y*geo.sin, y*geo.cos-x*geo.sin
	return e.at(u/geo.width[0], v/geo.width[1])
}

// alphaFloor is the smallest −ln z of a fitted fugacity: below it the cloud is saturated to
// one part in 10⁵ and the derivative diverges.
const alphaFloor = 1e-6

// farTau is where the thermal part has fallen to 1e-11 of its peak and only light is left.
const farTau = 25

// moments of one picture, indexed by powers of X and Y.
type moments struct {
	rr float64
	gg float64
	gh [3][3]float64
	hh [5][5]float64
	gl [2][2]float64 // g with light
	hl [4][4]float64
	ll [3][3]float64
	rg float64
	rh [3][3]float64
	rl [2][2]float64
}

// normal is the pass: F = Σρ², and where h and g are given JᵀJ and Jᵀρ over all
// parameters (numParams×numParams row by row). It returns +Inf for parameters that have no
// picture.
func (p *problem) normal(q *params, h, g []float64) float64 {
	geo := p.geometry(q, p.blurOn(p.level))
	if !(geo.v[0] > 0) || !(geo.v[1] > 0) || math.IsInf(geo.v[0]+geo.v[1], 1) || geo.alpha < 0 {
		return math.Inf(1)
	}
	in := p.room.bounds(p.level)
	m := p.outside(&geo, in, h != nil)
	if h != nil {
		m.assemble(&geo, h, g)
	}
	return m.rr + p.regionNormal(q, p.inside(in), h, g)
}

// outside sums the pixels outside the box.
func (p *problem) outside(geo *geometry, in box, full bool) (m moments) {
	b, f := p.buf, &p.buf.forward
	p.level.punch(in)
	f.set(p, p.level, p.level.plate, geo)
	for j := range p.level.h {
		f.line(j)
		x0, x1 := in.gap(j, p.level.w)
		x0, x1 = groups(x0), x1&^(kernelLanes-1)
		if x0 >= x1 {
			x0, x1 = 0, 0
		}
		b.outside(j, 0, x0, full)
		b.outside(j, x1, f.plate.stride, full)
		b.fold(&m, full)
	}
	return m
}

// outside adds columns [a,b) of row j to the sums.
func (b *buffers) outside(j, from, to int, full bool) {
	f := &b.forward
	x0, x1 := f.cloud()
	x0, x1 = min(max(x0, from), to), min(max(x1, from), to)
	if x0 >= x1 {
		x0, x1 = to, to
	}
	b.bare(j, from, x0)
	if x0 < x1 {
		f.fill(x0, x1)
		f.carry(j, x0, x1)
		f.compare(&b.sums[passRR], j, x0, x1, f.t[x0:x1])
		if full {
			b.add(x0, x1)
		}
	}
	b.bare(j, x1, to)
}

// bare adds columns that only carry light.
func (b *buffers) bare(j, from, to int) {
	f := &b.forward
	switch p, o := f.plate, j*f.plate.stride; {
	case from >= to:
	case f.linear:
		clear(f.d[from:to])
		clear(f.g[from:to])
		clear(f.h[from:to])
		f.carry(j, from, to)
		f.compare(&b.sums[passRR], j, from, to, f.t[from:to])
		b.add(from, to)
	default:
		f.kernels.bare(&b.sums, p.atoms[o+from:o+to], p.light[o+from:o+to], p.smooth[o+from:o+to], p.variance[o+from:o+to],
			f.lightFrom(from), f.bose.from(from))
	}
}

// add runs the kernels of the sums over columns [x0,x1).
func (b *buffers) add(x0, x1 int) {
	f := &b.forward
	k, line := f.kernels, f.bose.from(x0)
	w, e, g, h, c := f.w[x0:x1], f.e[x0:x1], f.g[x0:x1], f.h[x0:x1], f.c[x0:x1]
	k.tilt(&b.sums, w, e, g, h, c, line)
	k.lightCross(&b.sums, w, g, h, c, line)
	k.lightPowers(&b.sums, w, h, c, line)
}

// fold adds the sums of a row to the moments and clears them.
func (b *buffers) fold(m *moments, full bool) {
	s, y := &b.totals, b.forward.y
	b.forward.kernels.totals(s[:], b.sums[:])
	m.rr += s[passRR]
	if !full {
		return
	}
	y2 := y * y
	m.rg += s[passRG]
	m.gg += s[passGG]
	fold1(&m.rl, s[passRL0:passRL1+1], y)
	fold1(&m.gl, s[passGL0:passGL1+1], y)
	fold2(&m.ll, s[passLL0:passLL2+1], y, y2)
	fold2(&m.rh, s[passRH0:passRH2+1], y, y2)
	fold2(&m.gh, s[passGH0:passGH2+1], y, y2)
	fold3(&m.hl, s[passHL0:passHL3+1], y, y2)
	fold4(&m.hh, s[passHH0:passHH4+1], y, y2)
}

// blurOn is the variance of the blur in px²: resolution and the width of the level's bins.
func (p *problem) blurOn(l *level) float64 {
	bin := float64(l.bin)
	return p.blur*p.blur + bin*bin/12
}

// inside is a box of the level in bins of the fine level.
func (p *problem) inside(b box) box {
	f := p.level.bin / p.fine.bin
	return box{b.x0 * f, b.y0 * f, b.x1 * f, b.y1 * f}
}

// The basis of the columns outside the region: g; h times 1, X, Y, X², XY, Y²; light times 1, X, Y.
const (
	basisG   = 0
	basisH   = 1
	basisL   = 7
	numBasis = 10
)

var powersOf = [6][2]int{{0, 0}, {1, 0}, {0, 1}, {2, 0}, {1, 1}, {0, 2}}

// assemble turns the sums into the normal matrix and the gradient.
func (m *moments) assemble(geo *geometry, h, g []float64) {
	var s [numBasis][numBasis]float64
	var r [numBasis]float64
	s[0][0], r[0] = m.gg, m.rg
	for i, a := range powersOf {
		s[0][basisH+i] = m.gh[a[0]][a[1]]
		r[basisH+i] = m.rh[a[0]][a[1]]
		for k, b := range powersOf {
			s[basisH+i][basisH+k] = m.hh[a[0]+b[0]][a[1]+b[1]]
		}
		for k, b := range powersOf[:3] {
			s[basisH+i][basisL+k] = m.hl[a[0]+b[0]][a[1]+b[1]]
		}
	}
	for k, b := range powersOf[:3] {
		s[0][basisL+k] = m.gl[b[0]][b[1]]
		r[basisL+k] = m.rl[b[0]][b[1]]
		for i, a := range powersOf[:3] {
			s[basisL+i][basisL+k] = m.ll[a[0]+b[0]][a[1]+b[1]]
		}
	}
	for i := range numBasis {
		for k := range i {
			if s[i][k] == 0 {
				s[i][k] = s[k][i]
			}
		}
	}
	columns := geo.columns()
	project(&columns, &s, &r, h, g)
}

// columns writes each parameter's derivative as a combination of the basis.
func (geo *geometry) columns() [numParams][numBasis]float64 {
	var c [numParams][numBasis]float64
	c[pThermal][basisG] = geo.unit * math.Sqrt(geo.share[0]*geo.share[1])
	a, cs, sn := geo.ampGrown*geo.unit, geo.cos, geo.sin
	squares := [2][3]float64{{cs * cs, 2 * cs * sn, sn * sn}, {sn * sn, -2 * cs * sn, cs * cs}}
	for i, p := range [2]int{pWidth1, pWidth2} {
		c[p][basisG] = a * (1 - geo.share[i])
		for k, f := range squares[i] {
			c[p][basisH+3+k] = a * geo.share[i] / geo.v[i] * f
		}
	}
	c[pX][basisH+1], c[pX][basisH+2] = a*geo.axx, a*geo.axy
	c[pY][basisH+1], c[pY][basisH+2] = a*geo.axy, a*geo.ayy
	turn := -a * (1/geo.v[0] - 1/geo.v[1])
	for k, f := range [3]float64{-cs * sn, cs*cs - sn*sn, cs * sn} {
		c[pAngle][basisH+3+k] = turn * f
	}
	c[pAlpha][basisG], c[pAlpha][basisH] = a*geo.slope, -a
	c[pLight][basisL] = -1
	c[pLightX][basisL], c[pLightX][basisL+1] = (geo.xc-geo.x0)*geo.iw, -geo.iw
	c[pLightY][basisL], c[pLightY][basisL+2] = (geo.yc-geo.y0)*geo.ih, -geo.ih
	return c
}

// project adds C S Cᵀ to h and C r to g.
func project(c *[numParams][numBasis]float64, s *[numBasis][numBasis]float64, r *[numBasis]float64, h, g []float64) {
	for i := range numParams {
		var t [numBasis]float64
		sum := 0.0
		for k, f := range c[i] {
			if f == 0 {
				continue
			}
			sum += f * r[k]
			for l := range numBasis {
				t[l] += f * s[k][l]
			}
		}
		g[i] += sum
		for j := range numParams {
			v := 0.0
			for l, f := range c[j] {
				v += f * t[l]
			}
			h[i*numParams+j] += v
		}
	}
}
