package lm

import "math"

// complete is s with the defaults filled in.
func (s Settings) complete() Settings {
	standard := func(v *float64, d float64) {
		if *v == 0 {
			*v = d
		}
	}
	standard(&s.XTol, 1e-10)
	standard(&s.FTol, 1e-12)
	if s.MaxIterations == 0 {
		s.MaxIterations = 200
	}
	return s
}

// nothingFree is the reason where no parameter may move.
func (l *loop) nothingFree() Termination {
	for _, f := range l.res.fixed {
		if !f {
			return SmallGradient
		}
	}
	return NothingFree
}

// upright says whether every free column of J, with squared norms, is at a right angle to
// ρ within GTol.
func (l *loop) upright(g, norms []float64) bool {
	for i, f := range l.free {
		if f && math.Abs(g[i]) > max(l.set.GTol, 0)*math.Sqrt(norms[i]*l.res.F) {
			return false
		}
	}
	return true
}

// converged says whether the Gauss-Newton step d, with the decrease of F that it promises,
// ends the search.
func (l *loop) converged(promise float64) Termination {
	switch {
	case l.set.PredictTol > 0 && promise <= l.set.PredictTol:
		return PredictedDecrease
	case l.set.FTol > 0 && promise <= l.set.FTol*l.res.F:
		return SmallDecrease
	case l.set.XTol > 0 && l.length() <= l.set.XTol*norm(l.scale, l.x):
		return SmallStep
	}
	return Unfinished
}
