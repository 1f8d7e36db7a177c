package curve

import (
	"context"
	"math"

	"fallshadow/model"
)

// Transition is where the night has its transition, in three ways, beside what theory says.
type Transition struct {
	// Points whose T follows from their number take no part in any.

	// Saturation is the way by the thermal part at fixed T; nil where Unsaturated says why the
	// night does not tell it.
	Saturation  *Saturation
	Unsaturated string
	// Onsets are the way by the fraction against t, by law; empty with fewer than three
	// points of a fraction below OnsetFraction.
	Onsets []Onset
	// Hottest is the largest t of a point with a condensate, Coldest the least one of a point
	// without, NaN where there is none.
	Hottest, Coldest float64
	// Atoms is the number at which the predictions stand: the geometric mean near the onset,
	// of all points where none has a condensate.
	Atoms       float64
	Predictions []Prediction
}

// Saturation is the fit of N_thermal = N_sat(T) (s + λ e(μ/kT)) to the points with both
// parts: s is the critical number over that of the ideal gas at the same T, e the excess of
// a semi-ideal gas, so that λ is 0 where the thermal part saturates and 1 in a semi-ideal
// gas (compare N. Tammuz et al., Phys. Rev. Lett. 106, 230401 (2011)). μ is that of N0.
type Saturation struct {
	Critical Estimate // s
	Excess   Estimate // λ; NaN in a gas without Thomas-Fermi condensate, where it is 0
	Ratio    Estimate // Tc/Tc⁰ = s^(−1/3)
	Quality
}

// Excessive says that the thermal part grows beyond saturation as that of a semi-ideal gas
// does: the fit describes the points, and λ is above a half and three of its errors from 0.
func (s *Saturation) Excessive() bool {
	const fair = 3 // χ² a degree of freedom
	return s != nil && s.PerDof() <= fair && s.Excess.V > 0.5 && s.Excess.V > 3*s.Excess.Error()
}

// Onset is the fit of f = law(t Tc⁰/Tc) to the points of small fraction.
type Onset struct {
	Law   Law
	Ratio Estimate // Tc over the Tc of the law
	Quality
}

// OnsetFraction is the condensate fraction below which a point takes part in Onsets.
const OnsetFraction = 0.5

// Prediction is a theoretical Tc/Tc⁰.
type Prediction struct {
	Name, Note string
	Ratio      float64
}

// Locate finds the transition of a night.
func (n *Night) Locate(ctx context.Context, th *Theory) (Transition, error) {
	t := Transition{Hottest: math.NaN(), Coldest: math.NaN()}
	for i := range n.Points {
		p := &n.Points[i]
		if !p.Independent() || !(p.Atoms() > 0) {
			continue
		}
		reduced := n.Gas.Reduced(p.Vector[T], p.Atoms())
		switch {
		case p.Condensed() && !(t.Hottest >= reduced):
			t.Hottest = reduced
		case p.Vector[Condensate] == 0 && !(t.Coldest <= reduced) && reduced > 0:
			t.Coldest = reduced
		}
	}
	points := n.condensed()
	var err error
	if t.Saturation, t.Unsaturated, err = n.Saturate(ctx); err != nil {
		return t, err
	}
	small := n.pick(func(p *Point) bool { return p.Comparable() && p.Fraction() < OnsetFraction })
	if len(small) >= 3 {
		points = small
		if t.Onsets, err = n.onsets(ctx, th, small); err != nil {
			return t, err
		}
	}
	if len(points) == 0 {
		points = n.pick(func(p *Point) bool { return p.Atoms() > 0 })
	}
	t.Atoms = geometricMean(points, func(p *Point) float64 { return p.Atoms() })
	t.Predictions = n.Gas.predictions(t.Atoms)
	return t, nil
}

// What keeps a night from telling Saturation.
const (
	fewShots    = "fewer than four shots have both parts and a T of their own"
	narrowRange = "too narrow a range of T/Tc to tell: mu/kT varies by little more than its errors"
	notSearched = "the minimum was not found"
)

