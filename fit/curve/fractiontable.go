package curve

import (
	"math"

	"gonum.org/v1/gonum/interp"

	"fallshadow/model"
)

// fractionTable holds a numeric law N0/N(t, η): curves over t at three values of η, between
// which a parabola in ln η goes. A night spans little of η, which goes with N^(1/15).
type fractionTable struct {
	logEta [3]float64
	curves [3]interp.FritschButland
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
		f.logEta[i] = math.Log(g.eta(n))
		f.curves[i].Fit(nodes, fractions(g, n, state))
	}
	return &f
}

// nodes are the values of t of the tables: closer near the transition.
var nodes = func() []float64 {
	t := []float64{0}
	for x := 0.02; x < 0.899; x += 0.02 {
		t = append(t, x)
	}
	for i := range 41 {
		t = append(t, 0.9+0.0025*float64(i))
	}
	return t
}()

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
func (f *fractionTable) at(t, eta float64) float64 {
	switch {
	case math.IsNaN(t) || math.IsNaN(eta):
		return math.NaN()
	case t >= 1:
		return 0
	}
	x, sum := math.Log(eta), 0.0
	for i := range 3 {
		weight := 1.0
		for j := range 3 {
			if j != i {
				weight *= (x - f.logEta[j]) / (f.logEta[i] - f.logEta[j])
			}
		}
		sum += weight * f.curves[i].Predict(math.Max(t, 0))
	}
	return math.Min(1, math.Max(0, sum))
}
