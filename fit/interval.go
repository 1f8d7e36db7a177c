package fit

import (
	"math"

	"fallshadow/model"
	"fallshadow/model/bose"
	"fallshadow/model/numbers"
)

// lopsided is the ratio of error to value beyond which an interval by profile likelihood takes
// the place of a symmetric error. For the T of a nearly pure condensate the upper side is a fifth
// longer there than the lower one: values that came out low would have too small an error.
const lopsided = 0.1

// poor is the ratio beyond which a temperature is flagged.
const poor = 0.2

// The places of numbers in a Measured.
const (
	atThermal = iota
	atCondensate
	atT
	atMu
	atAlpha
)

// pull draws one measured number to a target with the width eps, so that a minimisation
// follows the profile of the likelihood along that number.
type pull struct {
	at          int
	target, eps float64
}

func (u *pull) add(s *search, q *params, h, g []float64) float64 {
	m, j := s.tmpl.measured(q, s.kind)
	r := (*measuredAt(&m, u.at) - u.target) / u.eps
	if !finite(r) {
		return math.Inf(1)
	}
	if h == nil {
		return r * r
	}
	for i := range numParams {
		g[i] += r * j[u.at][i] / u.eps
		for l := range numParams {
			h[i*numParams+l] += j[u.at][i] * j[u.at][l] / (u.eps * u.eps)
		}
	}
	return r * r
}

// numberTie draws the thermal number to surplus g3(z)(kT/ħω̄)³ by numberWidth of itself.
type numberTie struct {
	trap    model.Trap
	perSum  float64
	surplus float64
}

const numberWidth = 1e-3

func (lab *Lab) numberTie(e *excess) *numberTie {
	return &numberTie{trap: lab.Trap, perSum: lab.perSum(), surplus: e.number()}
}

func (n *numberTie) add(s *search, q *params, h, g []float64) float64 {
	m, j := s.tmpl.measured(q, s.kind)
	r := math.Log(m.ThermalSum*n.perSum/n.surplus/model.ThermalNumber(m.T, m.Alpha, n.trap)) / numberWidth
	if !finite(r) {
		return math.Inf(1)
	}
	if h == nil {
		return r * r
	}
	slope := bose.G2(m.Alpha) / bose.G3(m.Alpha)
	var d params
	for i := range d {
		d[i] = (j[atThermal][i]/m.ThermalSum - 3*j[atT][i]/m.T + slope*j[atAlpha][i]) / numberWidth
	}
	for i := range d {
		g[i] += r * d[i]
		for l := range d {
			h[i*numParams+l] += d[i] * d[l]
		}
	}
	return r * r
}

func measuredAt(m *numbers.Measured, i int) *float64 {
	return [...]*float64{&m.ThermalSum, &m.CondensateSum, &m.T, &m.Mu, &m.Alpha}[i]
}

// limits gives an interval to numbers that the picture knows poorly and upper limits to the
// parts that were not found.
func (s *session) limits(c *candidates, full *state, r *Result) error {
	n := &r.Numbers
	switch r.Model {
	case ModelBimodal:
		if err := s.interval(full, atT, &n.T, 1); err != nil {
			return err
		}
		if err := s.interval(full, atCondensate, &n.Condensate, s.perSum()); err != nil {
			return err
		}
		return s.interval(full, atMu, &n.Mu, 1)
	case ModelThermal:
		if err := s.interval(full, atT, &n.T, 1); err != nil {
			return err
		}
		s.limitCondensate(c.thermal, n, &r.Checks)
		s.undecided(c, n)
		return nil
	case ModelCondensate:
		return s.limitThermal(c.alone, n)
	}
	return nil
}

// perSum turns a sum of σ0 n over pixels into atoms.
func (lab *Lab) perSum() float64 {
	return lab.Optics.Pixel * lab.Optics.Pixel / lab.Species.Sigma0()
}

func (s *session) perSum() float64 { return s.lab.perSum() }

