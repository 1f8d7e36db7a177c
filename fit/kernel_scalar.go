package fit

import (
	"math"

	"fallshadow/model/bose"
)

// scalarKernels are the kernels in plain Go; the others must give their bits. Here
// float64(a*b) keeps a product from being fused with the addition that follows, and
// math.FMA fuses.
var scalarKernels = kernelSet{
	name: "scalar", far: scalarFar, near: scalarNear, edge: scalarEdge, slope: scalarSlope, cross: scalarCross, powers: scalarPowers,
	edgeSlope: scalarEdgeSlope, peak: scalarPeak, rootCross: scalarRootCross,
	weigh: scalarWeigh, halve: scalarHalve, blocks: scalarBlocks, totals: scalarTotals,
	absorb: scalarAbsorb, thin: scalarThin, faint: scalarFaint, compare: scalarCompare, bare: scalarBare,
	tilt: scalarTilt, lightCross: scalarLightCross, lightPowers: scalarLightPowers,
	times: scalarTimes, shape: scalarShape, smear: scalarSmear, products: scalarProducts,
}

func scalarFar(g, h, r, d []float64, f *kernelFar, l *kernelLine) {
	z, ratio := f.z, f.r
	h, r, d = h[:len(g)], r[:len(g)], d[:len(g)]
	for i := range g {
		j := i & (kernelLanes - 1)
		zz := z[j]
		a := math.FMA(boseFarG[6], zz, boseFarG[5])
		b := math.FMA(boseFarH[6], zz, boseFarH[5])
		a = math.FMA(a, zz, boseFarG[4])
		b = math.FMA(b, zz, boseFarH[4])
		a = math.FMA(a, zz, boseFarG[3])
		b = math.FMA(b, zz, boseFarH[3])
		a = math.FMA(a, zz, boseFarG[2])
		b = math.FMA(b, zz, boseFarH[2])
		a = math.FMA(a, zz, boseFarG[1])
		b = math.FMA(b, zz, boseFarH[1])
		a = math.FMA(a, zz, boseFarG[0])
		b = math.FMA(b, zz, boseFarH[0])
		a = float64(a * zz)
		g[i] = a
		h[i] = float64(b * zz)
		r[i] = math.FMA(l.amp, a, math.FMA(float64(i), l.db, l.b0)) - d[i]
		z[j] = float64(zz * ratio[j])
		ratio[j] = float64(ratio[j] * f.q)
	}
}

// Limits of t for kernelNear, within which its arithmetic stays finite.
const (
	nearLeast = 1e-17
	nearMost  = 4.0
)

func scalarNear(g, h, r, d []float64, l *kernelLine) {
	h, r, d = h[:len(g)], r[:len(g)], d[:len(g)]
	for i := range g {
		x := math.FMA(float64(i), l.dx, l.x0)
		t := math.FMA(math.FMA(l.t2, x, l.t1), x, l.t0)
		if !(t > nearLeast) {
			t = nearLeast
		}
		if !(t < nearMost) {
			t = nearMost
		}
		ln, y := scalarLog(t), float64(t*t)
		a := math.FMA(boseNearG[5], y, boseNearG[4])
		b := math.FMA(boseNearH[5], y, boseNearH[4])
		a = math.FMA(a, y, boseNearG[3])
		b = math.FMA(b, y, boseNearH[3])
		a = math.FMA(a, y, boseNearG[2])
		b = math.FMA(b, y, boseNearH[2])
		a = math.FMA(a, y, boseNearG[1])
		b = math.FMA(b, y, boseNearH[1])
		a = math.FMA(a, y, boseNearG[0])
		b = math.FMA(b, y, boseNearH[0])
		// g = ζ(2) + t·(L − 1 + t·(t·G − 1/4)),  h = t/2 + y·H − L
		a = math.FMA(a, t, -0.25)
		a = math.FMA(a, t, ln-1)
		a = math.FMA(a, t, bose.Zeta2)
		g[i] = a
		h[i] = math.FMA(b, y, math.FMA(t, 0.5, -ln))
		r[i] = math.FMA(l.amp, a, math.FMA(float64(i), l.db, l.b0)) - d[i]
	}
}

const (
	rootHalf = 0x3fe6a09e667f3bcd // √½ in bits
	biasBits = 1023 << 52
	// exponentBits makes a double of value 2^52 + e from the integer e below 2^52.
	exponentBits = 0x4330000000000000
	exponentBias = 1<<52 + 1023
)

// scalarLog is ln t for normal positive t.
func scalarLog(t float64) float64 {
	bits := math.Float64bits(t)
	e := (bits - rootHalf + biasBits) >> 52
	k := math.Float64frombits(e|exponentBits) - exponentBias
	m := math.Float64frombits(bits - e<<52 + biasBits)
	s := (m - 1) / (m + 1)
	y := float64(s * s)
	p := math.FMA(boseLog[4], y, boseLog[3])
	p = math.FMA(p, y, boseLog[2])
	p = math.FMA(p, y, boseLog[1])
	p = math.FMA(p, y, boseLog[0])
	p = math.FMA(p, y, 2)
	return math.FMA(k, math.Ln2, float64(p*s))
}

