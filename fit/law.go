package fit

import "math"

// law is the saturated absorption law with its constants folded in: the depth u of
// I_t = I_0 e^−u solves a u + s (1−e^−u) = σ0 n, a = α(1+4δ²), s = I_0/Isat
// (Reinaudi et al., Opt. Lett. 32, 3143 (2007)). A fraction of the light that atoms cannot
// absorb lifts the transmission to (1−ε) e^−u + ε.
type law struct {
	a     float64
	stray float64
}

func newLaw(o *Optics) law {
	return law{a: o.Alpha * (1 + 4*o.Detuning*o.Detuning), stray: o.Stray}
}

// od inverts the law: the σ0 n that leaves the fraction t of light with s = I_0/Isat.
// It returns NaN where t is at or below the stray light.
func (l *law) od(t, s float64) float64 {
	e := (t - l.stray) / (1 - l.stray)
	if !(e > 0) {
		return math.NaN()
	}
	return -l.a*math.Log(e) + s*(1-e)
}
