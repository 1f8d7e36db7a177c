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
	blur2  float64
	levels []*level // levels[0] is the full picture
	work   int      // the level of choices and checks

	iterations int
	condensed  float64        // N0 of the template of an attractive gas
	shown      *measuredShape // from the free fit, for the search of a wrong setting
}

// The largest side, in bins, of the level where guesses are made and of the one where models
// are chosen and compared.
const (
	guessSide = 100
	workSide  = 200
	leastSide = 12
)

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
	b := lab.Optics.Blur / lab.Optics.Pixel
	s.blur2 = b*b + 1.0/12
	l := fullLevel(pic, &lab.Optics)
	if l.linear && l.sigma == 0 {
		l.sigma = densitySigma(l)
	}
	s.levels = append(s.levels, l)
	for max(l.w, l.h) > guessSide && min(l.w, l.h) >= 2*leastSide {
		if max(l.w, l.h) > workSide {
			s.work = len(s.levels)
		}
		l = l.halved()
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
	p := &problem{level: s.levels[i], tmpl: &s.tmpl, law: s.law, blur2: s.blur2, buf: &s.ws.buf}
	if i > s.work {
		p.blur2 = 0 // a first look
	}
	p.room = s.roomFor(i, q, k)
	return p
}

// softBlur is the share of a thermal part's variance up to which growing its widths by the blur
// is as good as blurring the light: at a peak density of 1 the light differs by 1e-3 then.
const softBlur = 5e-3

// roomFor is the rectangle that must be blurred pixel by pixel: the condensate with a margin
// to grow into, and a thermal part that the blur is not soft to.
func (s *session) roomFor(i int, q *params, k kind) room {
	bin := float64(s.levels[i].bin)
	margin := 4*math.Sqrt(s.blur2+bin*bin/12) + 1.5*bin
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
	if e := s.tmpl.thermalOf(q); k.thermal && s.blur2 > softBlur*math.Min(e.square[0], e.square[1]) {
		r = r.union(around(q[pX], q[pY], e, 4, margin))
	}
	return r
}

// run minimises at level i from start.
func (s *session) run(i int, k kind, start params, tol float64) (*state, error) {
	if k.thermal && s.opt.Gaussian {
		start[pAlpha] = gaussianAlpha
	} else if k.thermal && k.condensate {
		start[pAlpha] = 0
	}
	if !k.condensate {
		start[pCondensate] = 0
	}
	if !k.thermal {
		start[pThermal] = 0
	}
	p := s.problem(i, &start, k)
	st, err := s.ws.minimize(s.ctx, p, k, start, tol)
	if err != nil {
		return nil, err
	}
	s.iterations += st.iterations
	return st, nil
}

// runWidth is run for an attractive gas, too: the width of its condensate follows from its
// number, so that both are found in turn until they agree.
func (s *session) runWidth(i int, k kind, start params, tol float64) (*state, error) {
	st, err := s.run(i, k, start, tol)
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
		st, err = s.run(i, k, st.p, tol)
	}
	return st, err
}

// freeze sets the variances of level i from the parameters of st.
func (s *session) freeze(i int, st *state) {
	p := s.problem(i, &st.p, st.kind)
	p.freeze(&st.p, s.ws.kappa)
}
