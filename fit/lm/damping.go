package lm

import "math"

// damping is the control of λ. The step is kept within the radius, |D d| ≤ radius, in
// which the linear model has proved true; λ is what brings it there. The radius follows
// the gain ratio, the decrease of F that came over the one that the model promised.
type damping struct {
	lambda float64
	radius float64 // 0 before the first step
}

const (
	radiusSlack = 0.1   // how closely |D d| is brought to the radius, relative
	lambdaLeast = 1e-10 // where J has dependent columns: the damping that picks a short step
)

// adapt sets the radius after a step of the given length |D d|.
func (c *damping) adapt(gain, length float64) {
	switch {
	case !(gain > 0.25):
		c.radius = shrink(gain) * min(c.radius, 10*length)
	case gain >= 0.75 || c.lambda == 0:
		c.radius = 2 * length
	}
}

// shrink is the factor for a radius that proved too large: half, and down to a tenth the
// more F rose above the model.
func shrink(gain float64) float64 {
	if gain >= 0 {
		return 0.5
	}
	return max(0.1, 1/(2-gain))
}

// step fills d with the step to try and returns the decrease of F that it promises.
// Newton says that neither damping nor a limit holds the step back.
func (l *loop) step() (promise float64, newton, ok bool) {
	base := 0.0
	if !l.solve(base) {
		base = lambdaLeast
		if !l.solve(base) {
			return 0, false, false
		}
	}
	first := l.damp.radius == 0
	switch {
	case first:
		l.damp.lambda = max(base, l.set.Lambda)
		ok = l.damp.lambda == base || l.solve(l.damp.lambda)
	default:
		ok = l.within(l.damp.radius, base)
	}
	short := l.shorten(l.x, l.d)
	if first {
		l.damp.radius = l.length()
	}
	return l.lin.decrease(l.d), l.damp.lambda == base && !short, ok
}

// within finds λ, and the step d, so that |D d| is at most r; d is that of λ = base, which
// comes out if it is short enough. 1/|D d| is nearly linear in λ: hence the secant.
func (l *loop) within(r, base float64) bool {
	n := l.length()
	if n <= (1+radiusSlack)*r {
		l.damp.lambda = base
		return true
	}
	lo, hi := base, max(l.steepest()/r, 2*base)
	middle := func() float64 { return max(1e-3*hi, math.Sqrt(lo*hi)) }
	last, lambda := base, l.damp.lambda
	if !(lambda > lo && lambda < hi) {
		lambda = middle()
	}
	for range 30 {
		l.damp.lambda = lambda
		if !l.solve(lambda) {
			return false
		}
		before := n
		n = l.length()
		if math.Abs(n-r) <= radiusSlack*r {
			break
		}
		if n > r {
			lo = lambda
		} else {
			hi = lambda
		}
		next := lambda + (1/r-1/n)*(lambda-last)/(1/n-1/before)
		last, lambda = lambda, next
		if !(next > lo && next < hi) {
			lambda = middle()
		}
	}
	return true
}

// steepest is |D⁻¹Jᵀρ|: at λ = steepest/r no step is longer than r.
func (l *loop) steepest() float64 {
	s := 0.0
	for i, g := range l.lin.gradient() {
		if l.free[i] && l.scale[i] > 0 {
			s += g * g / l.scale[i]
		}
	}
	return math.Sqrt(s)
}

// solve fills d with the step of damping λ over the free parameters. What would cross a
// bound ends there and the rest is solved again.
func (l *loop) solve(lambda float64) bool {
	clear(l.d)
	copy(l.moves, l.free)
	for again := true; again; again = l.stop(l.x, l.d, l.moves) {
		if !l.lin.solve(l.d, l.moves, lambda, l.scale) || !allFinite(l.d) {
			return false
		}
	}
	return true
}

// length is |D d|.
func (l *loop) length() float64 { return norm(l.scale, l.d) }

// norm is |D v|, scale holding the squares of D.
func norm(scale, v []float64) float64 {
	s := 0.0
	for i, x := range v {
		s += scale[i] * x * x
	}
	return math.Sqrt(s)
}
