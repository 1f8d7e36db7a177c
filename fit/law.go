package fit

import "math"

// law is the saturated absorption law with its constants folded in: the depth u of
// I_t = I_0 e^−u solves a u + s (1−e^−u) = σ0 n, a = α(1+4δ²), s = I_0/Isat
// (Reinaudi et al., Opt. Lett. 32, 3143 (2007)). A fraction of the light that atoms cannot
// absorb lifts the transmission to (e^−u + ε)/(1+ε).
type law struct {
	a     float64
	stray float64
}

func newLaw(o *Optics) law {
	return law{a: o.Alpha * (1 + 4*o.Detuning*o.Detuning), stray: o.Stray}
}

// transmit returns the transmitted fraction, its derivative to d = σ0 n, and s times its
// derivative to s. Newton steps on the concave depth equation start below the root and rise
// to it; a short step takes e^−u along by its series. The error is below 1e-11 of 1.
func (l *law) transmit(d, s float64) (t, td, ts float64) {
	as := l.a + s
	u := d / as
	e := 0.0
	switch {
	case math.Abs(u) < 0.05:
		r, u0 := s/as, u
		for range 5 {
			u = u0 + r*u*u*(0.5-u*(1.0/6-u*(1.0/24-u*(1.0/120))))
		}
		e = 1 - u*(1-u*(0.5-u*(1.0/6-u*(1.0/24-u*(1.0/120-u*(1.0/720))))))
	case s == 0:
		e = math.Exp(-u)
	default:
		e = math.Exp(-u)
		for range 20 {
			step := (l.a*u + s*(1-e) - d) / (l.a + s*e)
			u -= step
			if math.Abs(step) > 0.05 {
				e = math.Exp(-u)
				continue
			}
			e *= 1 + step*(1+step*(0.5+step*(1.0/6+step*(1.0/24+step*(1.0/120)))))
			if math.Abs(step) < 1e-6 {
				break
			}
		}
	}
	n := 1 / (l.a + s*e)
	td, ts = -e*n, s*e*(1-e)*n
	if l.stray > 0 {
		f := 1 - l.stray
		return f*e + l.stray, td * f, ts * f
	}
	return e, td, ts
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
