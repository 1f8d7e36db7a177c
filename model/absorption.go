package model

import "math"

// Law is the absorption of probe light by atoms:
//
//	od = c ln(1/t) + s(1 − t),  c = Alpha(1 + 4 Detuning²),
//
// with od = σ0 n of the bare two-level cross-section, t = I_t/I_0 and s = I_0/Isat of the
// light that atoms can absorb, before it meets them. A part Stray of the counted light is
// none of that (another frequency or polarisation), so the counted fraction is
// (1 − Stray) t + Stray. G. Reinaudi, T. Lahaye, Z. Wang, D. Guéry-Odelin, Opt. Lett. 32, 3143 (2007), of which
// this is the integral of dI/dx = −nσ0 I/(c + I/Isat).
//
// Domain: Alpha > 0, 0 ≤ Stray < 1, s ≥ 0; the results are NaN for s < 0 and for NaN.
type Law struct {
	Alpha    float64 // correction of the cross-section, ≥ 1 for real atoms
	Detuning float64 // of the probe in full widths Γ
	Stray    float64 // part of the counted light that atoms cannot absorb
}

func (l Law) logFactor() float64 { return l.Alpha * (1 + 4*l.Detuning*l.Detuning) }

// Transmit returns the counted fraction of the light at od = σ0 n, which may be
// negative (more than 1 is counted then) and as large as one likes.
func (l Law) Transmit(od, s float64) float64 {
	return (1-l.Stray)*math.Exp(-transmitLog(od, s, l.logFactor())) + l.Stray
}

// TransmitDeriv returns Transmit and its derivatives by od and by s:
// dt/dod = −t/(c + st) and dt/ds = t(1−t)/(c + st), each times 1 − Stray.
func (l Law) TransmitDeriv(od, s float64) (t, dtdod, dtds float64) {
	c := l.logFactor()
	y := transmitLog(od, s, c)
	bare := math.Exp(-y)
	slope := (1 - l.Stray) * bare / (c + s*bare)
	return (1-l.Stray)*bare + l.Stray, -slope, -math.Expm1(-y) * slope
}

// OD inverts Transmit for the counted fraction t: +Inf where only the stray light is
// left, NaN below.
func (l Law) OD(t, s float64) float64 {
	bare := (t - l.Stray) / (1 - l.Stray)
	if !(s >= 0) {
		return math.NaN()
	}
	return -l.logFactor()*math.Log(bare) + s*(1-bare)
}

// Ceiling returns the largest apparent density −ln t that stray light lets through,
// −ln Stray; +Inf without stray light.
func (l Law) Ceiling() float64 { return -math.Log(l.Stray) }

// PhotonsScattered returns the photons N = (τΓ/2) s/(c + s) that an atom scatters in an
// exposure of τ s in unattenuated light, for the linewidth Γ in rad/s.
func (l Law) PhotonsScattered(exposure, s, linewidth float64) float64 {
	return exposure * linewidth / 2 * s / (l.logFactor() + s)
}

// DopplerShift returns the shift N v_rec/λ in Hz of atoms that scattered N photons.
func (s Species) DopplerShift(photons float64) float64 {
	return photons * s.RecoilVelocity() / s.Wavelength
}

// RecoilPush returns the way N v_rec τ/2 in m along the beam that atoms move while they
// scatter N photons in an exposure of τ s.
func (s Species) RecoilPush(photons, exposure float64) float64 {
	return photons * s.RecoilVelocity() * exposure / 2
}

// RecoilBlur returns the rms blur √N v_rec τ/6 in m along each axis of the picture from
// the random recoil of N photons, averaged over an exposure of τ s.
func (s Species) RecoilBlur(photons, exposure float64) float64 {
	return math.Sqrt(photons) * s.RecoilVelocity() * exposure / 6
}

// transmitLog solves c y + s(1 − e^−y) = od for y = ln(1/t), to rounding.
func transmitLog(od, s, c float64) float64 {
	switch {
	case !(s >= 0) || !(c > 0):
		return math.NaN()
	case s == 0 || math.IsInf(od, 0):
		return od / c
	}
	// Start from a bound on the left of the root, from where the steps of Halley neither
	// leave the domain nor crawl along the exponential.
	y := od / (c + s)
	if od > 0 {
		y = math.Max(y, (od-s)/c)
	} else {
		y = math.Max(y, -math.Log1p(-od/s))
	}
	for range 60 {
		gone := -math.Expm1(-y)
		left := s * (1 - gone)
		slope := c + left
		newton := (od - c*y - s*gone) / slope
		step := newton / (1 - math.Min(0.5, newton*left/(2*slope)))
		y += step
		// The error that remains is of the third order in the step.
		if !(math.Abs(step) > 1e-6*math.Abs(y)) {
			break
		}
	}
	return y
}