func scalarEdge(k, r []float64, l *kernelLine) {
	r = r[:len(k)]
	for i := range k {
		x := math.FMA(float64(i), l.dx, l.x0)
		q := 1 - math.FMA(math.FMA(l.q2, x, l.q1), x, l.q0)
		if !(q > 0) {
			q = 0
		}
		root := math.Sqrt(q)
		k[i] = root
		r[i] = math.FMA(l.peak, float64(q*root), r[i])
	}
}

func scalarSlope(s *kernelSums, w, r, g, h []float64, l *kernelLine) {
	n := len(w)
	r, g, h = r[:n], g[:n], h[:n]
	for j := range kernelLanes {
		rr, r0, r1, rg, rh0, rh1, rh2 := s[sumRR][j], s[sumR0][j], s[sumR1][j], s[sumRG][j], s[sumRH0][j], s[sumRH1][j], s[sumRH2][j]
		for i := j; i < n; i += kernelLanes {
			x := math.FMA(float64(i), l.dx, l.x0)
			wr := float64(w[i] * r[i])
			rr = math.FMA(wr, r[i], rr)
			r0 += wr
			r1 = math.FMA(wr, x, r1)
			rg = math.FMA(wr, g[i], rg)
			e := float64(wr * h[i])
			ex := float64(e * x)
			rh0 += e
			rh1 += ex
			rh2 = math.FMA(ex, x, rh2)
		}
		s[sumRR][j], s[sumR0][j], s[sumR1][j], s[sumRG][j], s[sumRH0][j], s[sumRH1][j], s[sumRH2][j] = rr, r0, r1, rg, rh0, rh1, rh2
	}
}

func scalarCross(s *kernelSums, w, g, h []float64, l *kernelLine) {
	n := len(w)
	g, h = g[:n], h[:n]
	for j := range kernelLanes {
		gg, g0, g1, gh0, gh1, gh2 := s[sumGG][j], s[sumG0][j], s[sumG1][j], s[sumGH0][j], s[sumGH1][j], s[sumGH2][j]
		for i := j; i < n; i += kernelLanes {
			x := math.FMA(float64(i), l.dx, l.x0)
			wg := float64(w[i] * g[i])
			gg = math.FMA(wg, g[i], gg)
			g0 += wg
			g1 = math.FMA(wg, x, g1)
			e := float64(wg * h[i])
			ex := float64(e * x)
			gh0 += e
			gh1 += ex
			gh2 = math.FMA(ex, x, gh2)
		}
		s[sumGG][j], s[sumG0][j], s[sumG1][j], s[sumGH0][j], s[sumGH1][j], s[sumGH2][j] = gg, g0, g1, gh0, gh1, gh2
	}
}

func scalarPowers(s *[numPowers]lanes, w, v []float64, l *kernelLine) {
	n := len(w)
	v = v[:n]
	for j := range kernelLanes {
		v0, v1, v2, v3 := s[0][j], s[1][j], s[2][j], s[3][j]
		m0, m1, m2, m3, m4 := s[4][j], s[5][j], s[6][j], s[7][j], s[8][j]
		for i := j; i < n; i += kernelLanes {
			x := math.FMA(float64(i), l.dx, l.x0)
			xx := float64(x * x)
			wv := float64(w[i] * v[i])
			wvx := float64(wv * x)
			v0 += wv
			v1 += wvx
			v2 = math.FMA(wv, xx, v2)
			v3 = math.FMA(wvx, xx, v3)
			m := float64(wv * v[i])
			mx := float64(m * x)
			m0 += m
			m1 += mx
			m2 = math.FMA(m, xx, m2)
			m3 = math.FMA(mx, xx, m3)
			m4 = math.FMA(float64(m*xx), xx, m4)
		}
		s[0][j], s[1][j], s[2][j], s[3][j] = v0, v1, v2, v3
		s[4][j], s[5][j], s[6][j], s[7][j], s[8][j] = m0, m1, m2, m3, m4
	}
}

func scalarEdgeSlope(s *kernelSums, w, r, k []float64, l *kernelLine) {
	n := len(w)
	r, k = r[:n], k[:n]
	for j := range kernelLanes {
		rc, k0, k1, k2 := s[sumRC][j], s[sumRK0][j], s[sumRK1][j], s[sumRK2][j]
		for i := j; i < n; i += kernelLanes {
			x := math.FMA(float64(i), l.dx, l.x0)
			e := float64(float64(w[i]*r[i]) * k[i])
			ex := float64(e * x)
			rc = math.FMA(e, float64(k[i]*k[i]), rc)
			k0 += e
			k1 += ex
			k2 = math.FMA(ex, x, k2)
		}
		s[sumRC][j], s[sumRK0][j], s[sumRK1][j], s[sumRK2][j] = rc, k0, k1, k2
	}
}

