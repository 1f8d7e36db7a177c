package curve

import (
	"context"
	"math"
)

// Comparison is a law beside the condensate fractions of a night.
type Comparison struct {
	Law Law
	// Quality has χ² of f − law over the points with both parts, with the full covariance of
	// their atom numbers and T, no parameter fitted.
	Quality
	// Deviation is the plain mean of f − law, each point at its own measured t and N.
	Deviation Estimate
	// Amplitude is λ in f = ideal + λ (law − ideal): 0 says ideal, 1 says this law. Only
	// the numeric laws have it, NaN are the others: closed forms end too early.
	Amplitude Estimate
}

// Compare holds the fractions of a night against every law for its gas, in the order of
// Laws. A night without three points that have both parts, and T apart
// from their numbers, gives none.
func (n *Night) Compare(ctx context.Context, th *Theory) ([]Comparison, error) {
	points := n.condensed()
	if len(points) < 3 {
		return nil, nil
	}
	var list []Comparison
	for _, l := range th.Laws() {
		c := Comparison{Law: l, Amplitude: Estimate{math.NaN(), math.NaN(), math.NaN()}}
		p := n.problem(points, follows(func(v *Vector, g *scales, _ []float64) float64 { return th.at(l, v, g, 1) }))
		c.Quality, c.Deviation = p.quality(nil), p.mean()
		if l.numeric {
			var err error
			if c.Amplitude, err = n.amplitude(ctx, th, l, points); err != nil {
				return nil, err
			}
		}
		list = append(list, c)
	}
	return list, nil
}

// amplitude fits λ in f = ideal + λ (law − ideal).
func (n *Night) amplitude(ctx context.Context, th *Theory, l Law, points []*Point) (Estimate, error) {
	ideal, _ := Find(Ideal)
	p := n.problem(points, follows(func(v *Vector, g *scales, theta []float64) float64 {
		none := th.at(ideal, v, g, 1)
		return none + theta[0]*(th.at(l, v, g, 1)-none)
	}))
	e, _, err := p.fit(ctx, []float64{0.5})
	if err != nil {
		return Estimate{}, err
	}
	return e[0], nil
}

// follows returns the relation that the fraction is that of a law, 0 above its end.
func follows(law func(v *Vector, g *scales, theta []float64) float64) relation {
	return relation{size: 1, ends: true, eval: func(_ *Point, v *Vector, g *scales, theta, h []float64) {
		h[0] = v.Fraction() - law(v, g, theta)
	}}
}

// at returns the fraction that a law gives a cloud whose transition is at ratio Tc⁰.
func (th *Theory) at(l Law, v *Vector, g *scales, ratio float64) float64 {
	n := v.Atoms()
	return th.fraction(l, g.reduced(v[T], n)/ratio, n, g)
}

// Best returns the place of the comparison with the least χ², -1 where there is none.
func Best(list []Comparison) int {
	best := -1
	for i, c := range list {
		if best < 0 || c.Chi2 < list[best].Chi2 {
			best = i
		}
	}
	return best
}

// Distance returns the signed distance of a point to a law in its statistical errors, with
// its full covariance: f above the law counts as positive.
func (n *Night) Distance(th *Theory, l Law, p *Point) float64 {
	r := follows(func(v *Vector, g *scales, _ []float64) float64 { return th.at(l, v, g, 1) })
	near := r.nearest(p, n.Gas.scales(), nil, &p.Vector)
	return near.r[0]
}
