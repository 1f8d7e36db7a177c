package fit

import "math"

// e^−x is 2^n e^−y with |y| ≤ ln 2/2, and e^−y a polynomial through Chebyshev nodes, with a
// relative error of 1e-12, or 1e-7 where it only has to bring a search near its end. Both are
// summed in pairs, which a processor works on side by side.
var (
	expForm = [9]float64{1, -0.99999999997972611, 0.49999999999797345, -0.16666666891537657, 0.041666666891448621,
		-0.0083332659996960337, 0.0013888821579429661, -0.00019915921443229871, 2.4876218509321009e-05}
	expRough = [6]float64{1.000000075454897, -1.00000001077157, 0.49998869378303307, -0.16666505260408432,
		0.041917507249622066, -0.008369148490822386}
)

const (
	minusLog2E = -1.4426950408889634
	// expMagic rounds to a whole number, which then stands in its low bits.
	expMagic = 3 << 51
)

// scalarExp is e^−x for |x| < 700, scalarExpRough nearly so.
func scalarExp(x float64) float64 {
	t := math.FMA(x, minusLog2E, expMagic)
	y := math.FMA(t-expMagic, math.Ln2, x)
	y2 := float64(y * y)
	y4 := float64(y2 * y2)
	a, b := math.FMA(expForm[1], y, expForm[0]), math.FMA(expForm[3], y, expForm[2])
	c, d := math.FMA(expForm[5], y, expForm[4]), math.FMA(expForm[7], y, expForm[6])
	d = math.FMA(expForm[8], y2, d)
	a, c = math.FMA(b, y2, a), math.FMA(d, y2, c)
	return exponent(math.FMA(c, y4, a), t)
}

func scalarExpRough(x float64) float64 {
	t := math.FMA(x, minusLog2E, expMagic)
	y := math.FMA(t-expMagic, math.Ln2, x)
	y2 := float64(y * y)
	a, b := math.FMA(expRough[1], y, expRough[0]), math.FMA(expRough[3], y, expRough[2])
	c := math.FMA(expRough[5], y, expRough[4])
	b = math.FMA(c, y2, b)
	return exponent(math.FMA(b, y2, a), t)
}

// exponent is p times two to the whole number in the low bits of t.
func exponent(p, t float64) float64 {
	return math.Float64frombits(math.Float64bits(p) + math.Float64bits(t)<<52)
}

// The depth equation u + s(1−e^−u) = d in units of a. The start is the root with
// u/(1+absorbBend·u) for 1−e^−u, or d−s where that is above it: at most 0.6 off for s ≤ 30.
// A step of fourth order and one of third leave an error of the transmission below 1e-9 for
// s ≤ 100, and rounding for s ≤ 10. Beyond absorbMost nothing is left of the light.
const (
	absorbBend = 0.7
	absorbMost = 690
	thinMost   = 0.01 // depth from which one step from 0 is off by less than 3e-10
	faintMost  = 1e-6 // depth whose square is all that counts beside it
)

func scalarAbsorb(t, c, d, g, h, s []float64, l *kernelLight) {
	n := len(t)
	c, d, g, h, s = c[:n], d[:n], g[:n], h[:n], s[:n]
	k := l.k
	for i := range t {
		j := i & (kernelLanes - 1)
		depth, sat := d[i], float64(float64(k[j]*s[i])*l.sat[j])
		if !(depth < absorbMost) {
			depth = absorbMost
		}
		y := math.FMA(depth, absorbBend, -1) - sat
		u := float64((y + math.Sqrt(math.FMA(y, y, float64(depth*(4*absorbBend))))) * (1 / (2 * absorbBend)))
		if !(depth-sat < u) {
			u = depth - sat
		}
		q := float64(sat * scalarExpRough(u))
		r := (depth - u) - sat + q
		p := 1 + q
		b := math.FMA(-r, math.FMA(q, 2.0/3, -1.0/3), float64(p*p))
		u += float64(math.FMA(float64(q*0.5), r, b)*r) / float64(p*b)
		e := scalarExp(u)
		q = float64(sat * e)
		r = (depth - u) - sat + q
		v := 1 / (1 + q)
		x := float64(r * v)
		q = float64(q * v)
		x = math.FMA(float64(float64(q*0.5)*x), x, x)
		e = math.FMA(-float64(e*x), math.FMA(-x, 0.5, 1), e)
		v = math.FMA(float64(q*x), v, v)
		m := float64(float64(e*l.pass[j]) * v)
		t[i] = math.FMA(e, l.pass[j], l.stray[j])
		c[i] = math.FMA(m, 1+sat, l.stray[j])
		d[i] = m
		g[i] = float64(g[i] * m)
		h[i] = float64(h[i] * m)
		k[j] = float64(k[j] * l.step[j])
	}
}