func scalarPeak(s *kernelSums, w, k, g, h []float64, l *kernelLine) {
	n := len(w)
	k, g, h = k[:n], g[:n], h[:n]
	for j := range kernelLanes {
		cc, c0, c1, gc := s[sumCC][j], s[sumC0][j], s[sumC1][j], s[sumGC][j]
		h0, h1, h2 := s[sumCH0][j], s[sumCH1][j], s[sumCH2][j]
		k0, k1, k2 := s[sumCK0][j], s[sumCK1][j], s[sumCK2][j]
		for i := j; i < n; i += kernelLanes {
			x := math.FMA(float64(i), l.dx, l.x0)
			c := float64(float64(k[i]*k[i]) * k[i])
			wc := float64(w[i] * c)
			cc = math.FMA(wc, c, cc)
			c0 += wc
			c1 = math.FMA(wc, x, c1)
			gc = math.FMA(wc, g[i], gc)
			e := float64(wc * h[i])
			ex := float64(e * x)
			h0 += e
			h1 += ex
			h2 = math.FMA(ex, x, h2)
			f := float64(wc * k[i])
			fx := float64(f * x)
			k0 += f
			k1 += fx
			k2 = math.FMA(fx, x, k2)
		}
		s[sumCC][j], s[sumC0][j], s[sumC1][j], s[sumGC][j] = cc, c0, c1, gc
		s[sumCH0][j], s[sumCH1][j], s[sumCH2][j] = h0, h1, h2
		s[sumCK0][j], s[sumCK1][j], s[sumCK2][j] = k0, k1, k2
	}
}

func scalarRootCross(s *kernelSums, w, k, g, h []float64, l *kernelLine) {
	n := len(w)
	k, g, h = k[:n], g[:n], h[:n]
	for j := range kernelLanes {
		g0, g1, g2 := s[sumGK0][j], s[sumGK1][j], s[sumGK2][j]
		h0, h1, h2, h3, h4 := s[sumHK0][j], s[sumHK1][j], s[sumHK2][j], s[sumHK3][j], s[sumHK4][j]
		for i := j; i < n; i += kernelLanes {
			x := math.FMA(float64(i), l.dx, l.x0)
			xx := float64(x * x)
			wk := float64(w[i] * k[i])
			e := float64(wk * g[i])
			ex := float64(e * x)
			g0 += e
			g1 += ex
			g2 = math.FMA(ex, x, g2)
			f := float64(wk * h[i])
			fx := float64(f * x)
			h0 += f
			h1 += fx
			h2 = math.FMA(f, xx, h2)
			h3 = math.FMA(fx, xx, h3)
			h4 = math.FMA(float64(f*xx), xx, h4)
		}
		s[sumGK0][j], s[sumGK1][j], s[sumGK2][j] = g0, g1, g2
		s[sumHK0][j], s[sumHK1][j], s[sumHK2][j], s[sumHK3][j], s[sumHK4][j] = h0, h1, h2, h3, h4
	}
}

func scalarWeigh(w, sigma []float64) {
	sigma = sigma[:len(w)]
	for i, s := range sigma {
		w[i] = 1 / float64(s*s)
	}
}

// leastWeight keeps the mean of pixels without weight finite.
const leastWeight = 1e-300

func scalarHalve(w, d, w0, d0, w1, d1 []float64) {
	n := len(w)
	d, w0, d0, w1, d1 = d[:n], w0[:2*n], d0[:2*n], w1[:2*n], d1[:2*n]
	for i := range w {
		a, b, e, f := w0[2*i], w0[2*i+1], w1[2*i], w1[2*i+1]
		s := math.FMA(a, d0[2*i], float64(e*d1[2*i])) + math.FMA(b, d0[2*i+1], float64(f*d1[2*i+1]))
		t := (a + e) + (b + f)
		w[i] = t
		if !(t > leastWeight) {
			t = leastWeight
		}
		d[i] = s / t
	}
}

func scalarBlocks(run []densitySums, w, d []float64) {
	for b := range len(w) / densityBlock {
		var s [len(densitySums{})]lanes
		o := b * densityBlock
		u, v := (*[densityBlock]float64)(w[o:]), (*[densityBlock]float64)(d[o:])
		for i, q := range u {
			j := i % kernelLanes
			x, y := float64(o+i), v[i]
			qx, e := float64(q*x), float64(q*y)
			s[0][j] += q
			s[1][j] += qx
			s[2][j] = math.FMA(qx, x, s[2][j])
			s[3][j] += e
			s[4][j] = math.FMA(e, x, s[4][j])
			s[5][j] = math.FMA(e, y, s[5][j])
		}
		for k := range s {
			run[b+1][k] = run[b][k] + s[k].total()
		}
	}
}

// total is the sum over the lanes: neighbours, pairs, halves.
func (s *lanes) total() float64 {
	return ((s[0] + s[1]) + (s[2] + s[3])) + ((s[4] + s[5]) + (s[6] + s[7]))
}

func scalarTotals(t []float64, s []lanes) {
	t = t[:len(s)]
	for i := range s {
		t[i] = s[i].total()
	}
	clear(s)
}
