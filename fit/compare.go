package fit

import (
	"math"

	"fallshadow/model/bose"
)

// residuals fills the goodness of the fit: χ² over the whole picture, and that of the cloud,
// the worse of the condensate's ellipse and of 8×8 blocks under the cloud.
func (s *session) residuals(st *state, r *Result) {
	p := s.problem(0, &st.p, st.kind)
	p.freeze(&st.p, s.ws.kappa, s.ws.kappa)
	p.residuals(s.ws.kappa, s.ws.resid)
	l := s.levels[0]
	sum, n := 0.0, 0
	for _, v := range s.ws.resid {
		if !math.IsNaN(v) {
			sum += v * v
			n++
		}
	}
	r.ChiPerDof = sum / float64(max(1, n-st.tie.n))
	r.ChiCloud = math.NaN()
	if st.kind.condensate {
		r.ChiCloud = s.chiInside(l, st)
	}
	if b := s.chiBlocks(l, st); !math.IsNaN(b) {
		r.ChiCloud = math.Max(b, nanLow(r.ChiCloud))
	}
}

func nanLow(x float64) float64 {
	if math.IsNaN(x) {
		return math.Inf(-1)
	}
	return x
}

// chiInside is χ² a pixel inside the condensate.
func (s *session) chiInside(l *level, st *state) float64 {
	in := s.tmpl.condensateOf(&st.p).reach(st.p[pX], st.p[pY])
	most := 1.0
	if s.tmpl.gaussian {
		most = 4
	}
	sum, n := 0.0, 0
	for j := range l.h {
		a, b := in.row(float64(j), most, l.w)
		for _, v := range s.ws.resid[j*l.w+a : j*l.w+b] {
			if !math.IsNaN(v) {
				sum += v * v
				n++
			}
		}
	}
	if n == 0 {
		return math.NaN()
	}
	return sum / float64(n)
}

// chiBlocks is the mean square of the blocks' summed residuals, each over √(its pixels), of the
// blocks whose centre lies within 2.5 widths or 1.2 radii of the cloud; 1 for white noise.
func (s *session) chiBlocks(l *level, st *state) float64 {
	const side = 8
	most := 1.44
	if s.tmpl.gaussian {
		most = 6
	}
	under := s.cover(st, 6.25, most)
	sum, n := 0.0, 0
	for j := 0; j+side <= l.h; j += side {
		for i := 0; i+side <= l.w; i += side {
			if !under.holds(float64(i)+3.5, float64(j)+3.5) {
				continue
			}
			if v, ok := s.block(l, i, j, side); ok {
				sum += v
				n++
			}
		}
	}
	if n < 2 {
		return math.NaN()
	}
	return sum / float64(n)
}

func (s *session) block(l *level, i, j, side int) (float64, bool) {
	sum, n := 0.0, 0
	for y := j; y < j+side; y++ {
		for x := i; x < i+side; x++ {
			if v := s.ws.resid[y*l.w+x]; !math.IsNaN(v) {
				sum += v
				n++
			}
		}
	}
	return sum * sum / math.Max(1, float64(n)), n >= side*side/2
}

// compare fills the checks in which two routes lead to one number.
func (s *session) compare(full *state, r *Result) error {
	c := &r.Checks
	if v := r.Numbers.MuOverMuAtoms; !math.IsNaN(v.V) {
		c.MuOverMuAtoms, c.MuOverMuAtomsErr = v.V, v.Err
	}
	if full.kind.condensate && full.kind.thermal {
		c.ThermalOverSaturated, c.ThermalOverSatErr = r.Numbers.ThermalOverSaturated.V, r.Numbers.ThermalOverSaturated.Err
	}
	if err := s.compareFree(full, c); err != nil {
		return err
	}
	return s.compareWings(full, c)
}

