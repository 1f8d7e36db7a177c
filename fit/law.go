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

// walk solves the law at one place after another. Neighbours differ little, so the root at the
// last place is where Newton's steps begin, and e^−u follows by its series; a step too long for
// that begins anew. The error of the transmission is below 1e-9. The zero value begins anew.
type walk struct {
	u, e float64
	on   bool
}

// The longest step that the series of an exponential is taken along, and the one after which
// the third order of Chebyshev's step leaves nothing to ask again.
const (
	longStep  = 0.06
	shortStep = 2e-3
)

// transmit returns the transmitted fraction of light s = I_0/Isat through d = σ0 n, its
// derivative to d, and s times its derivative to s.
func (w *walk) transmit(l *law, d, s float64) (t, td, ts float64) {
	if !w.on {
		w.begin(l, d, s)
	}
	n := 1 / (l.a + s*w.e)
	for range 20 {
		step := (d - l.a*w.u - s*(1-w.e)) * n
		if step > longStep || step < -longStep {
			w.u += step
			w.e = math.Exp(-w.u)
			n = 1 / (l.a + s*w.e)
			continue
		}
		short := step < shortStep && step > -shortStep
		step += 0.5 * step * step * s * w.e * n
		w.u += step
		w.e *= 1 - step*(1-step*(0.5-step*(1.0/6-step*(1.0/24-step*(1.0/120)))))
		n = 1 / (l.a + s*w.e)
		if short {
			break
		}
	}
	t, td, ts = w.e, -w.e*n, s*w.e*(1-w.e)*n
	if l.stray > 0 {
		f := 1 - l.stray
		return f*t + l.stray, td * f, ts * f
	}
	return t, td, ts
}

// begin starts below the root of the concave depth equation, from where Newton's steps rise.
func (w *walk) begin(l *law, d, s float64) {
	w.u, w.on = d/(l.a+s), true
	w.e = math.Exp(-w.u)
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
