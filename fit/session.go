package fit

import (
	"context"
	"errors"
	"fmt"
	"math"
)

// session is the fit of one picture: its levels from full to coarse, and what they share.
type session struct {
	ctx    context.Context
	pic    *Picture
	lab    *Lab
	flight float64
	opt    Options
	ws     *Workspace
	tmpl   template
	law    law
	blur   float64  // optical resolution, px rms
	levels []*level // levels[0] is the full picture
	work   int      // the level of choices and checks
	part   bool     // the picture is a part of a large one
	plain  bool     // the ideal form stands in for the semi-ideal one

	iterations int
	condensed  float64        // N0 of the template of an attractive gas
	shown      *measuredShape // from the free fit, for the search of a wrong setting
}

// The largest side, in bins, of the level where guesses are made and of the one where models
// are chosen and compared.
const (
	guessSide = 64
	workSide  = 200
	leastSide = 12
)

// workBin is the largest bin of the level of choices, px: a condensate is a few of them wide
// in frames of any size.
const workBin = 4

func newSession(ctx context.Context, pic *Picture, lab *Lab, flight float64, opt Options, ws *Workspace) (*session, error) {
	if err := pic.check(); err != nil {
		return nil, err
	}
	if err := lab.check(); err != nil {
		return nil, err
	}
	s := &session{ctx: ctx, pic: pic, lab: lab, flight: flight, opt: opt.filled(), ws: ws, law: newLaw(&lab.Optics)}
	var err error
	if s.tmpl, err = newTemplate(lab, flight, 0); err != nil {
		return nil, err
	}
	s.blur = lab.Optics.Blur / lab.Optics.Pixel
	l := ws.level(0)
	l.view(pic, &lab.Optics)
	if l.linear && l.sigma == 0 {
		l.sigma = densitySigma(l)
		l.cast()
	}
	s.levels = append(s.levels, l)
	for max(l.w, l.h) > guessSide && min(l.w, l.h) >= 2*leastSide {
		if max(l.w, l.h) > workSide && l.bin < workBin {
			s.work = len(s.levels)
		}
		next := ws.level(len(s.levels))
		next.halve(l)
		l = next
		s.levels = append(s.levels, l)
	}
	ws.size(pic.Width * pic.Height)
	return s, nil
}

// densitySigma estimates the noise of a density image from neighbours' differences.
func densitySigma(l *level) float64 {
	v := make([]float64, len(l.atoms))
	for o, d := range l.atoms {
		if l.count[o] > 0 {
			v[o] = d
		}
	}
	if s := spreadOf(v, l.w, l.h); s > 0 {
		return s
	}
	return 1
}

func (pic *Picture) check() error {
	n := pic.Width * pic.Height
	if pic.Width < leastSide || pic.Height < leastSide {
		return fmt.Errorf("the picture is %d x %d pixels: a fit needs at least %d on each side", pic.Width, pic.Height, leastSide)
	}
	counts := pic.Density == nil
	if len(pic.Good) != n || counts && (len(pic.Atoms) != n || len(pic.Light) != n) || !counts && len(pic.Density) != n {
		return fmt.Errorf("the picture says %d x %d pixels but its planes have another size", pic.Width, pic.Height)
	}
	good, light := 0, 0.0
	for i, g := range pic.Good {
		if !g {
			continue
		}
		good++
		v := 0.0
		if counts {
			v = pic.Atoms[i] + pic.Light[i]
			light += pic.Light[i]
		} else {
			v = pic.Density[i]
		}
		if !finite(v) {
			return fmt.Errorf("pixel (%d, %d) is not a finite number but counts as good", i%pic.Width, i/pic.Width)
		}
	}
	if good < n/4 {
		return fmt.Errorf("only %d of %d pixels are good", good, n)
	}
	if counts && !(light > float64(good)) {
		return errors.New("the reference holds no light")
	}
	return nil
}

func (lab *Lab) check() error {
	o := &lab.Optics
	switch {
	case !(o.Pixel > 0) || !(o.Blur >= 0) || !(o.Alpha > 0) || !(o.Saturation > 0) || !(o.Stray >= 0 && o.Stray < 1) || !finite(o.Detuning):
		return errors.New("the optics need a pixel, alpha and saturation above zero, no negative blur, and less than all of the light stray")
	case math.IsNaN(lab.Species.ScatteringLength) || lab.Species.ScatteringLength == 0:
		return fmt.Errorf("the scattering length of %s is not given", lab.Species.Name)
	}
	return nil
}

