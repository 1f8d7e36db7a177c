package fit

import (
	"context"
	"errors"
	"fmt"
	"math"

	"fallshadow/model"
	"fallshadow/model/numbers"
)

// Cloud fits the cloud in a picture after a flight (s) and returns what it is, with errors,
// comparisons and flags; it needs no first guess. It picks between a thermal part, both
// parts, a condensate and none by Options. ws is the worker's memory. The error says what
// is wrong with the input, that no minimum was found, or that ctx was done.
func Cloud(ctx context.Context, pic *Picture, lab *Lab, flight float64, opt Options, ws *Workspace) (*Result, error) {
	s, err := newSession(ctx, pic, lab, flight, opt, ws)
	if err != nil {
		return nil, err
	}
	c, err := s.explore()
	if err != nil {
		return nil, err
	}
	chosen, r, err := s.settleOn(c)
	if err != nil {
		return nil, err
	}
	if r, err = s.secondThoughts(c, chosen, r); err != nil {
		return nil, err
	}
	r.Iterations = s.iterations
	r.Touches = r.Model != ModelNone && s.touches(r)
	r.Flags = append(r.Flags, s.warnings(r)...)
	return r, nil
}

// settleOn finishes the model chosen, or a simpler one where the full picture does not tell its
// parameters or has no minimum for them.
func (s *session) settleOn(c *candidates) (*state, *Result, error) {
	for {
		chosen, model := s.choose(c)
		r := &Result{Model: model, Form: s.form(chosen.kind)}
		err := error(nil)
		if !chosen.used() {
			err = stateError("the fit found no minimum", chosen)
		} else {
			err = s.finish(c, chosen, r)
		}
		if !errors.Is(err, errSingular) && !errors.Is(err, errNoMinimum) {
			return chosen, r, err
		}
		faint := c.none.used() && c.none.chi2-chosen.chi2 < faintChi2*s.opt.CloudChi2
		switch {
		case model == ModelBimodal && (c.thermal != nil || c.alone != nil):
			c.both = nil
		case model != ModelNone && faint:
			c.thermal, c.both, c.alone = nil, nil, nil
		default:
			return nil, nil, err
		}
	}
}

// faintChi2 is up to how many times what any cloud must bring a fit without an end is none of a cloud.
const faintChi2 = 10

// errSingular says that a model has parameters on which the picture does not depend.
var errSingular = errors.New("the picture does not determine the parameters")

// errNoMinimum says that a search came to no end.
var errNoMinimum = errors.New("no minimum")

// finish refines the chosen model on the full picture and fills the result.
func (s *session) finish(c *candidates, chosen *state, r *Result) error {
	if s.opt.Free && r.Model != ModelNone {
		k := chosen.kind
		k.free = true
		free, err := s.run(s.work, k, chosen.p, 1e-3)
		if err != nil {
			return err
		}
		if free.used() {
			chosen = free
		}
	}
	full, err := s.refine(chosen)
	if err != nil {
		return err
	}
	if s.opt.MeanField && r.Model == ModelBimodal && !s.tmpl.gaussian {
		if full, err = s.meanField(full); err != nil {
			return err
		}
		r.Form = s.form(full.kind)
	}
	r.clear()
	s.residuals(full, r)
	if s.opt.Maps {
		r.Maps = s.maps(full)
	}
	if r.Model == ModelNone {
		return s.limitNone(full, r)
	}
	if err := s.fillShape(full, r); err != nil {
		return err
	}
	s.sum(full, r)
	if err := s.compare(full, r); err != nil {
		return err
	}
	return s.limits(c, full, r)
}

// impossible says that the widths of a thermal part do not belong to its number: even three errors
// above its T, or at the high end of the interval of a poor one, the trap could not hold two thirds
// of its atoms, semi-ideal ones included.
func (s *session) impossible(r *Result) bool {
	n := &r.Numbers
	if s.tmpl.gaussian {
		return false
	}
	high := n.T.High
	if math.IsNaN(high) || n.T.Err <= poor*n.T.V {
		high = n.T.V + 3*n.T.Err
	}
	most := model.ThermalNumber(high, 0, s.lab.Trap)
	sp := &s.lab.Species
	if mix, err := model.SemiIdealAt(high, n.Mu.V, sp.Mass, sp.ScatteringLength, s.lab.Trap); err == nil {
		most = mix.Thermal
	}
	return n.Thermal.V > 1.5*most
}

