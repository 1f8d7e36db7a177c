package fit

import (
	"math"

	"fallshadow/model/bose"
)

// boseTable interpolates g2(e^−τ) on [tableLow, tableHigh) by cubic Hermite polynomials
// between exact values and slopes. The error of g2 is below 4e-9 and that of its slope
// −g1 below 2e-6 of the value at its node distance, both tested; the slope only steers
// the search, the value decides.
const (
	tableStep = 1.0 / 64
	tableLow  = 0.25
	tableHigh = 12.0
	tableSize = int((tableHigh - tableLow) / tableStep)
)

type cubic struct{ a, b, c, d float64 }

var boseTable, boseSlope = makeBoseTables()

func makeBoseTables() (g2, g1 []cubic) {
	g2, g1 = make([]cubic, tableSize), make([]cubic, tableSize)
	g0 := func(t float64) float64 { return 1 / math.Expm1(t) }
	for i := range g2 {
		t := tableLow + float64(i)*tableStep
		u := t + tableStep
		g2[i] = hermite(bose.G2(t), bose.G2(u), -bose.G1(t)*tableStep, -bose.G1(u)*tableStep)
		g1[i] = hermite(bose.G1(t), bose.G1(u), -g0(t)*tableStep, -g0(u)*tableStep)
	}
	return g2, g1
}

// hermite returns the cubic on [0,1] with the given end values and slopes.
func hermite(y0, y1, m0, m1 float64) cubic {
	return cubic{y0, m0, 3*(y1-y0) - 2*m0 - m1, 2*(y0-y1) + m0 + m1}
}

func (c *cubic) at(x float64) float64 { return c.a + x*(c.b+x*(c.c+x*c.d)) }

// boseFast returns g2(e^−τ) and g1(e^−τ) for τ > 0: near the origin the logarithm and a short
// Robinson series, then the tables, then three terms in e^−τ.
func boseFast(tau float64) (g2, g1 float64) {
	switch {
	case tau < tableLow:
		return boseNear(tau)
	case tau < tableHigh:
		f := (tau - tableLow) * (1 / tableStep)
		i := int(f)
		x := f - float64(i)
		return boseTable[i].at(x), boseSlope[i].at(x)
	}
	z := math.Exp(-tau)
	return z * (1 + z*0.25), z * (1 + z*0.5)
}

// boseNear uses g1 = −ln(1−e^−τ) = −ln τ + τ/2 − τ²/24 + τ⁴/2880 and the integral of it.
func boseNear(tau float64) (g2, g1 float64) {
	if tau < 1e-12 {
		tau = 1e-12
	}
	l, t2 := math.Log(tau), tau*tau
	g1 = -l + tau*0.5 - t2*(1.0/24-t2*(1.0/2880-t2*(1.0/181440)))
	g2 = bose.Zeta2 + tau*(l-1) - t2*(0.25-tau*(1.0/72-t2*(1.0/14400-t2*(1.0/1270080))))
	return g2, g1
}
