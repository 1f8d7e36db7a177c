package fit

import "math"

// atCeiling says that in the middle of the cloud at least half of the light that is counted
// is the stray light: the fit carries it through the law, but the counts there hardly change
// with the density any more.
func (s *session) atCeiling(r *Result) bool {
	l := s.levels[0]
	if s.law.stray == 0 || l.linear || !(r.PeakOD > 0) {
		return false
	}
	x := math.Min(math.Max(math.Round(r.X), 0), float64(l.w-1))
	y := math.Min(math.Max(math.Round(r.Y), 0), float64(l.h-1))
	o := int(y)*l.w + int(x)
	return r.PeakOD >= s.law.od(2*s.law.stray, math.Max(l.smooth[o], 0)*l.saturate)
}
