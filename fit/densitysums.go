package fit

import "fallshadow/model/bose"

// densityMoments are the sums over the image, those with g, h, k and the background 1
// indexed by the powers of X and Y.
type densityMoments struct {
	rr, rg, rc, gg, cc, gc float64
	r                      [3]float64 // times 1, X, Y
	rh, rk, gh, gk, ch, ck [3][3]float64
	g, c                   [2][2]float64
	h, k                   [4][4]float64
	hh, kk, hk             [5][5]float64
}

// fold adds the sums of a row at Y = y to the moments and clears them.
func (p *densityProblem) fold(y float64, condensate, full bool) {
	m, s := &p.moments, &p.total
	n := sumRC
	if !full {
		n = kernelLanes
	}
	p.kernels.totals(s[:n], p.sum[:n])
	y2 := y * y
	m.rr += s[sumRR]
	r0 := s[sumR0]
	m.r[0] += r0
	m.r[1] += s[sumR1]
	m.r[2] += y * r0
	m.rg += s[sumRG]
	fold2(&m.rh, s[sumRH0:sumRH2+1], y, y2)
	if full {
		m.gg += s[sumGG]
		fold1(&m.g, s[sumG0:sumG1+1], y)
		fold2(&m.gh, s[sumGH0:sumGH2+1], y, y2)
		fold3(&m.h, s[sumH0:sumH3+1], y, y2)
		fold4(&m.hh, s[sumHH0:sumHH4+1], y, y2)
	}
	if condensate {
		p.foldCondensate(y, y2, full)
	}
}

func (p *densityProblem) foldCondensate(y, y2 float64, full bool) {
	m, s := &p.moments, &p.total
	n := numSums
	if !full {
		n = sumRC + kernelLanes
	}
	p.kernels.totals(s[sumRC:n], p.sum[sumRC:n])
	m.rc += s[sumRC]
	fold2(&m.rk, s[sumRK0:sumRK2+1], y, y2)
	if !full {
		return
	}
	m.cc += s[sumCC]
	fold1(&m.c, s[sumC0:sumC1+1], y)
	m.gc += s[sumGC]
	fold2(&m.ch, s[sumCH0:sumCH2+1], y, y2)
	fold2(&m.ck, s[sumCK0:sumCK2+1], y, y2)
	fold2(&m.gk, s[sumGK0:sumGK2+1], y, y2)
	fold4(&m.hk, s[sumHK0:sumHK4+1], y, y2)
	fold3(&m.k, s[sumK0:sumK3+1], y, y2)
	fold4(&m.kk, s[sumKK0:sumKK4+1], y, y2)
}

// fold1 to fold4 add the sums of the powers of X up to that degree, times the powers of y
// that complete it.
func fold1(m *[2][2]float64, s []float64, y float64) {
	v := s[0]
	m[0][0] += v
	m[0][1] += v * y
	m[1][0] += s[1]
}

func fold2(m *[3][3]float64, s []float64, y, y2 float64) {
	v, u := s[0], s[1]
	m[0][0] += v
	m[0][1] += v * y
	m[0][2] += v * y2
	m[1][0] += u
	m[1][1] += u * y
	m[2][0] += s[2]
}

func fold3(m *[4][4]float64, s []float64, y, y2 float64) {
	v, u, t := s[0], s[1], s[2]
	m[0][0] += v
	m[0][1] += v * y
	m[0][2] += v * y2
	m[0][3] += v * (y2 * y)
	m[1][0] += u
	m[1][1] += u * y
	m[1][2] += u * y2
	m[2][0] += t
	m[2][1] += t * y
	m[3][0] += s[3]
}

func fold4(m *[5][5]float64, s []float64, y, y2 float64) {
	v, u, t, q := s[0], s[1], s[2], s[3]
	m[0][0] += v
	m[0][1] += v * y
	m[0][2] += v * y2
	m[0][3] += v * (y2 * y)
	m[0][4] += v * (y2 * y2)
	m[1][0] += u
	m[1][1] += u * y
	m[1][2] += u * y2
	m[1][3] += u * (y2 * y)
	m[2][0] += t
	m[2][1] += t * y
	m[2][2] += t * y2
	m[3][0] += q
	m[3][1] += q * y
	m[4][0] += s[4]
}

// The basis of the derivatives: g, h times the five monomials, c, k times the five
// monomials, and the background 1, X, Y.
const (
	baseG     = 0
	baseH     = 1
	baseC     = 6
	baseK     = 7
	baseLight = 12
	numBase   = 15
)

// The monomials that h and k are multiplied with: XX, XY, YY, X, Y.
var (
	powerX = [5]int{2, 1, 0, 1, 0}
	powerY = [5]int{0, 1, 2, 0, 1}
	lightX = [3]int{0, 1, 0}
	lightY = [3]int{0, 0, 1}
)

type densityColumns [NumDensity][numBase]float64

