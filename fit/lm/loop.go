package lm

import (
	"context"
	"fmt"
	"math"
)

// loop is the state of one minimisation: from the model at x it takes a damped step within
// the bounds, evaluates there, keeps or drops the point, and adapts the damping.
type loop struct {
	box
	set   Settings
	lin   linear
	damp  damping
	x, y  []float64 // centre and point tried
	d     []float64 // step
	scale []float64 // squared column norms
	free  []bool
	moves []bool // free entries of this step
	res   Result
}

func (l *loop) run(ctx context.Context, lin linear, x0 []float64, s *Settings) (Result, error) {
	if s == nil {
		s = new(Settings)
	}
	if err := s.check(x0); err != nil {
		return Result{}, err
	}
	l.reset(lin, x0, s)
	l.res.F = l.evaluate(l.x)
	if !finite(l.res.F) || !lin.accept() {
		l.finish(StartOutside)
		return l.res, fmt.Errorf("lm: %s", StartOutside.Sentence())
	}
	reason := Unfinished
	for reason == Unfinished {
		if err := ctx.Err(); err != nil {
			l.finish(Cancelled)
			return l.res, fmt.Errorf("lm: %s: %w", Cancelled.Sentence(), err)
		}
		reason = l.iterate()
	}
	l.finish(reason)
	return l.res, nil
}

func (l *loop) reset(lin linear, x0 []float64, s *Settings) {
	n := len(x0)
	l.lin, l.set = lin, *s
	l.box = box{s.Lower, s.Upper, s.Fixed, s.MaxStep, s.RelStep}
	standard := func(v *float64, d float64) {
		if *v == 0 {
			*v = d
		}
	}
	standard(&l.set.XTol, 1e-10)
	standard(&l.set.FTol, 1e-12)
	if l.set.MaxIterations == 0 {
		l.set.MaxIterations = 200
	}
	l.damp.start(s.Lambda)
	l.x, l.y, l.d, l.scale = grow(l.x, n), grow(l.y, n), grow(l.d, n), grow(l.scale, n)
	l.free, l.moves = grow(l.free, n), grow(l.moves, n)
	copy(l.x, x0)
	l.res = Result{X: l.x, H: grow(l.res.H, n*n), AtBound: grow(l.res.AtBound, n), fixed: grow(l.res.fixed, n)}
	copy(l.res.fixed, s.Fixed)
}

func (l *loop) evaluate(x []float64) float64 {
	l.res.Evaluations++
	return l.lin.try(x)
}

func (l *loop) finish(reason Termination) {
	l.res.Reason, l.res.Lambda = reason, l.damp.lambda
	if reason != StartOutside {
		l.lin.normal(l.res.H)
	}
}

// iterate takes one step, or says why there is none to take.
func (l *loop) iterate() Termination {
	g := l.lin.gradient()
	if l.hold(l.x, g, l.free, l.res.AtBound) == 0 {
		return l.nothingFree()
	}
	l.lin.norms(l.y)
	for i,v:=range l.y { l.scale[i]=max(l.scale[i],v) }
	if l.upright(g) {
		return SmallGradient
	}
	if l.res.Iterations >= l.set.MaxIterations {
		return IterationLimit
	}
	l.res.Iterations++
	promise, ok := l.step(l.damp.lambda)
	if !ok {
		l.damp.bad()
		return l.stalled()
	}
	end := l.converged(promise)
	if end != Unfinished && l.damp.lambda > 0 {
		// A strong damping makes any step small: what counts is the undamped one.
		copy(l.y, l.d)
		if p, ok := l.step(0); ok {
			promise, end = p, l.converged(p)
		} else {
			copy(l.d, l.y)
		}
	}
	l.move(l.y, l.x, l.d)
	if end != Unfinished && l.set.AcceptPredicted {
		copy(l.x, l.y)
		l.res.F -= promise
		return end
	}
	return l.judge(promise, end)
}

// judge evaluates F at the point tried and moves there if that is lower.
func (l *loop) judge(promise float64, end Termination) Termination {
	f := l.evaluate(l.y)
	gain := (l.res.F - f) / promise
	if !(f <= l.res.F) || !(promise > 0) || !l.lin.accept() {
		if end != Unfinished {
			return end
		}
		l.damp.bad()
		return l.stalled()
	}
	copy(l.x, l.y)
	l.res.F = f
	l.damp.good(gain)
	return end
}

func (l *loop) nothingFree() Termination {
	for i := range l.x {
		if !l.res.fixed[i] {
			return SmallGradient
		}
	}
	return NothingFree
}

func (l *loop) stalled() Termination {
	if l.damp.exhausted() {
		return Stalled
	}
	return Unfinished
}

// upright says whether every free column of J is at a right angle to ρ within GTol.
func (l *loop) upright(g []float64) bool {
	for i, f := range l.free {
		if f && math.Abs(g[i]) > max(l.set.GTol, 0)*math.Sqrt(l.scale[i]*l.res.F) {
			return false
		}
	}
	return true
}

// step fills d with the damped step over the free parameters and returns the decrease of
// F that it promises. What would cross a bound ends there and the rest is solved again.
func (l *loop) step(lambda float64) (promise float64, ok bool) {
	clear(l.d)
	copy(l.moves, l.free)
	for again := true; again; again = l.stop(l.x, l.d, l.moves) {
		if !l.lin.solve(l.d, l.moves, lambda, l.scale) || !allFinite(l.d) {
			return 0, false
		}
	}
	l.shorten(l.x, l.d)
	return l.lin.decrease(l.d), true
}

// converged says whether the step d with the promised decrease of F ends the search.
func (l *loop) converged(promise float64) Termination {
	dd, xx := 0.0, 0.0
	for i, s := range l.scale {
		dd += s * l.d[i] * l.d[i]
		xx += s * l.x[i] * l.x[i]
	}
	switch {
	case promise <= l.set.PredictTol && l.set.PredictTol > 0:
		return PredictedDecrease
	case l.set.FTol > 0 && promise <= l.set.FTol*l.res.F:
		return SmallDecrease
	case l.set.XTol > 0 && math.Sqrt(dd) <= l.set.XTol*math.Sqrt(xx):
		return SmallStep
	case promise <= epsilon*l.res.F:
		return RoundingLimit
	}
	return Unfinished
}
