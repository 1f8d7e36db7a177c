package lm

import (
	"context"
	"fmt"
	"math"
)

// loop is the state of one minimisation: from the model at x it takes a step within radius
// and bounds, evaluates there, keeps or drops the point, and adapts the radius.
type loop struct {
	box
	set   Settings
	lin   linear
	damp  damping
	x, y  []float64 // centre and point tried
	d     []float64 // step
	scale []float64 // squares of D: largest squared column norm so far
	free  []bool
	moves []bool  // free entries that a bound does not stop in this step
	rest  float64 // length of the last step within rounding
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
		l.res.Reason = StartOutside
		return l.res, fmt.Errorf("lm: %s", StartOutside.Sentence())
	}
	for l.res.Reason == Unfinished {
		if err := ctx.Err(); err != nil {
			l.res.Reason = Cancelled
			return l.res, fmt.Errorf("lm: %s: %w", Cancelled.Sentence(), err)
		}
		l.res.Reason = l.iterate()
	}
	l.lin.normal(l.res.H)
	l.res.Lambda = l.damp.lambda
	return l.res, nil
}

func (l *loop) reset(lin linear, x0 []float64, s *Settings) {
	n := len(x0)
	l.lin, l.set, l.damp, l.rest = lin, s.complete(), damping{}, math.Inf(1)
	l.box = box{s.Lower, s.Upper, s.Fixed, s.MaxStep, s.RelStep}
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

// iterate takes one step, or says why there is none to take.
func (l *loop) iterate() Termination {
	g := l.lin.gradient()
	if l.hold(l.x, g, l.free, l.res.AtBound) == 0 {
		return l.nothingFree()
	}
	l.lin.norms(l.y)
	if l.upright(g, l.y) {
		return SmallGradient
	}
	for i, v := range l.y {
		l.scale[i] = max(l.scale[i], v)
	}
	if l.res.Iterations >= l.set.MaxIterations {
		return IterationLimit
	}
	l.res.Iterations++
	promise, newton, ok := l.step()
	if !ok {
		return Stalled
	}
	l.move(l.y, l.x, l.d)
	end := Unfinished
	if newton { // damping makes any step small: only the undamped one can end the search
		end = l.converged(promise)
	}
	if end != Unfinished && l.set.AcceptPredicted {
		copy(l.x, l.y)
		l.res.F -= promise
		return end
	}
	return l.judge(promise, newton, end)
}

// rounding is the relative error that F is granted: sums over many data, and residuals
// that are small against the data, leave it far above that of one operation.
const rounding = 1e-11

// judge evaluates F at the point tried and moves there if that is lower. F cannot judge
// what its rounding hides, but the Gauss-Newton step is more exact than F: there it is
// followed as long as it shrinks.
func (l *loop) judge(promise float64, newton bool, end Termination) Termination {
	f, length := l.evaluate(l.y), l.length()
	hidden := newton && promise <= rounding*l.res.F && math.Abs(f-l.res.F) <= rounding*l.res.F
	shrinks := hidden && length < 0.8*l.rest
	gain := math.Inf(-1)
	if (f <= l.res.F && promise > 0 || shrinks) && l.lin.accept() {
		gain = (l.res.F - f) / promise
		copy(l.x, l.y)
		l.res.F = f
	}
	switch {
	case end != Unfinished:
		return end
	case shrinks:
		l.rest = length
		return Unfinished
	case hidden && !(gain >= 0):
		return RoundingLimit
	case !newton && promise <= epsilon*l.res.F:
		return Stalled
	}
	l.damp.adapt(gain, length)
	return Unfinished
}