// columns are the derivatives by the parameters as combinations of the basis, c and s being
// the cosine and sine of the angle: u = unit·(cX + sY), v = unit·(cY − sX).
func (p *densityProblem) columns() (m densityColumns) {
	geo, l, q := &p.geo, p.level, p.geo.p
	c, s, unit := geo.cos, geo.sin, geo.unit
	uu, vv, uv := [3]float64{c * c, 2 * c * s, s * s}, [3]float64{s * s, -2 * c * s, c * c}, [3]float64{-c * s, c*c - s*s, c * s}
	m[DensityThermal][baseG] = 1 / bose.Zeta2
	m[DensityPeak][baseC] = 1
	for _, part := range [...]struct {
		base, axis1, axis2 int
		i1, i2, slope      float64
	}{
		{baseH, DensityWidth1, DensityWidth2, geo.inv[0], geo.inv[1], -q[DensityThermal] / bose.Zeta2},
		{baseK, DensityRadius1, DensityRadius2, geo.inv[2], geo.inv[3], -3 * q[DensityPeak]},
	} {
		area := part.slope * unit * unit
		for k := range 3 {
			m[part.axis1][part.base+k] = -area * uu[k] * part.i1 / q[part.axis1]
			m[part.axis2][part.base+k] = -area * vv[k] * part.i2 / q[part.axis2]
			m[DensityAngle][part.base+k] = area * uv[k] * (part.i1 - part.i2)
		}
		f1, f2, x, y := unit*part.slope*part.i1, unit*part.slope*part.i2, part.base+3, part.base+4
		m[DensityX][x], m[DensityX][y] = -c*c*f1-s*s*f2, c*s*(f2-f1)
		m[DensityY][x], m[DensityY][y] = c*s*(f2-f1), -s*s*f1-c*c*f2
	}
	m[DensityLight][baseLight] = 1
	m[DensityLightX][baseLight] = (q[DensityX] - 0.5*float64(l.fullW-1)) / float64(l.fullW)
	m[DensityLightX][baseLight+1] = unit / float64(l.fullW)
	m[DensityLightY][baseLight] = (q[DensityY] - 0.5*float64(l.fullH-1)) / float64(l.fullH)
	m[DensityLightY][baseLight+2] = unit / float64(l.fullH)
	return m
}

// products are the sums of the products of two functions of the basis, but for the
// background with itself.
func (m *densityMoments) products() (s [numBase][numBase]float64) {
	s[baseG][baseG], s[baseG][baseC], s[baseC][baseC] = m.gg, m.gc, m.cc
	for i := range 5 {
		x, y := powerX[i], powerY[i]
		s[baseG][baseH+i], s[baseG][baseK+i] = m.gh[x][y], m.gk[x][y]
		s[baseC][baseH+i], s[baseC][baseK+i] = m.ch[x][y], m.ck[x][y]
		for j := range 5 {
			a, b := x+powerX[j], y+powerY[j]
			s[baseH+i][baseH+j], s[baseK+i][baseK+j], s[baseH+i][baseK+j] = m.hh[a][b], m.kk[a][b], m.hk[a][b]
		}
		for j := range 3 {
			a, b := x+lightX[j], y+lightY[j]
			s[baseH+i][baseLight+j], s[baseK+i][baseLight+j] = m.h[a][b], m.k[a][b]
		}
	}
	for j := range 3 {
		s[baseG][baseLight+j], s[baseC][baseLight+j] = m.g[lightX[j]][lightY[j]], m.c[lightX[j]][lightY[j]]
	}
	for i := range 5 { // c stands before k but after h in the basis
		s[baseH+i][baseC] = s[baseC][baseH+i]
	}
	return s
}

// assemble fills the gradient, and the normal matrix or its kept copy.
func (p *densityProblem) assemble(h, g []float64, full bool) {
	if g == nil {
		return
	}
	m := &p.moments
	c := p.columns()
	var r [numBase]float64
	r[baseG], r[baseC] = m.rg, m.rc
	for i := range 5 {
		r[baseH+i], r[baseK+i] = m.rh[powerX[i]][powerY[i]], m.rk[powerX[i]][powerY[i]]
	}
	copy(r[baseLight:], m.r[:])
	for i := range c {
		g[i] = 0
		for k, v := range c[i] {
			g[i] += v * r[k]
		}
	}
	switch {
	case h == nil:
	case full:
		p.matrix(h, &c)
	default:
		copy(h, p.normal[:])
	}
}

// matrix fills h with C S Cᵀ, S being the products of the basis and C the columns.
func (p *densityProblem) matrix(h []float64, c *densityColumns) {
	s := p.moments.products()
	for i := range numBase {
		for k := range i {
			s[i][k] = s[k][i]
		}
	}
	for i := range NumDensity {
		var t [numBase]float64
		for k, v := range c[i] {
			if v != 0 {
				for j := range t {
					t[j] += v * s[k][j]
				}
			}
		}
		for j := range i + 1 {
			v := 0.0
			for k, w := range c[j] {
				v += t[k] * w
			}
			h[i*NumDensity+j], h[j*NumDensity+i] = v, v
		}
	}
	l := &p.level.light
	for k, at := range [6][2]int{{0, 0}, {0, 1}, {0, 2}, {1, 1}, {1, 2}, {2, 2}} {
		i, j := DensityLight+at[0], DensityLight+at[1]
		h[i*NumDensity+j], h[j*NumDensity+i] = l[k], l[k]
	}
}