// interval replaces a symmetric error by where χ² has risen by 1 on either side; where one
// side has no end the other is moved to the one-sided 95 % limit. It works on the full picture:
// a poorly known wing hangs on small misfits of a coarse one. A fugacity at an end of its range
// hides from the covariance how far it would let the number go: half of the interval is then the
// error, too.
func (s *session) interval(full *state, at int, v *numbers.Value, unit float64) error {
	ended := full.ended()
	if !(v.Err > lopsided*math.Abs(v.V) || ended && v.Err > 0) || full.cov == nil {
		return nil
	}
	rest, err := s.runFull(full.kind, full.p, 1e-3)
	if err != nil {
		return err
	}
	if !rest.used() {
		rest = full // nothing is lower than where it began
	}
	m, j := s.tmpl.measured(&rest.p, rest.kind)
	p := profile{s: s, rest: rest, at: at, best: *measuredAt(&m, at), sigma: math.Sqrt(rest.spread(j[at : at+1])[0][0])}
	low, err := p.side(-1, 1)
	if err != nil {
		return err
	}
	high, err := p.side(1, 1)
	if err != nil {
		return err
	}
	if math.IsNaN(high) {
		if low, err = p.side(-1, math.Sqrt(oneSided)); err != nil {
			return err
		}
	}
	v.Low, v.High = math.Max(0, v.V+(low-p.best)*unit), v.V+(high-p.best)*unit
	if half := 0.5 * (v.High - v.Low); ended && half > v.Err {
		v.Err = half
	}
	return nil
}

// profile is χ² at its least as a function of one measured number.
type profile struct {
	s           *session
	rest        *state
	at          int
	best, sigma float64
}

// side finds on one side the value at which the root of the rise of χ² is r, by secant steps;
// it returns 0 where even next to nothing costs less, NaN where eight times the best does.
func (p *profile) side(sign, r float64) (float64, error) {
	x0, r0 := p.best, 0.0
	x1 := p.best + sign*p.sigma*r
	for range 10 {
		x1 = math.Min(math.Max(x1, 0.02*p.best), 8*p.best)
		r1, err := p.rise(x1)
		if err != nil || math.Abs(r1-r) < 0.02 {
			return x1, err
		}
		switch {
		case x1 <= 0.02*p.best && r1 < r:
			return 0, nil
		case x1 >= 8*p.best && r1 < r:
			return math.NaN(), nil
		}
		slope := (r1 - r0) / (x1 - x0)
		step := 2 * sign * p.sigma
		if sign*slope > 0 {
			step = clamp((r-r1)/slope, math.Abs(step))
		}
		x0, r0, x1 = x1, r1, x1+step
	}
	return x1, nil
}

// rise is the root of the rise of χ² where the number is held at x.
func (p *profile) rise(x float64) (float64, error) {
	q := p.s.split(&p.rest.p, p.rest.kind)
	q.pull = &pull{p.at, x, 1e-3 * p.sigma}
	got, err := p.s.ws.minimize(p.s.ctx, q, p.rest.kind, p.rest.p, 1e-3)
	if err != nil {
		return 0, err
	}
	return math.Sqrt(math.Max(0, got.chi2-p.rest.chi2)), nil
}

// oneSided is the rise of χ² at a one-sided 95 % limit.
const oneSided = 2.706

// limitCondensate sets the upper limit of N0 in a thermal cloud: a condensate of the size that N0
// atoms have, raised until χ² stands 2.7 above its least; and the number that would be believed,
// where it stands as high as is asked of a condensate.
func (s *session) limitCondensate(st *state, n *numbers.Result, c *Checks) {
	k := st.kind
	k.condensate, k.fixCondensate, k.fixRadius = true, true, true
	square := s.tmpl.condensate.square
	least := 7 * s.groundState() / math.Sqrt(square[0]*square[1])
	set := func(q *params, atoms float64) {
		l := 0.0 // few atoms that attract each other have the size of the template
		if !s.tmpl.gaussian {
			m, err := model.Mu(atoms, s.lab.Species.Mass, s.lab.Species.ScatteringLength, s.lab.Trap)
			if err != nil {
				return
			}
			// Radii² of Thomas-Fermi and, seven variances, of a few atoms, joined within a tenth
			// where neither holds.
			l = 0.5 * math.Log(math.Hypot(m/templateMu, least))
		}
		q[pRadius1], q[pRadius2] = l, l
		e := s.tmpl.condensateOf(q)
		size := math.Sqrt(e.square[0] * e.square[1])
		q[pCondensate] = atoms / s.perSum() / (s.tmpl.condensateArea() * size)
	}
	limit := s.raise(st, k, set, oneSided, 1e-3*n.Thermal.V, n.Thermal.V)
	if math.IsNaN(limit) { // any number could hide: the centre is not in the picture
		n.Condensate.V, n.Fraction.V = limit, limit
	}
	n.Condensate.High = limit
	n.Fraction.High = limit / (limit + n.Thermal.V)
	c.CondensateDetected = s.raise(st, k, set, s.opt.CondensateChi2, limit, n.Thermal.V)
}