// compareFree fits the full picture once more as it was and with every width by itself, both under
// the same variances, and notes the ratios between the axes.
func (s *session) compareFree(full *state, c *Checks) error {
	s.freezeFull(full)
	same, err := s.runFull(full.kind, full.p, 3e-3)
	if err != nil {
		return err
	}
	k := full.kind
	k.free, k.fixRadius = !k.free, false
	free, err := s.runFull(k, full.p, 3e-3)
	if err != nil {
		return err
	}
	tied := same
	if full.kind.free {
		tied, free = free, same
	}
	if !free.used() || free.cov == nil {
		return nil
	}
	c.TiedOverFree = tied.chi2 - free.chi2
	if s.shown = s.shapeOf(free); c.TiedOverFree > hopeless {
		if err := s.exploreFree(); err != nil {
			return err
		}
	}
	c.TiedOverFreeDof = 0
	ratio := func(a, b int) (v, e float64) {
		j := [][numParams]float64{{}}
		v = math.Exp(2 * (free.p[a] - free.p[b]))
		j[0][a], j[0][b] = 2*v, -2*v
		return v, math.Sqrt(free.spread(j)[0][0])
	}
	if k.thermal {
		c.TRatio, c.TRatioErr = ratio(pWidth1, pWidth2)
		c.TiedOverFreeDof++
	}
	if k.condensate && !s.tmpl.gaussian {
		c.MuRatio, c.MuRatioErr = ratio(pRadius1, pRadius2)
		c.TiedOverFreeDof++
	}
	return nil
}

// hopeless is the χ² between the tied and the free fit at which the ties, not the cloud, decide
// what was found.
const hopeless = 200

// exploreFree looks at the picture again with every width free, so that the search of a wrong
// setting sees both parts of a cloud that the tied forms could not take apart.
func (s *session) exploreFree() error {
	t := *s
	t.opt.Free, t.opt.searchFree, t.opt.Near = true, true, nil
	c, err := t.explore()
	if err != nil {
		return err
	}
	if st, _ := t.choose(c); st.used() && st.cov != nil && (st.kind.thermal || st.kind.condensate) {
		s.shown = s.shapeOf(st)
	}
	s.iterations = t.iterations
	return nil
}

// shapeOf notes what a free fit shows, with the errors of the ratios between its parts.
func (s *session) shapeOf(st *state) *measuredShape {
	m := &measuredShape{thermal: st.p[pThermal] > 0, condensate: st.p[pCondensate] > 0}
	m.width, m.radius = s.tmpl.thermalOf(&st.p).square, s.tmpl.condensateOf(&st.p).square
	sums, j := s.tmpl.measured(&st.p, st.kind)
	m.thermalSum, m.condenSum = sums.ThermalSum, sums.CondensateSum
	var logs [numRatios][numParams]float64
	logs[ratioT][pWidth1], logs[ratioT][pWidth2] = 2, -2
	logs[ratioMu][pRadius1], logs[ratioMu][pRadius2] = 2, -2
	m.alpha, m.fugacity = st.p[pAlpha], st.kind.alpha && !st.kind.condensate
	slope := 0.0
	if m.fugacity {
		slope = bose.G2(m.alpha) / bose.G3(m.alpha)
	}
	for i := range numParams {
		logs[ratioMuN][i] = j[atMu][i]/sums.Mu - 0.4*j[atCondensate][i]/sums.CondensateSum
		logs[ratioSat][i] = j[atThermal][i]/sums.ThermalSum - 3*j[atT][i]/sums.T + slope*j[atAlpha][i]
	}
	c := st.spread(logs[:])
	for i := range m.errs {
		if m.errs[i] = math.Sqrt(c[i][i]); math.IsNaN(m.errs[i]) {
			m.errs[i] = 0
		}
	}
	return m
}

// compareWings fits the temperature outside the condensate alone, or outside one width of a
// thermal cloud, with the centre held.
func (s *session) compareWings(st *state, c *Checks) error {
	if !st.kind.thermal {
		return nil
	}
	l := s.levels[s.work]
	in, most := s.tmpl.thermalOf(&st.p).reach(st.p[pX], st.p[pY]), 1.0
	if st.kind.condensate {
		in, most = s.tmpl.condensateOf(&st.p).reach(st.p[pX], st.p[pY]), 1.3
		if s.tmpl.gaussian {
			most = 12
		}
	}
	skip := make([]bool, l.w*l.h)
	for o := range skip {
		skip[o] = in.at(l.at(o%l.w), l.at(o/l.w)) < most
	}
	k := st.kind
	k.condensate, k.alpha, k.fixCentre = false, false, true
	start := st.p
	start[pCondensate] = 0
	p := s.problem(s.work, &start, k)
	p.level = p.level.without(skip)
	p.fine = p.level
	w, err := s.ws.minimize(s.ctx, p, k, start, 0.01)
	if err != nil {
		return err
	}
	if w.used() && w.cov != nil && w.p[pThermal] > 0 {
		m, j := s.tmpl.measured(&w.p, k)
		c.WingsT, c.WingsTErr = m.T, math.Sqrt(w.spread(j[2:3])[0][0])
	}
	return nil
}
