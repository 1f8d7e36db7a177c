package study

import (
	"fmt"
	"math"
	"slices"

	"fallshadow/cmd/fallshadow/internal/figure"
	"fallshadow/fit/curve"
	"fallshadow/model"
)

// laws draws the theory that belongs to the axes, if any.
func (p *plotting) laws() error {
	var chosen []curve.Law
	names := p.axes.Laws
	if names == nil {
		names = usualLaws
		if best := p.Best().Name; p.banded() && !slices.Contains(names, best) {
			names = append(slices.Clone(names), best)
		}
	}
	for _, name := range names {
		l, ok := curve.Find(name)
		if !ok {
			return fmt.Errorf("no law is called %q: there are %s", name, lawNames())
		}
		chosen = append(chosen, l)
	}
	switch {
	case p.y.Name == "fraction" && (p.x.Name == "t_reduced" || p.x.Name == "T_nK"):
		p.fractions(chosen)
	case p.y.Name == "entropy_per_atom" && p.x.Name == "t_reduced":
		p.entropies()
	case p.log():
		p.thomasFermi()
	case p.x.Name == "atoms_over_saturated" && p.y.Name == "condensate_over_saturated":
		p.saturated()
	case p.x.Name == "mu_over_kT" && p.y.Name == "thermal_over_saturated":
		p.excess()
	}
	return nil
}

func lawNames() (text string) {
	for i, l := range curve.Laws {
		if i > 0 {
			text += ", "
		}
		text += l.Name
	}
	return text
}

// roles are the looks of laws.
var roles = map[string]figure.Role{
	curve.Ideal: figure.Law1, curve.SemiIdeal: figure.Law2, curve.HartreeFock: figure.Law3,
	curve.FiniteSize: figure.Law4, curve.Interacting: figure.Law5,
}

// legends are the titles of laws with their letters set.
var legends = map[string]string{curve.Ideal: "ideal gas, 1 \u2212 *t*^{3}"}

func legendOf(l curve.Law) string {
	if text, ok := legends[l.Name]; ok {
		return text
	}
	return l.Title
}

// samples is the number of points of a curve.
const samples = 241

func (p *plotting) across() []float64 {
	x := make([]float64, samples)
	for i := range x {
		x[i] = p.figure.X.Min + (p.figure.X.Max-p.figure.X.Min)*float64(i)/(samples-1)
		if p.figure.X.Log {
			x[i] = p.figure.X.Min * math.Pow(p.figure.X.Max/p.figure.X.Min, float64(i)/(samples-1))
		}
	}
	return x
}

// fractions draws f against t or T, at the middle N of the condensed shots, with a band
// from the least to the largest N, and the calibration band about the best law drawn.
func (p *plotting) fractions(laws []curve.Law) {
	low, mid, high := p.atomNumbers()
	reduced := func(x, n float64) float64 {
		if p.x.Name == "T_nK" {
			return p.Curve.Gas.Reduced(x*1e-9, n)
		}
		return x
	}
	x := p.across()
	if p.banded() {
		p.calibration(laws)
	}
	named := false
	for _, l := range laws {
		var y, a, b []float64
		for _, v := range x {
			at := func(n float64) float64 { return p.Theory.Fraction(l, reduced(v, n), n) }
			f, g := at(low), at(high)
			y, a, b = append(y, at(mid)), append(a, math.Min(f, g)), append(b, math.Max(f, g))
		}
		if math.IsNaN(y[0]) {
			continue // not for this gas
		}
		if band := (figure.Band{Role: roles[l.Name], X: x, Low: a, High: b}); wide(&band) {
			if !named {
				band.Legend, named = "least to largest *N*", true
			}
			p.figure.Bands = append(p.figure.Bands, band)
		}
		p.figure.Curves = append(p.figure.Curves, figure.Curve{Legend: legendOf(l), Role: roles[l.Name], X: x, Y: y})
	}
}

// wide says that a band can be seen.
func wide(b *figure.Band) bool {
	for i := range b.X {
		if b.High[i]-b.Low[i] > 0.01 {
			return true
		}
	}
	return false
}