// undecidedGain is the decrease of χ² by two numbers that chance exceeds in one of twenty.
const undecidedGain = 5.99

// undecided widens T, N_th and N of a thermal cloud where a condensate gains less than is asked of one
// but more than chance gives: if there is one, the thermal form has taken it for a peak of colder atoms.
// The intervals reach from the lower end of both answers to the upper one.
func (s *session) undecided(c *candidates, n *numbers.Result) {
	if !c.both.used() || c.both.cov == nil || c.thermal.chi2-c.both.chi2 < undecidedGain*s.doubt(c.both) {
		return
	}
	without, _ := s.tmpl.measured(&c.thermal.p, c.thermal.kind)
	with, j := s.tmpl.measured(&c.both.p, c.both.kind)
	cov, unit := c.both.spread(j[:]), s.perSum()
	thermal, condensate := cov[atThermal][atThermal], cov[atCondensate][atCondensate]
	stretch(&n.T, with.T-without.T, math.Sqrt(cov[atT][atT]))
	stretch(&n.Thermal, unit*(with.ThermalSum-without.ThermalSum), unit*math.Sqrt(thermal))
	stretch(&n.Atoms, unit*(with.ThermalSum+with.CondensateSum-without.ThermalSum),
		unit*math.Sqrt(thermal+condensate+2*cov[atThermal][atCondensate]))
}

// stretch makes the interval of a value, or its error if it has none, reach over another answer that is
// by step away and has the error err; an end that is open stays so.
func stretch(v *numbers.Value, step, err float64) {
	if math.IsNaN(v.Low) && math.IsNaN(v.High) {
		v.Low, v.High = v.V-v.Err, v.V+v.Err
	}
	v.Low, v.High = math.Min(v.Low, v.V+step-err), math.Max(v.High, v.V+step+err)
}

// groundState is the product of the rms sizes (px²) in the picture of atoms that do not interact, in
// the lowest state of the trap: ħ/(2mω) along each axis, expanded as any ideal gas.
func (s *session) groundState() float64 {
	b, err := model.ExpandThermal(s.lab.Trap, s.flight, s.lab.Release)
	if err != nil {
		return 0
	}
	var v [3]float64
	for i, w := range s.lab.Trap.Omega {
		v[i] = model.HBar / (2 * s.lab.Species.Mass * w) * b[i] * b[i]
	}
	return math.Sqrt(s.lab.View.Project(v).Det()) / (s.tmpl.pixel * s.tmpl.pixel)
}

// limitThermal sets the upper limits of T and N_th beside a condensate, and with them the
// intervals of N and N0 and the lower limit of the fraction: a saturated thermal part at T, raised
// until χ² stands 2.7 above its least. The atoms that hide there are missing from N, and those
// of them that lie under the condensate were counted into N0.
func (s *session) limitThermal(st *state, n *numbers.Result) error {
	k := st.kind
	k.thermal, k.fixWidth, k.fixThermal = true, true, true
	limit, beside, err := s.climb(st, k, s.saturate, 0.05*n.Tc0.V, 2*n.Tc0.V)
	if err != nil || math.IsNaN(limit) {
		return err
	}
	n.T.High = limit
	n.Thermal.High = model.ThermalNumber(limit, 0, s.lab.Trap)
	n.Condensate.Low = math.Min(beside*s.perSum(), n.Condensate.V) - n.Condensate.Err
	n.Condensate.High = n.Condensate.V + n.Condensate.Err
	n.Atoms.Low, n.Atoms.High = n.Atoms.V-n.Atoms.Err, n.Atoms.V+n.Atoms.Err+n.Thermal.High
	n.Fraction.Low = n.Condensate.Low / (n.Condensate.Low + n.Thermal.High)
	return nil
}

