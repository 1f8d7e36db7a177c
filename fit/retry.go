package fit

import (
	"math"
	"sort"
)

// retried are the condensate fractions that are tried once more, and followed how many of them.
var retried = []float64{0.04, 0.2, 0.5, 0.8, 0.96}

const retriedMost = 2

// retry tries on the level of choices what an ideal gas of as many atoms would show at several
// fractions condensed, about the centre found and about the place that is denser than the model:
// the bins of coarser levels hide small condensates, and at the border of the picture they lead
// the search astray.
func (s *session) retry(c *candidates) (*candidates, error) {
	b := c.best()
	if b.kind == (kind{}) {
		return c, nil
	}
	k := s.both()
	m, _ := s.tmpl.measured(&b.p, b.kind)
	g := guess{sum: m.ThermalSum + m.CondensateSum}
	centres := []params{b.p, b.p}
	centres[1][pX], centres[1][pY] = s.densest(b)
	var list []params
	for _, q := range centres {
		for _, f := range retried {
			list = s.fraction(list, q, g, f, k)
		}
	}
	chi2 := map[params]float64{}
	for i, q := range list {
		list[i] = s.prepared(k, q)
		chi2[list[i]] = s.problem(s.work, &list[i], k).normal(&list[i], nil, nil)
	}
	sort.SliceStable(list, func(i, j int) bool { return chi2[list[i]] < chi2[list[j]] })
	for _, q := range list[:min(retriedMost, len(list))] {
		st, err := s.run(s.work, k, q, 0.02)
		if err != nil {
			return nil, err
		}
		if st.used() && st.p[pCondensate] > 0 && st.p[pThermal] > 0 && (!c.both.used() || s.doubted(st) < s.doubted(c.both)) {
			c.both = st
		}
	}
	return c, nil
}

// doubted is χ² with what a condensate that cannot be one must bring on top.
func (s *session) doubted(st *state) float64 {
	return st.chi2 + s.opt.CondensateChi2*(s.doubt(st)-1)
}

// densest returns the place within three widths or radii of a fit where the picture is densest
// beyond it, in the sums over squares of residuals that no struck pixel decides.
func (s *session) densest(st *state) (x, y float64) {
	const side, most = 5, 4.0
	p := s.problem(s.work, &st.p, st.kind)
	l, resid := p.level, s.ws.resid
	p.render(&st.p, s.ws.kappa, s.ws.kappa)
	p.residuals(s.ws.kappa, resid)
	sign := -1.0
	if l.linear {
		sign = 1
	}
	in := s.cover(st, 9, 9)
	x, y = st.p[pX], st.p[pY]
	best := 0.0
	for j := range l.h - side + 1 {
		cy := l.at(j + side/2)
		for i := range l.w - side + 1 {
			cx := l.at(i + side/2)
			if !in.holds(cx, cy) {
				continue
			}
			sum := 0.0
			for r := range side {
				for _, v := range resid[(j+r)*l.w+i : (j+r)*l.w+i+side] {
					if v == v {
						sum += math.Max(-most, math.Min(most, sign*v))
					}
				}
			}
			if sum > best {
				best, x, y = sum, cx, cy
			}
		}
	}
	return x, y
}