func scalarThin(t, c, d, g, h, s []float64, l *kernelLight) {
	n := len(t)
	c, d, g, h, s = c[:n], d[:n], g[:n], h[:n], s[:n]
	k := l.k
	for i := range t {
		j := i & (kernelLanes - 1)
		depth, sat := d[i], float64(float64(k[j]*s[i])*l.sat[j])
		p := 1 + sat
		b := math.FMA(-depth, math.FMA(sat, 2.0/3, -1.0/3), float64(p*p))
		w := 1 / float64(p*b)
		x := float64(float64(math.FMA(float64(sat*0.5), depth, b)*depth) * w)
		y := math.FMA(x, -1.0/24, 1.0/6)
		y = math.FMA(y, x, -0.5)
		y = math.FMA(y, x, 1)
		y = float64(y * x) // 1 − e^−x
		v := float64(b * w)
		z := float64(float64(sat*v) * y)
		f := math.FMA(z, z, z)
		f = math.FMA(f, z, z)
		v = math.FMA(f, v, v)
		e := 1 - y
		m := float64(float64(e*l.pass[j]) * v)
		t[i] = math.FMA(e, l.pass[j], l.stray[j])
		c[i] = math.FMA(m, p, l.stray[j])
		d[i] = m
		g[i] = float64(g[i] * m)
		h[i] = float64(h[i] * m)
		k[j] = float64(k[j] * l.step[j])
	}
}

func scalarFaint(t, c, d, g, h, s []float64, l *kernelLight) {
	n := len(t)
	c, d, g, h, s = c[:n], d[:n], g[:n], h[:n], s[:n]
	k := l.k
	for i := range t {
		j := i & (kernelLanes - 1)
		sat := float64(float64(k[j]*s[i]) * l.sat[j])
		p := 1 + sat
		w := 1 / p
		x := float64(d[i] * w)
		y := math.FMA(float64(float64(x*w)*-0.5), x, x) // 1 − e^−u
		v := math.FMA(float64(float64(sat*w)*y), w, w)
		e := 1 - y
		m := float64(float64(e*l.pass[j]) * v)
		t[i] = math.FMA(e, l.pass[j], l.stray[j])
		c[i] = math.FMA(m, p, l.stray[j])
		d[i] = m
		g[i] = float64(g[i] * m)
		h[i] = float64(h[i] * m)
		k[j] = float64(k[j] * l.step[j])
	}
}

// comparePixel returns, of one pixel, the weight and the weighted residual of the
// derivatives over their common factor, and the residual and its part in the sum.
func comparePixel(k, t, a, b, s, v float64, j int, l *kernelLight) (w, e, r, q float64) {
	kappa := float64(k * t)
	r = math.FMA(-kappa, b, a)
	vl := float64(math.FMA(s, l.shot[j], l.read[j]) * kappa)
	vd := float64((1 - kappa) * l.dark[j])
	iv := 1 / math.FMA(vd, 1-kappa, math.FMA(vl, kappa, v))
	q = float64(r * iv)
	f := float64(math.FMA(vl-vd, q, b) * k)
	return float64(float64(f*f) * iv), float64(f * q), r, q
}

func scalarCompare(rr *lanes, w, e, t, a, b, s, v []float64, l *kernelLight) {
	n := len(w)
	e, t, a, b, s, v = e[:n], t[:n], a[:n], b[:n], s[:n], v[:n]
	k := l.k
	for i := range w {
		j := i & (kernelLanes - 1)
		var r, q float64
		w[i], e[i], r, q = comparePixel(k[j], t[i], a[i], b[i], s[i], v[i], j, l)
		rr[j] = math.FMA(q, r, rr[j])
		k[j] = float64(k[j] * l.step[j])
	}
}

func scalarBare(sum *passSums, a, b, s, v []float64, l *kernelLight, line *kernelLine) {
	n := len(a)
	b, s, v = b[:n], s[:n], v[:n]
	k := l.k
	for i := range a {
		j := i & (kernelLanes - 1)
		x := math.FMA(float64(i), line.dx, line.x0)
		w, e, r, q := comparePixel(k[j], 1, a[i], b[i], s[i], v[i], j, l)
		sum[passRR][j] = math.FMA(q, r, sum[passRR][j])
		sum[passRL0][j] += e
		sum[passRL1][j] = math.FMA(e, x, sum[passRL1][j])
		wx := float64(w * x)
		sum[passLL0][j] += w
		sum[passLL1][j] += wx
		sum[passLL2][j] = math.FMA(wx, x, sum[passLL2][j])
		k[j] = float64(k[j] * l.step[j])
	}
}