// atomNumbers returns the least, the middle and the largest N of the condensed shots, of all
// where none is.
func (p *plotting) atomNumbers() (low, mid, high float64) {
	var list []float64
	for _, only := range []bool{true, false} {
		for i := range p.Curve.Points {
			if pt := &p.Curve.Points[i]; pt.Atoms() > 0 && (!only || pt.Condensed()) {
				list = append(list, pt.Atoms())
			}
		}
		if len(list) > 0 {
			break
		}
	}
	slices.Sort(list)
	return list[0], list[len(list)/2], list[len(list)-1]
}

// calibration draws how far errors that are common to all shots may have moved the best of the
// laws that are drawn.
func (p *plotting) calibration(drawn []curve.Law) {
	_, mid, _ := p.atomNumbers()
	b := p.Curve.CalibrationBand(p.Theory, p.bestOf(drawn), mid, p.across())
	if !slices.Equal(b.Low, b.High) {
		p.figure.Bands = append(p.figure.Bands, figure.Band{Legend: "calibration, 1 *σ*", Role: figure.Data, X: b.T, Low: b.Low, High: b.High})
	}
}

// bestOf returns the law with the least χ² of some, the best of all where none was compared.
func (p *plotting) bestOf(laws []curve.Law) curve.Law {
	list := slices.DeleteFunc(slices.Clone(p.Comparisons), func(c curve.Comparison) bool {
		return !slices.ContainsFunc(laws, func(l curve.Law) bool { return l.Name == c.Law.Name })
	})
	if i := curve.Best(list); i >= 0 {
		return list[i].Law
	}
	return p.Best()
}

func (p *plotting) entropies() {
	_, mid, _ := p.atomNumbers()
	x := p.across()
	var ideal, semi []float64
	for _, t := range x {
		ideal, semi = append(ideal, model.IdealEntropy(t)), append(semi, p.Theory.Entropy(t, mid))
	}
	p.figure.Curves = append(p.figure.Curves, figure.Curve{Legend: "ideal gas", Role: figure.Law1, X: x, Y: ideal})
	if p.Curve.Gas.ScatteringLength > 0 {
		p.figure.Curves = append(p.figure.Curves, figure.Curve{Legend: "semi-ideal", Role: figure.Law2, X: x, Y: semi})
	}
}

func (p *plotting) thomasFermi() {
	x := p.across()
	var y []float64
	for _, n := range x {
		mu, err := model.Mu(n, p.Curve.Gas.Mass, p.Curve.Gas.ScatteringLength, p.Curve.Gas.Trap)
		if err != nil {
			return
		}
		y = append(y, mu/model.KB*1e9)
	}
	p.figure.Curves = append(p.figure.Curves, figure.Curve{Legend: "Thomas-Fermi, *N*_{0}^{2/5}", Role: figure.Law2, X: x, Y: y})
}

// saturated draws N0 against N, both over the saturated number of the shot's own T.
func (p *plotting) saturated() {
	x := p.across()
	var y []float64
	for _, v := range x {
		y = append(y, math.Max(0, v-1))
	}
	p.figure.Curves = append(p.figure.Curves, figure.Curve{Legend: "saturated thermal part", Role: figure.Law1, X: x, Y: y})
}

// excess draws what the thermal part holds beyond saturation.
func (p *plotting) excess() {
	x := p.across()
	one, semi := make([]float64, len(x)), make([]float64, len(x))
	for i, v := range x {
		one[i], semi[i] = 1, 1+curve.Excess(math.Max(0, v))
	}
	p.figure.Curves = append(p.figure.Curves,
		figure.Curve{Legend: "saturated", Role: figure.Law1, X: x, Y: one},
		figure.Curve{Legend: "semi-ideal", Role: figure.Law2, X: x, Y: semi})
	if s := p.Transition.Saturation; s != nil && !math.IsNaN(s.Excess.V) {
		fitted := make([]float64, len(x))
		for i, v := range x {
			fitted[i] = s.Critical.V + s.Excess.V*curve.Excess(math.Max(0, v))
		}
		p.figure.Curves = append(p.figure.Curves, figure.Curve{Legend: "fit", Role: figure.Law3, X: x, Y: fitted})
	}
}
