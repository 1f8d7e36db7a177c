package fit

import (
	"math"

	"fallshadow/model/bose"
)

// problem is one picture at one level under one template: the sum of squares, its gradient
// and normal matrix in all parameters, in one pass over the pixels with no Jacobian stored.
//
// Pixels outside the blur region carry only the thermal part and light. There every column
// of the Jacobian is a monomial of degree up to two in the distance from the centre times
// g = g2(τ), h = g1(τ) or 1, with the law's factor a on the density and b on the light; so a
// row needs only sums of a², ab and b² times those, and the matrix follows from the sums
// (row moments). Pixels inside are blurred and summed directly (region.go).
type problem struct {
	level  *level // outside the room, where bins may be coarse against the pixels but not the cloud
	fine   *level // inside the room; its bins divide those of level
	tmpl   *template
	law    law
	blur   float64    // optical resolution, px rms
	room   room       // where the cloud is blurred pixel by pixel
	skip   []bool     // pixels of the level that a fit of the wings leaves out, or nil
	pull   *pull      // a measured number that is held, or nil
	number *numberTie // ties the thermal number to T and fugacity; nil: free
	ties   *tie       // what steers the fit; nil: every parameter by itself
	buf    *buffers
}

// buffers are one worker's rows and images, grown once and kept.
type buffers struct {
	x, wa, wab, wb, ra, rb, g, h []float64
	region                       regionBuffers
}

func (b *buffers) rows(n int) {
	if cap(b.x) < n {
		for _, p := range []*[]float64{&b.x, &b.wa, &b.wab, &b.wb, &b.ra, &b.rb, &b.g, &b.h} {
			*p = make([]float64, n)
		}
	}
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
	norm, slope    float64 // 1/g2(α), g1(α)/g2(α)
	light          [3]float64
	xc, yc, iw, ih float64
	r              float64 // whether the condensate is there
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
	g.norm, g.slope = 1/g2, bose.G1(math.Max(g.alpha, alphaFloor))/g2
	return g
}

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