// problem returns the problem at level i with the room of the parameters.
func (s *session) problem(i int, q *params, k kind) *problem {
	p := &problem{level: s.levels[i], fine: s.levels[i], tmpl: &s.tmpl, law: s.law, blur: s.blur, buf: &s.ws.buf}
	p.room = s.roomFor(i, q, k)
	if s.opt.Fugacity == FugacityNumber && !k.fixThermal {
		p.number = s.lab.numberTie(s.tmpl.excess)
	}
	return p
}

// smoothBin is the largest ratio of the variance of a bin, bin²/12, to that of the thermal part
// at which its pixels may be summed: what a fit loses is of second order in it.
const smoothBin = 2e-3

// split returns the problem of the full picture: every pixel in the room of the condensate,
// outside as coarse bins as the thermal part and its blur allow.
func (s *session) split(q *params, k kind) *problem {
	p := s.problem(0, q, k)
	e := s.tmpl.thermalOf(q)
	least := math.Min(e.square[0], e.square[1])
	for _, l := range s.levels[1:] {
		bin := float64(l.bin)
		if bin*bin/12 > smoothBin*least && k.thermal || l.bin > 4 {
			break
		}
		p.level = l
	}
	return p
}

// softBlur is the share of a thermal part's variance up to which growing its widths by the blur
// is as good as blurring the light: at a peak density of 1 the light differs by 1e-3 then.
const softBlur = 5e-3

// roomFor is the rectangle that must be blurred pixel by pixel: the condensate with a margin
// to grow into, and a thermal part that the blur is not soft to.
func (s *session) roomFor(i int, q *params, k kind) room {
	bin := float64(s.levels[i].bin)
	blur2 := s.blur*s.blur + bin*bin/12
	margin := 4*math.Sqrt(blur2) + 1.5*bin
	grow := 1.15
	if i > 0 {
		grow = 1.5
	}
	var r room
	if k.condensate {
		if s.tmpl.gaussian {
			grow *= 3.5
		}
		r = around(q[pX], q[pY], s.tmpl.condensateOf(q), grow, margin)
	}
	if e := s.tmpl.thermalOf(q); k.thermal && blur2 > softBlur*math.Min(e.square[0], e.square[1]) {
		r = r.union(around(q[pX], q[pY], e, 4, margin))
	}
	return r
}

// run minimises at level i from start.
func (s *session) run(i int, k kind, start params, tol float64) (*state, error) {
	q := s.prepared(k, start)
	return s.solve(s.problem(i, &q, k), k, q, tol)
}

// runFull minimises on the full picture.
func (s *session) runFull(k kind, start params, tol float64) (*state, error) {
	q := s.prepared(k, start)
	return s.solve(s.split(&q, k), k, q, tol)
}

// prepared sets the parameters that a kind of fit does not have.
func (s *session) prepared(k kind, q params) params {
	if k.thermal && s.opt.Gaussian {
		q[pAlpha] = gaussianAlpha
	} else if k.thermal && k.condensate && !k.alpha {
		q[pAlpha] = 0
	}
	if !k.condensate {
		q[pCondensate] = 0
	}
	if !k.thermal {
		q[pThermal] = 0
	}
	return q
}

func (s *session) solve(p *problem, k kind, start params, tol float64) (*state, error) {
	st, err := s.ws.minimize(s.ctx, p, k, start, tol)
	if err != nil {
		return nil, err
	}
	s.iterations += st.iterations
	return st, nil
}

// runWidth is run for an attractive gas, too: the width of its condensate follows from its
// number, so that both are found in turn until they agree.
func (s *session) runWidth(run func(k kind, start params) (*state, error), k kind, start params) (*state, error) {
	st, err := run(k, start)
	if !s.tmpl.gaussian || !k.condensate || !k.fixRadius {
		return st, err
	}
	n0 := s.condensed
	for turn := 0; err == nil && turn < 30; turn++ {
		m, _ := s.tmpl.measured(&st.p, k)
		n := m.CondensateSum * s.perSum()
		if math.Abs(n-n0) <= 1e-3*n {
			break
		}
		n0 = n
		if s.tmpl, err = newTemplate(s.lab, s.flight, n0); err != nil {
			return nil, fmt.Errorf("width of %.3g condensed atoms: %w", n0, err)
		}
		s.condensed = n0
		st, err = run(k, st.p)
	}
	return st, err
}

// freeze sets the variances of level i from the parameters of st.
func (s *session) freeze(i int, st *state) {
	s.problem(i, &st.p, st.kind).freeze(&st.p, s.ws.kappa, s.ws.kappa)
}

// freezeFull sets those of the full picture.
func (s *session) freezeFull(st *state) {
	s.split(&st.p, st.kind).freeze(&st.p, s.ws.resid, s.ws.kappa)
}
