package curve

import (
	"cmp"
	"math"
	"slices"
	"sort"
)

// Band is where a law may lie for a night whose calibrations are wrong by one standard
// deviation each: the law as the wrong settings would show it.
type Band struct {
	T, Low, High []float64
}

// pull is by how much one calibration moves the points near t.
type pull struct{ t, logT, fraction float64 }

// pullPlaces is the most places at which pulls are held.
const pullPlaces = 40

// CalibrationBand returns the band of a law for n atoms at the given t = T/Tc⁰. Calibration
// errors are common to a night: alpha moves all t by N^(−1/3), a wrong counts per Isat the
// fractions too. Those of unknown uncertainty are not in it, nor are points whose T is known
// to worse than a third, which stand at a t that is not theirs. The law moved by each known
// one, up and down, departs from the law at rest; the squares of the departures add up on
// either side.
func (n *Night) CalibrationBand(th *Theory, l Law, atoms float64, t []float64) Band {
	b := Band{T: t, Low: make([]float64, len(t)), High: make([]float64, len(t))}
	for c, calibration := range n.Calibrations {
		if !calibration.Known {
			continue
		}
		pulls := n.pulls(c)
		for i, x := range t {
			at, rest := pullAt(pulls, x), th.Fraction(l, x, atoms)
			for _, sign := range []float64{1, -1} {
				d := th.Fraction(l, x*math.Exp(-sign*at.logT), atoms) + sign*at.fraction - rest
				if d > 0 {
					b.High[i] += d * d
				} else {
					b.Low[i] += d * d
				}
			}
		}
	}
	for i, x := range t {
		rest := th.Fraction(l, x, atoms)
		b.High[i] = math.Min(1, rest+math.Sqrt(b.High[i]))
		b.Low[i] = math.Max(0, rest-math.Sqrt(b.Low[i]))
	}
	return b
}

// pulls returns the changes of ln t and f of the points under calibration c, over rising t,
// averaged where there are many points.
func (n *Night) pulls(c int) []pull {
	var list []pull
	g := &n.Calibrations[c].Gas
	for i := range n.Points {
		p := &n.Points[i]
		if !(p.Vector[T] > 0) || !(p.Atoms() > 0) || !p.Shifted() || p.relative(T) > 1./3 {
			continue
		}
		moved := p.shifted(c, p.Vector)
		t := n.Gas.Reduced(p.Vector[T], p.Atoms())
		list = append(list, pull{t, math.Log(g.Reduced(moved[T], moved.Atoms()) / t), moved.Fraction() - p.Fraction()})
	}
	slices.SortStableFunc(list, func(a, b pull) int { return cmp.Compare(a.t, b.t) })
	var means []pull
	for chunk := range slices.Chunk(list, max(1, (len(list)+pullPlaces-1)/pullPlaces)) {
		var m pull
		for _, p := range chunk {
			w := 1 / float64(len(chunk))
			m.t, m.logT, m.fraction = m.t+w*p.t, m.logT+w*p.logT, m.fraction+w*p.fraction
		}
		means = append(means, m)
	}
	return means
}

// pullAt interpolates between places and holds the ends.
func pullAt(list []pull, t float64) pull {
	i := sort.Search(len(list), func(i int) bool { return list[i].t >= t })
	switch {
	case len(list) == 0:
		return pull{}
	case i == 0:
		return list[0]
	case i == len(list):
		return list[i-1]
	}
	a, b := list[i-1], list[i]
	w := (t - a.t) / (b.t - a.t)
	return pull{t, a.logT + w*(b.logT-a.logT), a.fraction + w*(b.fraction-a.fraction)}
}