// Saturate fits the number of the thermal part at fixed T, or says why the night does not tell
// it.
func (n *Night) Saturate(ctx context.Context) (*Saturation, string, error) {
	points, start := n.condensed(), []float64{1, 0.5}
	switch {
	case len(points) < 4:
		return nil, fewShots, nil
	case !n.Gas.repulsive():
		start = start[:1]
	case !(n.spread(points) >= leastSpread):
		return nil, narrowRange, nil
	}
	p := n.problem(points, relation{size: 1, eval: func(_ *Point, v *Vector, g *scales, theta, h []float64) {
		held := theta[0]
		if len(theta) > 1 {
			held += theta[1] * Excess(g.mu(v[Condensate])/(model.KB*v[T]))
		}
		h[0] = v[Thermal]/g.saturated(v[T]) - held
	}})
	e, q, err := p.fit(ctx, start)
	switch {
	case err != nil:
		return nil, "", err
	case !e[0].Found():
		return nil, notSearched, nil
	case !(e[0].V > 0):
		return nil, narrowRange, nil
	}
	s := &Saturation{Critical: e[0], Excess: Estimate{math.NaN(), math.NaN(), math.NaN()}, Ratio: e[0].power(-1. / 3), Quality: q}
	if len(e) > 1 {
		s.Excess = e[1]
	}
	return s, "", nil
}

// leastSpread is the spread of ln(μ/kT) over its errors from which on a night tells s and λ
// apart: below it the errors of T move a cloud along both axes as far as clouds differ.
const leastSpread = 3

// spread returns by how many of their errors the values of ln(μ/kT) spread, √(χ²/dof) about
// their weighted mean; μ is that of N0.
func (n *Night) spread(points []*Point) float64 {
	var v, errs []float64
	places := make([]int, len(points))
	for i, p := range points {
		a, b := 0.4/p.Vector[Condensate], -1/p.Vector[T]
		v = append(v, 0.4*math.Log(p.Vector[Condensate])-math.Log(p.Vector[T]))
		errs = append(errs, math.Sqrt(a*a*p.Cov[Condensate][Condensate]+2*a*b*p.Cov[Condensate][T]+b*b*p.Cov[T][T]))
		places[i] = i
	}
	return MeanOf(v, errs, places).Scatter()
}

func (n *Night) onsets(ctx context.Context, th *Theory, points []*Point) ([]Onset, error) {
	var list []Onset
	for _, l := range th.Laws() {
		if l.Name != Ideal && !l.numeric {
			continue
		}
		p := n.problem(points, follows(func(v *Vector, g *scales, theta []float64) float64 { return th.at(l, v, g, theta[0]) }))
		e, q, err := p.fit(ctx, []float64{1})
		if err != nil {
			return nil, err
		}
		list = append(list, Onset{l, e[0], q})
	}
	return list, nil
}

// predictions returns Tc/Tc⁰ of n atoms with each correction and with both.
func (g *Gas) predictions(n float64) []Prediction {
	finite := model.FiniteSizeShift(n, g.Trap)
	list := []Prediction{
		{"ideal gas", "thermodynamic limit", 1},
		{"finite size", "Dalfovo et al. (1999), Eq. (20)", 1 + finite},
	}
	if !g.repulsive() {
		return list
	}
	field := model.InteractionShift(n, g.Mass, g.ScatteringLength, g.Trap)
	beyond := model.BeyondMeanFieldShift(n, g.Mass, g.ScatteringLength, g.Trap)
	return append(list,
		Prediction{"mean field", "first order in a; Giorgini, Pitaevskii, Stringari (1996)", 1 + field},
		Prediction{"finite size and mean field", "the two shifts added", 1 + finite + field},
		Prediction{"finite size and beyond mean field", "with the measured second order 46(5) (a/lambda)^2 of Smith et al. (2011), a coefficient quoted from memory", 1 + finite + beyond})
}

// Sigmas returns by how many of its errors a measured ratio is above a predicted one, of the
// statistical ones where the others are not known.
func (p Prediction) Sigmas(measured Estimate) float64 {
	return (measured.V - p.Ratio) / measured.Error()
}