func scalarTilt(s *passSums, w, e, g, h, c []float64, l *kernelLine) {
	n := len(w)
	e, g, h, c = e[:n], g[:n], h[:n], c[:n]
	for j := range kernelLanes {
		rl0, rl1, ll0, ll1, ll2 := s[passRL0][j], s[passRL1][j], s[passLL0][j], s[passLL1][j], s[passLL2][j]
		rg, rh0, rh1, rh2 := s[passRG][j], s[passRH0][j], s[passRH1][j], s[passRH2][j]
		for i := j; i < n; i += kernelLanes {
			x := math.FMA(float64(i), l.dx, l.x0)
			rc := float64(e[i] * c[i])
			rl0 += rc
			rl1 = math.FMA(rc, x, rl1)
			cc := float64(float64(w[i]*c[i]) * c[i])
			ccx := float64(cc * x)
			ll0 += cc
			ll1 += ccx
			ll2 = math.FMA(ccx, x, ll2)
			rg = math.FMA(e[i], g[i], rg)
			rh := float64(e[i] * h[i])
			rhx := float64(rh * x)
			rh0 += rh
			rh1 += rhx
			rh2 = math.FMA(rhx, x, rh2)
		}
		s[passRL0][j], s[passRL1][j], s[passLL0][j], s[passLL1][j], s[passLL2][j] = rl0, rl1, ll0, ll1, ll2
		s[passRG][j], s[passRH0][j], s[passRH1][j], s[passRH2][j] = rg, rh0, rh1, rh2
	}
}

func scalarLightCross(s *passSums, w, g, h, c []float64, l *kernelLine) {
	n := len(w)
	g, h, c = g[:n], h[:n], c[:n]
	for j := range kernelLanes {
		gg, gh0, gh1, gh2, gl0, gl1 := s[passGG][j], s[passGH0][j], s[passGH1][j], s[passGH2][j], s[passGL0][j], s[passGL1][j]
		for i := j; i < n; i += kernelLanes {
			x := math.FMA(float64(i), l.dx, l.x0)
			wg := float64(w[i] * g[i])
			gg = math.FMA(wg, g[i], gg)
			gc := float64(wg * c[i])
			gl0 += gc
			gl1 = math.FMA(gc, x, gl1)
			gh := float64(wg * h[i])
			ghx := float64(gh * x)
			gh0 += gh
			gh1 += ghx
			gh2 = math.FMA(ghx, x, gh2)
		}
		s[passGG][j], s[passGH0][j], s[passGH1][j], s[passGH2][j], s[passGL0][j], s[passGL1][j] = gg, gh0, gh1, gh2, gl0, gl1
	}
}

func scalarLightPowers(s *passSums, w, h, c []float64, l *kernelLine) {
	n := len(w)
	h, c = h[:n], c[:n]
	for j := range kernelLanes {
		l0, l1, l2, l3 := s[passHL0][j], s[passHL1][j], s[passHL2][j], s[passHL3][j]
		h0, h1, h2, h3, h4 := s[passHH0][j], s[passHH1][j], s[passHH2][j], s[passHH3][j], s[passHH4][j]
		for i := j; i < n; i += kernelLanes {
			x := math.FMA(float64(i), l.dx, l.x0)
			xx := float64(x * x)
			wh := float64(w[i] * h[i])
			v := float64(wh * c[i])
			vx := float64(v * x)
			l0 += v
			l1 += vx
			l2 = math.FMA(v, xx, l2)
			l3 = math.FMA(vx, xx, l3)
			v = float64(wh * h[i])
			vx = float64(v * x)
			h0 += v
			h1 += vx
			h2 = math.FMA(v, xx, h2)
			h3 = math.FMA(vx, xx, h3)
			h4 = math.FMA(float64(v*xx), xx, h4)
		}
		s[passHL0][j], s[passHL1][j], s[passHL2][j], s[passHL3][j] = l0, l1, l2, l3
		s[passHH0][j], s[passHH1][j], s[passHH2][j], s[passHH3][j], s[passHH4][j] = h0, h1, h2, h3, h4
	}
}

func scalarTimes(dst, v, w []float64) {
	v, w = v[:len(dst)], w[:len(dst)]
	for i := range dst {
		dst[i] = v[i] * w[i]
	}
}

func scalarShape(dst, g, h, k []float64, f *kernelShape, l *kernelLine) {
	n := len(dst)
	g, h, k = g[:n], h[:n], k[:n]
	for i := range dst {
		x := math.FMA(float64(i), l.dx, l.x0)
		v := float64(g[i] * f.g)
		v = math.FMA(h[i], math.FMA(math.FMA(f.h[0], x, f.h[1]), x, f.h[2]), v)
		dst[i] = math.FMA(k[i], math.FMA(math.FMA(f.k[0], x, f.k[1]), x, f.k[2]), v)
	}
}

func scalarSmear(dst, src []float64, at, step int, taps []float64) {
	for i := range dst {
		o := at + i
		v := float64(src[o] * taps[0])
		for k := 1; k < len(taps); k++ {
			v = math.FMA(src[o-k*step]+src[o+k*step], taps[k], v)
		}
		dst[i] = v
	}
}

func scalarProducts(s *productSums, rows, columns []float64, stride, n int) {
	for a := range productRows {
		for b := range productColumns {
			t := &s[a*productColumns+b]
			u, v := rows[a*stride:][:n], columns[b*stride:][:n]
			for j := range kernelLanes {
				w := t[j]
				for i := j; i < n; i += kernelLanes {
					w = math.FMA(u[i], v[i], w)
				}
				t[j] = w
			}
		}
	}
}