// Normal implements the pass: F = Σρ², and where h and g are given JᵀJ and Jᵀρ over all
// parameters (numParams×numParams row by row). It returns +Inf for parameters that have no
// picture.
func (p *problem) normal(q *params, h, g []float64) float64 {
	geo := p.geometry(q, p.blurOn(p.level))
	if !(geo.v[0] > 0) || !(geo.v[1] > 0) || math.IsInf(geo.v[0]+geo.v[1], 1) || geo.alpha < 0 {
		return math.Inf(1)
	}
	full := h != nil
	var m moments
	p.buf.rows(p.level.w)
	in := p.room.bounds(p.level)
	for j := range p.level.h {
		a, b := in.gap(j, p.level.w)
		p.row(&geo, j, 0, a, full, &m)
		p.row(&geo, j, b, p.level.w, full, &m)
	}
	if full {
		m.assemble(&geo, h, g)
	}
	return m.rr + p.regionNormal(q, &geo, p.inside(in), h, g)
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

// row adds the pixels [i0,i1) of row j.
func (p *problem) row(geo *geometry, j, i0, i1 int, full bool, m *moments) {
	n := p.fillRow(geo, j, i0, i1, full, m)
	if n == 0 || !full {
		return
	}
	y := p.level.at(j) - geo.y0
	m.rows(p.buf, n, y)
}

// fillRow computes the pixels of a row into the buffers, leaving out bad ones, and returns how
// many there are: X, g, h, and the products of the law's factors a, b and the residual ρ.
func (p *problem) fillRow(geo *geometry, j, i0, i1 int, full bool, m *moments) int {
	l, b := p.level, p.buf
	y := l.at(j) - geo.y0
	yy, xy := 0.5*geo.ayy*y*y+geo.alpha, geo.axy*y
	rowLight := geo.light[0] + geo.light[2]*(l.at(j)-geo.yc)*geo.ih
	n := 0
	rr := 0.0
	k := math.Exp(rowLight + geo.light[1]*(l.at(i0)-geo.xc)*geo.iw)
	kStep := math.Exp(geo.light[1] * float64(l.bin) * geo.iw)
	var walk walk
	for i := i0; i < i1; i, k = i+1, k*kStep {
		o := j*l.w + i
		c := l.count[o]
		if c == 0 || (p.skip != nil && p.skip[o]) {
			continue
		}
		x := l.at(i) - geo.x0
		tau := x*(0.5*geo.axx*x+xy) + yy
		var g, h float64
		if tau < farTau+geo.alpha {
			g, h = boseFast(tau)
			norm := geo.norm
			if p.tmpl.excess != nil {
				norm *= geo.excess(p.tmpl.excess, x, y)
			}
			g *= norm
			h *= norm
		}
		if l.linear {
			w := c / (l.sigma * l.sigma)
			r := l.atoms[o] - geo.ampGrown*g - rowLight - geo.light[1]*(l.at(i)-geo.xc)*geo.iw
			rr += r * r * w
			b.wa[n], b.wab[n], b.wb[n] = w, w, w
			b.ra[n], b.rb[n] = -w*r, -w*r
		} else {
			t, td, ts := walk.transmit(&p.law, geo.ampGrown*g, k*l.probe[o])
			r, iv, lambda := l.slope(o, k*t)
			rr += r * r * iv
			da, db := -lambda*k*td, -lambda*k*(t+ts)
			b.wa[n], b.wab[n], b.wb[n] = da*da*iv, da*db*iv, db*db*iv
			b.ra[n], b.rb[n] = da*r*iv, db*r*iv
		}
		b.x[n], b.g[n], b.h[n] = x, g, h
		if full {
			n++
		}
	}
	m.rr += rr
	return n
}

// slope returns of bin o the residual r = A − κ L over its variance V, 1/V, and λ, so that the
// sum of squares is Σ r²/V with ∂(r/√V)/∂κ = −λ/√V.
//
// That sum is the fit to both frames with the true light profiled out: V = v_A + κ² v_L +
// (1−κ)² v_D with v_A frozen, and λ = L + r(κ v_L − (1−κ) v_D)/V is the estimate of the light
// from both frames, which is not correlated with r. The noise of L alone would bias the scale.
func (l *level) slope(o int, kappa float64) (r, iv, lambda float64) {
	vl, vd := l.variances(o)
	dark := 1 - kappa
	iv = 1 / (l.varAtoms[o] + kappa*kappa*vl + dark*dark*vd)
	r = l.atoms[o] - kappa*l.light[o]
	return r, iv, l.light[o] + r*iv*(kappa*vl-dark*vd)
}

// rows adds the sums over n buffered pixels of a row at distance y from the centre.
func (m *moments) rows(b *buffers, n int, y float64) {
	var gg, gh0, gh1, gh2, hh0, hh1, hh2, hh3, hh4 float64
	var gl0, gl1, hl0, hl1, hl2, hl3, ll0, ll1, ll2 float64
	var rg, rh0, rh1, rh2, rl0, rl1 float64
	xs, gs, hs := b.x[:n], b.g[:n], b.h[:n]
	wa, wab, wb, ra, rb := b.wa[:n], b.wab[:n], b.wb[:n], b.ra[:n], b.rb[:n]
	for i, x := range xs {
		bb, e := wb[i], rb[i]
		bx := bb * x
		ll0 += bb
		ll1 += bx
		ll2 += bx * x
		rl0 += e
		rl1 += e * x
		g := gs[i]
		if g == 0 {
			continue
		}
		h, a := hs[i], wa[i]
		ag, ah, x2 := a*g, a*h, x*x
		gg += ag * g
		t := ag * h
		gh0 += t
		gh1 += t * x
		gh2 += t * x2
		t = ah * h
		tx := t * x
		hh0 += t
		hh1 += tx
		hh2 += t * x2
		hh3 += tx * x2
		hh4 += t * x2 * x2
		ab := wab[i]
		t = ab * g
		gl0 += t
		gl1 += t * x
		t = ab * h
		tx = t * x
		hl0 += t
		hl1 += tx
		hl2 += t * x2
		hl3 += tx * x2
		r := ra[i]
		rg += r * g
		t = r * h
		rh0 += t
		rh1 += t * x
		rh2 += t * x2
	}
	m.gg += gg
	m.rg += rg
	spread3(&m.gh, y, gh0, gh1, gh2)
	spread3(&m.rh, y, rh0, rh1, rh2)
	spread3(&m.ll, y, ll0, ll1, ll2)
	m.gl[0][0] += gl0
	m.gl[1][0] += gl1
	m.gl[0][1] += gl0 * y
	m.rl[0][0] += rl0
	m.rl[1][0] += rl1
	m.rl[0][1] += rl0 * y
	hl := [4]float64{hl0, hl1, hl2, hl3}
	hh := [5]float64{hh0, hh1, hh2, hh3, hh4}
	for i, v := range hl {
		for k := 0; i+k < 4; k++ {
			m.hl[i][k] += v
			v *= y
		}
	}
	for i, v := range hh {
		for k := 0; i+k < 5; k++ {
			m.hh[i][k] += v
			v *= y
		}
	}
}

func spread3(dst *[3][3]float64, y, s0, s1, s2 float64) {
	dst[0][0] += s0
	dst[0][1] += s0 * y
	dst[0][2] += s0 * y * y
	dst[1][0] += s1
	dst[1][1] += s1 * y
	dst[2][0] += s2
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
	if geo.amp != 0 {
		c[pThermal][basisG] = geo.ampGrown / geo.amp
	} else {
		c[pThermal][basisG] = math.Sqrt(geo.share[0] * geo.share[1])
	}
	a, cs, sn := geo.ampGrown, geo.cos, geo.sin
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
	c[pLight][basisL] = 1
	c[pLightX][basisL], c[pLightX][basisL+1] = (geo.x0-geo.xc)*geo.iw, geo.iw
	c[pLightY][basisL], c[pLightY][basisL+2] = (geo.y0-geo.yc)*geo.ih, geo.ih
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