// least returns χ² at its least on the level of choices as one Gauss-Newton step from q promises it.
func (s *session) least(k kind, q params) float64 {
	p := s.problem(s.work, &q, k)
	t := k.tie()
	p.ties = &t
	sr := &search{problem: p, kind: k, tie: t, base: q, h: s.ws.h[:], g: s.ws.g[:]}
	y := make([]float64, t.n)
	for i, a := range t.slot {
		if a >= 0 {
			y[a] = q[i]
		}
	}
	return s.ws.promise(sr, y)
}

// raise finds how far one number can grow from start until χ² stands by above the least it
// had, by steps along the square root of the rise, which is nearly straight; NaN
// where even most costs less.
func (s *session) raise(st *state, k kind, set func(*params, float64), by, start, most float64) float64 {
	q := st.p
	set(&q, 1e-3*start)
	least, x := s.least(k, q), start
	inside, rise := 0.0, 0.0
	for range 12 {
		q := st.p
		set(&q, x)
		chi := s.least(k, q)
		least = math.Min(least, chi)
		r := math.Sqrt((chi - least) / by)
		if math.Abs(r-1) < 0.05 {
			return x
		}
		if r < 1 {
			if x >= most {
				return math.NaN()
			}
			inside, rise = x, r
		}
		next := inside + (x-inside)*(1-rise)/math.Max(r-rise, 0.1)
		if r < 1 {
			next = x * math.Min(4, 1/math.Max(r, 0.25))
		}
		x = math.Min(next, most)
	}
	return x
}

// climb is raise for a χ² that may first fall: it walks up in steps of a fifth and takes the
// last crossing on a straight line of the root. It also returns the sum of the condensate there.
func (s *session) climb(st *state, k kind, set func(*params, float64), low, most float64) (limit, condensate float64, err error) {
	nan, least, before, sum := math.NaN(), math.Inf(1), 0.0, math.NaN()
	for x := low; x < most; x *= 1.2 {
		q := st.p
		set(&q, x)
		got, err := s.run(s.work, k, q, 0.1)
		if err != nil {
			return nan, nan, err
		}
		least = math.Min(least, got.chi2)
		r := math.Sqrt((got.chi2 - least) / oneSided)
		m, _ := s.tmpl.measured(&got.p, k)
		if r > 1 {
			beyond := (r - 1) / math.Max(r-before, 1e-9)
			return x / math.Pow(1.2, beyond), m.CondensateSum + beyond*(zeroNaN(sum-m.CondensateSum)), nil
		}
		before, sum = r, m.CondensateSum
	}
	return nan, nan, nil
}

// limitNone says how many atoms could hide in the middle of an empty picture, spread over a
// sixth of its shorter side (rms), at 95 %.
func (s *session) limitNone(none *state, r *Result) error {
	r.Numbers.Atoms.V = 0
	q := none.p
	q[pX], q[pY] = 0.5*float64(s.pic.Width-1), 0.5*float64(s.pic.Height-1)
	t := s.tmpl.thermal.square
	l := math.Log(float64(min(s.pic.Width, s.pic.Height)) / 6 / math.Sqrt(math.Max(t[0], t[1])))
	q[pWidth1], q[pWidth2], q[pThermal] = l, l, 0.01
	k := kind{thermal: true, fixWidth: true, fixCentre: true}
	st, err := s.run(s.work, k, q, 0.01)
	if err != nil || !st.used() {
		return err
	}
	m, _ := s.tmpl.measured(&params{pThermal: 1, pWidth1: l, pWidth2: l}, k)
	r.Numbers.Atoms.High = (st.p[pThermal] + 1.645*st.unboundError(pThermal)) * m.ThermalSum * s.perSum()
	return nil
}
