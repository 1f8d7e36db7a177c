package fit

import (
	"math"
	"sort"

	"fallshadow/fit/lm"
)

// candidates are the best fits of each kind at one level under the same variances.
type candidates struct{ none, thermal, both, alone *state }

func (c *candidates) list() []*state { return []*state{c.thermal, c.both, c.alone} }

// best returns the candidate of least χ², which sets the variances.
func (c *candidates) best() *state {
	b := c.none
	for _, st := range c.list() {
		if st.used() && (b == nil || st.chi2 < b.chi2) {
			b = st
		}
	}
	return b
}

// beaten is the χ² by which a kind must be worse on a coarse level to be given up.
const beaten = 300

// drop gives up the kinds that the picture has refused; none stays, to measure against.
func (c *candidates) drop(best float64) {
	for _, to := range []**state{&c.thermal, &c.both, &c.alone} {
		if *to != nil && (*to).chi2 > best+beaten {
			*to = nil
		}
	}
}

// idle is the least gain in χ² on the coarsest level that makes a condensate beside a thermal
// part worth a closer look: summing bins loses little of a small core.
const idle = 1

func (c *candidates) dropIdle() {
	if c.both.used() && c.thermal.used() && c.thermal.chi2-c.both.chi2 < idle {
		c.both = nil
	}
}

// explore finds the candidates on the coarsest level from a first look, then follows them
// down to the level of choices. What was found before is followed only.
func (s *session) explore() (*candidates, error) {
	if near := s.opt.Near; near != nil && !near.Rough {
		c := *near.found
		return s.descend(s.work, &c)
	}
	if s.pic.Width*s.pic.Height > Large && !s.part {
		return s.exploreWindow()
	}
	places, top := s.lookCloser(len(s.levels) - 1)
	c := new(candidates)
	if err := s.first(top, places, c); err != nil {
		return nil, err
	}
	if c, err := s.descend(top, c); err != nil || s.opt.searchFree {
		return c, err
	}
	return s.retry(c)
}

// descend follows the candidates from a level down to the level of choices.
func (s *session) descend(top int, c *candidates) (*candidates, error) {
	for i := top; i >= s.work; i-- {
		b := c.best()
		s.freeze(i, b)
		c.drop(b.chi2)
		if err := s.follow(i, c); err != nil {
			return nil, err
		}
	}
	return c, nil
}

// lookCloser looks at level top, or at a finer one where a cloud covers only a few bins, down to
// the level of choices.
func (s *session) lookCloser(top int) ([]guess, int) {
	for ; ; top-- {
		p := s.problem(top, &params{}, kind{})
		p.level.freezeData()
		places := p.look()
		small := false
		for _, g := range places {
			bin := float64(p.level.bin)
			small = small || math.Min(g.moment[0], g.moment[2]) < fewBins*fewBins*bin*bin
		}
		if !small || top <= s.work {
			return places, top
		}
	}
}

// fewBins is the rms size in bins below which a cloud is looked at more closely.
const fewBins = 1.2

// first tries every kind from the starts of every place.
func (s *session) first(top int, places []guess, c *candidates) error {
	none, err := s.run(top, kind{}, params{pLight: places[0].light}, 0.5)
	if err != nil {
		return err
	}
	c.none = none
	defer c.dropIdle()
	for _, t := range []struct {
		k  kind
		to **state
	}{{s.thermal(), &c.thermal}, {s.both(), &c.both}, {s.alone(), &c.alone}} {
		for _, g := range places {
			if err := s.tryStarts(top, t.k, g, t.to); err != nil {
				return err
			}
		}
		if *t.to == nil {
			continue
		}
		if *t.to, err = s.run(top, t.k, (*t.to).p, 0.1); err != nil {
			return err
		}
	}
	return nil
}

// tried is how many starts of one kind and place are followed: those of least χ².
const tried = 4

// tryStarts keeps in best the least χ² that the starts of a kind at one place lead to.
func (s *session) tryStarts(top int, k kind, g guess, best **state) error {
	type start struct {
		q    params
		chi2 float64
	}
	var list []start
	for _, q := range s.starts(g, k) {
		q = s.prepared(k, q)
		p := s.problem(top, &q, k)
		list = append(list, start{q, p.normal(&q, nil, nil)})
	}
	sort.SliceStable(list, func(i, j int) bool { return list[i].chi2 < list[j].chi2 })
	for _, v := range list[:min(tried, len(list))] {
		st, err := s.run(top, k, v.q, 0.5)
		if err != nil {
			return err
		}
		if st.reason != lm.StartOutside && (*best == nil || st.chi2 < (*best).chi2) {
			*best = st
		}
	}
	return nil
}

// follow minimises every candidate again at level i.
func (s *session) follow(i int, c *candidates) error {
	for _, to := range []**state{&c.none, &c.thermal, &c.both, &c.alone} {
		if *to == nil {
			continue
		}
		st, err := s.runWidth(func(k kind, start params) (*state, error) {
			return s.run(i, k, start, 0.02)
		}, (*to).kind, (*to).p)
		if err != nil {
			return err
		}
		*to = st
	}
	return nil
}

// doubt is 1 for a condensate whose μ from the radius agrees with that of its number within a
// factor of two and two errors, and grows as ten times the square of the logarithm beyond: what
// is left of a fringe has any size, while a condensate under wrong settings is far above every
// threshold.
func (s *session) doubt(st *state) float64 {
	if s.tmpl.gaussian || st.cov == nil {
		return 1
	}
	m := s.shapeOf(st)
	r := m.ratios(s.lab, s.flight, 1)[ratioMuN]
	if math.IsNaN(r) {
		return 1
	}
	x := math.Max(0, math.Abs(r)-math.Ln2-2*m.errs[ratioMuN])
	return 1 + 10*x*x
}

// choose takes the simplest model that the picture does not refuse: a second part must lower χ²
// by a stated amount, and so must any cloud and a condensate in place of a thermal cloud. A search
// that did not end counts with what it had reached: its least is not above that.
func (s *session) choose(c *candidates) (*state, string) {
	chi := func(st *state) float64 {
		if st == nil {
			return math.Inf(1)
		}
		return st.chi2
	}
	single, name := c.thermal, ModelThermal
	if s.outdoes(c.alone, chi(c.thermal)) {
		single, name = c.alone, ModelCondensate
	}
	if c.both.used() && c.both.p[pCondensate] > 0 && c.both.p[pThermal] > 0 && chi(c.alone)-chi(c.both) > s.opt.ThermalChi2 && s.outdoes(c.both, chi(c.thermal)) {
		return c.both, ModelBimodal
	}
	if single == nil && c.both.used() { // no single part came near: it is both, be they as they may
		single, name = c.both, ModelBimodal
	}
	if chi(c.none)-chi(single) > s.opt.CloudChi2 {
		return single, name
	}
	return c.none, ModelNone
}

// outdoes says that a fit with a condensate is so much better than that of a thermal cloud as is
// asked of one. What it takes grows for a condensate that cannot be one.
func (s *session) outdoes(st *state, thermal float64) bool {
	if st == nil {
		return false
	}
	gain := thermal - st.chi2
	return gain > s.opt.CondensateChi2 && gain > s.opt.CondensateChi2*s.doubt(st)
}
