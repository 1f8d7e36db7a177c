package curve

import (
	"math"

	"gonum.org/v1/gonum/interp"

	"fallshadow/model"
)

// fractionTable holds a numeric law N0/N(t, η): curves over t at three values of η, between
// which a parabola in ln η goes. A night spans little of η, which goes with N^(1/15).
type fractionTable struct {
	logEta        [3]float64
	value, slopes [3][]float64 // at the nodes
}

// equilibrium is a gas at T in K and μ in J.
type equilibrium func(T, mu, mass, a float64, trap model.Trap) (model.Mixture, error)

// tabulate prepares the law of an equilibrium for numbers of atoms between low and high,
// and somewhat beyond, where errors may carry them.
func tabulate(g *scales, low, high float64, state equilibrium) *fractionTable {
	const margin = 1.2
	low, high = low/margin, high*margin
	var f fractionTable
	for i, n := range [3]float64{low, math.Sqrt(low * high), high} {
		f.logEta[i] = g.logEtaOf(n)
		f.value[i] = fractions(g, n, state)
		var c interp.FritschButland
		c.Fit(nodes, f.value[i])
		for _, t := range nodes {
			f.slopes[i] = append(f.slopes[i], c.PredictDerivative(t))
		}
	}
	return &f
}

// nodes are the values of t of the tables: closer near the transition.
var nodes = func() (t []float64) {
	for i := range coarse {
		t = append(t, knee*float64(i)/coarse)
	}
	for i := range fine + 1 {
		t = append(t, knee+(1-knee)*float64(i)/fine)
	}
	return t
}()

// The nodes are even in two parts, up to knee and from there to 1.
const (
	knee   = 0.9
	coarse = 45
	fine   = 40
)

// below returns the place of the last node at or below t, 0 ≤ t < 1, but the last of all.
func below(t float64) int {
	i := coarse + int((t-knee)/(1-knee)*fine)
	if t < knee {
		i = int(t / knee * coarse)
	}
	for t < nodes[i] { // rounding
		i--
	}
	return min(i, len(nodes)-2)
}

// fractions returns N0/N at the nodes for n atoms; 0 where no condensed state holds them.
func fractions(g *scales, n float64, state equilibrium) []float64 {
	f := make([]float64, len(nodes))
	f[0] = 1
	full := g.mu(n)
	mu := full
	tc := model.CriticalTemperature(n, g.Trap)
	for i, t := range nodes[1:] {
		var m model.Mixture
		m, mu = hold(n, mu, 1e-3*full, func(mu float64) model.Mixture {
			m, _ := state(t*tc, mu, g.Mass, g.ScatteringLength, g.Trap)
			return m
		})
		f[i+1] = m.Fraction()
	}
	return f
}

// hold returns the state with n atoms, and its μ, from a μ near it: N rises with μ. least
// is a step in μ that is small but not nothing.
func hold(n, mu, least float64, state func(mu float64) model.Mixture) (model.Mixture, float64) {
	excess := func(mu float64) (float64, model.Mixture) {
		m := state(mu)
		return m.Condensate + m.Thermal - n, m
	}
	width := 0.05*math.Abs(mu) + least
	low, high := mu-width, mu+width
	fl, _ := excess(low)
	for range 60 {
		if fl <= 0 {
			break
		}
		high, low = low, low-width
		width *= 2
		fl, _ = excess(low)
	}
	fh, m := excess(high)
	for range 60 {
		if fh >= 0 {
			break
		}
		low, fl = high, fh
		high += width
		width *= 2
		fh, m = excess(high)
	}
	return bracketed(n, low, high, fl, fh, m, excess)
}

// bracketed narrows a bracket by false position with Illinois weights.
func bracketed(n, low, high, fl, fh float64, m model.Mixture, excess func(float64) (float64, model.Mixture)) (model.Mixture, float64) {
	side := 0
	for range 80 {
		mid := (fl*high - fh*low) / (fl - fh)
		if !(mid > low && mid < high) {
			mid = (low + high) / 2
		}
		var f float64
		f, m = excess(mid)
		switch {
		case math.Abs(f) <= 1e-9*n || high-low <= 1e-12*math.Abs(mid):
			return m, mid
		case f < 0:
			low, fl = mid, f
			if side < 0 {
				fh /= 2
			}
			side = -1
		default:
			high, fh = mid, f
			if side > 0 {
				fl /= 2
			}
			side = 1
		}
	}
	return m, (low + high) / 2
}

// at returns the fraction, 0 for t ≥ 1 and between 0 and 1 elsewhere.
func (f *fractionTable) at(t, logEta float64) float64 {
	switch {
	case math.IsNaN(t) || math.IsNaN(logEta):
		return math.NaN()
	case t >= 1:
		return 0
	}
	t = math.Max(t, 0)
	i := below(t)
	step := nodes[i+1] - nodes[i]
	u := (t - nodes[i]) / step
	// Hermite's cubics of the values and slopes at both ends.
	h10, h11 := u*(1-u)*(1-u)*step, u*u*(u-1)*step
	h01 := u * u * (3 - 2*u)
	sum := 0.0
	for k := range 3 {
		weight := 1.0
		for j := range 3 {
			if j != k {
				weight *= (logEta - f.logEta[j]) / (f.logEta[k] - f.logEta[j])
			}
		}
		v, d := f.value[k], f.slopes[k]
		sum += weight * (v[i] + h01*(v[i+1]-v[i]) + h10*d[i] + h11*d[i+1])
	}
	return math.Min(1, math.Max(0, sum))
}