// secondThoughts looks again at a condensed cloud whose thermal part the widths alone do not
// tell, or tell so poorly that its number is lost in the light: in equilibrium it is saturated, so
// that one number, T, says both how wide and how many. The answer is kept where it sees thermal atoms.
func (s *session) secondThoughts(c *candidates, chosen *state, r *Result) (*Result, error) {
	if s.opt.Fugacity != FugacityModel || s.tmpl.gaussian {
		return r, nil
	}
	st := *chosen
	switch {
	case r.Model == ModelBimodal && s.impossible(r):
		m, _ := s.tmpl.measured(&st.p, st.kind)
		s.saturate(&st.p, templateT*math.Cbrt(m.ThermalSum*s.perSum()/model.ThermalNumber(templateT, 0, s.lab.Trap)))
	case r.Model == ModelBimodal && !(r.Numbers.Thermal.V > 2*r.Numbers.Thermal.Err):
		s.saturate(&st.p, 0.5*model.CriticalTemperature(r.Numbers.Condensate.V, s.lab.Trap))
	case r.Model == ModelCondensate && r.Numbers.T.High > 0:
		st.kind = s.both()
		s.saturate(&st.p, 0.8*r.Numbers.T.High)
	default:
		return r, nil
	}
	again := *s
	again.opt.Fugacity = FugacityNumber
	n := &Result{Model: ModelBimodal, Form: again.form(st.kind)}
	if err := again.finish(c, &st, n); err != nil {
		// A second thought that comes to nothing leaves the first; only the end of ctx is an end.
		return r, s.ctx.Err()
	}
	s.iterations = again.iterations
	if thermal := n.Numbers.Thermal; r.Model == ModelCondensate && !(thermal.V > 2*thermal.Err) {
		return r, nil
	}
	if pixels := float64(s.pic.Width * s.pic.Height); (n.ChiPerDof-r.ChiPerDof)*pixels > hopeless {
		return r, nil // no tie to the number mends this: a setting is wrong
	}
	s.shown = again.shown
	n.Flags = append(n.Flags, FlagByNumber)
	return n, nil
}

// saturate gives the parameters the thermal part of a saturated gas at T in K.
func (s *session) saturate(q *params, T float64) {
	l := 0.5 * math.Log(T/templateT)
	q[pWidth1], q[pWidth2], q[pAlpha] = l, l, 0
	m, _ := s.tmpl.measured(&params{pThermal: 1, pWidth1: l, pWidth2: l}, kind{thermal: true})
	q[pThermal] = model.ThermalNumber(T, 0, s.lab.Trap) / s.perSum() / m.ThermalSum
}

// settled is the step in standard deviations after which variances taken from the model anew
// would move the parameters by less than a thousandth of one.
const settled = 0.3

// refine minimises on the full picture, its variances taken from the model, until that has
// settled.
func (s *session) refine(st *state) (*state, error) {
	for range 5 {
		s.freezeFull(st)
		next, err := s.settle(st)
		if err != nil {
			return nil, err
		}
		moved := next.moved(st)
		st = next
		if moved < settled {
			break
		}
	}
	return st, nil
}

// settle minimises on the full picture under the variances as they stand. A condensate of about a
// pixel is all kinks to a search that then never ends: where a second one from there does not move
// it either, it has arrived.
func (s *session) settle(st *state) (*state, error) {
	for range 3 {
		next, err := s.runWidth(func(k kind, start params) (*state, error) {
			return s.runFull(k, start, 3e-3)
		}, st.kind, st.p)
		if err != nil || next.used() {
			return next, err
		}
		if next.cov != nil && next.moved(st) < settled {
			return next, nil
		}
		st = next
	}
	return nil, stateError("the fit of the full picture found no minimum", st)
}

// moved is the largest step from o in standard deviations.
func (s *state) moved(o *state) float64 {
	most := 0.0
	for i := range numParams {
		if v := s.variance(i); v > 0 {
			most = math.Max(most, math.Abs(s.p[i]-o.p[i])/math.Sqrt(v))
		}
	}
	return most
}

// fillShape turns parameters into lengths and numbers.
func (s *session) fillShape(st *state, r *Result) error {
	q, px := &st.p, s.tmpl.pixel
	r.X, r.Y = q[pX], q[pY]
	r.Angle = s.tmpl.angle + q[pAngle]
	if st.kind.thermal {
		for i, v := range s.tmpl.thermalOf(q).square {
			r.Width[i] = math.Sqrt(v) * px
		}
	}
	if st.kind.condensate {
		for i, v := range s.tmpl.condensateOf(q).square {
			r.Radius[i] = math.Sqrt(v) * px
		}
	}
	r.PeakOD = q[pThermal] + q[pCondensate]
	if st.cov == nil {
		return fmt.Errorf("%w of the %s fit: the normal matrix is singular", errSingular, r.Model)
	}
	m, j := s.tmpl.measured(q, st.kind)
	cov := matrix(st.spread(j[:]))
	if s.opt.ScaleErrors {
		for i := range cov {
			for k := range cov[i] {
				cov[i][k] *= r.ChiPerDof
			}
		}
	}
	shifts, err := s.shifts(st, m)
	if err != nil {
		return err
	}
	r.Numbers = numbers.Compute(m, cov, shifts, s.numbersLab(s.lab))
	return nil
}

func matrix(c [][]float64) (m [numbers.NumMeasured][numbers.NumMeasured]float64) {
	for i := range m {
		copy(m[i][:], c[i])
	}
	return m
}

func (s *session) numbersLab(lab *Lab) numbers.Lab {
	return numbers.Lab{Species: lab.Species, Trap: lab.Trap, Pixel: lab.Optics.Pixel}
}

// clear sets every number of a result to 'not told'.
func (r *Result) clear() {
	nan := math.NaN()
	r.X, r.Y, r.Angle, r.PeakOD, r.ChiPerDof, r.ChiCloud, r.Sum, r.SumErr = nan, nan, nan, nan, nan, nan, nan, nan
	r.Width, r.Radius = [2]float64{nan, nan}, [2]float64{nan, nan}
	r.Checks = Checks{nan, nan, nan, nan, nan, nan, nan, nan, nan, nan, nan, 0, nan, nan}
	r.Numbers = numbers.Nothing()
}
