package lm

import (
	"fmt"
	"math"
)

// box holds what limits the parameters and their steps.
type box struct {
	lower, upper     []float64
	fixed            []bool
	maxStep, relStep []float64
}

// check says what is wrong with the settings for a start at x.
func (s *Settings) check(x []float64) error {
	n := len(x)
	for _, l := range [...]struct {
		name string
		n    int
	}{{"Lower", len(s.Lower)}, {"Upper", len(s.Upper)}, {"Fixed", len(s.Fixed)}, {"MaxStep", len(s.MaxStep)}, {"RelStep", len(s.RelStep)}} {
		if l.n != 0 && l.n != n {
			return fmt.Errorf("lm: %s has %d entries for %d parameters", l.name, l.n, n)
		}
	}
	for i, v := range x {
		if !finite(v) {
			return fmt.Errorf("lm: start of parameter %d is %v", i, v)
		}
		if s.Lower != nil && !(v >= s.Lower[i]) {
			return fmt.Errorf("lm: start %v of parameter %d is below its lower bound %v", v, i, s.Lower[i])
		}
		if s.Upper != nil && !(v <= s.Upper[i]) {
			return fmt.Errorf("lm: start %v of parameter %d is above its upper bound %v", v, i, s.Upper[i])
		}
		if s.MaxStep != nil && !(s.MaxStep[i] >= 0) || s.RelStep != nil && !(s.RelStep[i] >= 0) {
			return fmt.Errorf("lm: limit of a step of parameter %d is negative or not a number", i)
		}
	}
	return nil
}

// hold marks the parameters that a step may change: not the fixed ones, and not those at
// a bound which a step against the gradient g would cross. It returns how many are free.
func (b *box) hold(x, g []float64, free, atBound []bool) int {
	k := 0
	for i := range x {
		atBound[i] = b.lower != nil && x[i] <= b.lower[i] && g[i] >= 0 ||
			b.upper != nil && x[i] >= b.upper[i] && g[i] <= 0
		free[i] = !atBound[i]
		if b.fixed != nil && b.fixed[i] {
			free[i], atBound[i] = false, false
		}
		if free[i] {
			k++
		}
	}
	return k
}

// stop ends at the bound those free entries of the step d that would cross it, takes them
// from the free ones, and says whether there were any.
func (b *box) stop(x, d []float64, free []bool) bool {
	any := false
	for i, f := range free {
		if !f {
			continue
		}
		switch {
		case b.lower != nil && x[i]+d[i] < b.lower[i]:
			d[i] = b.lower[i] - x[i]
		case b.upper != nil && x[i]+d[i] > b.upper[i]:
			d[i] = b.upper[i] - x[i]
		default:
			continue
		}
		free[i], any = false, true
	}
	return any
}

// shorten scales the step d so that no parameter changes by more than its limit, and says
// whether it had to.
func (b *box) shorten(x, d []float64) bool {
	f := 1.0
	for i, v := range d {
		if v == 0 {
			continue
		}
		if b.maxStep != nil && b.maxStep[i] > 0 {
			f = min(f, b.maxStep[i]/math.Abs(v))
		}
		if b.relStep != nil && b.relStep[i] > 0 && x[i] != 0 {
			f = min(f, b.relStep[i]*math.Abs(x[i]/v))
		}
	}
	if f >= 1 {
		return false
	}
	for i := range d {
		d[i] *= f
	}
	return true
}

// move fills dst with x + d, exactly at a bound where it would lie beyond.
func (b *box) move(dst, x, d []float64) {
	for i := range x {
		dst[i] = x[i] + d[i]
		if b.lower != nil {
			dst[i] = max(dst[i], b.lower[i])
		}
		if b.upper != nil {
			dst[i] = min(dst[i], b.upper[i])
		}
	}
}
