package model

import (
	"math"
	"sync"

	"fallshadow/model/bose"
)

// sightKernel returns Φ(u, q) = ∫ g_{1/2}(e^{−|ζ²−u|−q}) dζ over all ζ, q ≥ 0: √π g_1(q−u)
// for u ≤ 0, and from a table for 0 < u ≤ 9, to 1e-4 of √π e^{−q}, or 1e-3 where u or q is
// below 0.05.
func sightKernel(u, q float64) float64 {
	if u <= 0 {
		return sqrtPi * bose.G1(q-u)
	}
	if q > 40 {
		return 0
	}
	w, p := math.Sqrt(u), math.Sqrt(q)
	return sightSingular(w, p) + math.Exp(-q)*sightTable().at(w, p)
}

var sqrtPi = math.Sqrt(math.Pi)

// sightSingular is the part of Φ(w², p²) that goes like 2√π [atan(w/p) − ln(w+p)] as w and
// p go to 0, made to fall like e^{−p²}.
func sightSingular(w, p float64) float64 {
	square := w*w + p*p
	mixed := math.Atan2(w, p) - math.Log1p(2*w*p/square)/2
	return sqrtPi * (2*math.Exp(-p*p)*mixed + bose.G1(square))
}

// sightGrid holds e^q (Φ − sightSingular) on an even grid of w and p; index 1 is 0, the
// rows and columns before it are extrapolated for the interpolation.
type sightGrid [sightW + 3][sightP + 3]float64

const (
	sightW, sightP = 60, 130
	sightStep      = 0.05
)

var sightTable = sync.OnceValue(func() *sightGrid {
	var g sightGrid
	for i := 1; i < len(g); i++ {
		for j := 1; j < len(g[i]) && i > 1; j++ {
			w, p := float64(i-1)*sightStep, float64(j-1)*sightStep
			g[i][j] = math.Exp(p*p) * (sightIntegral(w, math.Max(p, 1e-7)) - sightSingular(w, p))
		}
		g[i][0] = 3*g[i][1] - 3*g[i][2] + g[i][3]
	}
	for j := range g[0] {
		g[0][j] = 3*g[1][j] - 3*g[2][j] + g[3][j]
	}
	return &g
})

// sightIntegral returns Φ(w², p²) for w, p > 0 by quadrature: ζ = w cos θ inside and
// ζ² = w² + m² outside, with θ and m stretched by sinh so that the roots of α = 0 keep off.
func sightIntegral(w, p float64) float64 {
	stretch := math.Min(1, p/w)
	inside := func(s float64) float64 {
		theta := stretch * math.Sinh(s)
		x := w * math.Sin(theta)
		return stretch * math.Cosh(s) * x * bose.G12(x*x+p*p)
	}
	kappa := math.Min(w, p)
	outside := func(s float64) float64 {
		m := kappa * math.Sinh(s)
		return kappa * math.Cosh(s) * m / math.Hypot(w, m) * bose.G12(m*m+p*p)
	}
	return 2 * (panels(inside, 0, math.Asinh(math.Pi/2/stretch)) + panels(outside, 0, math.Asinh(6.4/kappa)))
}

// at interpolates by cubics (Catmull-Rom) in both directions.
func (g *sightGrid) at(w, p float64) float64 {
	i, a := split(w/sightStep, sightW)
	j, b := split(p/sightStep, sightP)
	sum := 0.
	for k, f := range catmullRom(a) {
		row := &g[i+k]
		weights := catmullRom(b)
		sum += f * (weights[0]*row[j] + weights[1]*row[j+1] + weights[2]*row[j+2] + weights[3]*row[j+3])
	}
	return sum
}

// split returns the cell of x among n and the place in it.
func split(x float64, n int) (cell int, rest float64) {
	cell = min(int(x), n-1)
	return cell, x - float64(cell)
}

func catmullRom(t float64) [4]float64 {
	return [4]float64{
		t * (t*(2-t) - 1) / 2, (t*t*(3*t-5) + 2) / 2, t * (t*(4-3*t) + 1) / 2, t * t * (t - 1) / 2,
	}
}
