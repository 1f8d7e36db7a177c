package synth

import (
	"fmt"
	"math"
)

// Law is how atoms take light away,
//
//	α (1 + 4δ²) ln(I0/It) + (I0 − It)/Isat = σ0 n
//
// (Reinaudi, Lahaye, Wang, Guéry-Odelin, Opt. Lett. 32, 3143 (2007)).
type Law struct {
	Alpha      float64 // correction of the cross-section, σ = σ0/α; > 0
	Detuning   float64 // δ, of the probe in full widths Γ
	Saturation float64 // electrons per pixel at I = Isat; +Inf: a weak probe
	// Stray is the fraction of the counted light that atoms cannot absorb: light of
	// another frequency or polarisation. I0 and It of the law are the rest.
	Stray float64
}

func (l Law) check() error {
	if !(l.Alpha > 0) || math.IsInf(l.Alpha, 0) {
		return fmt.Errorf("absorption law: alpha %g; give a positive number", l.Alpha)
	}
	if !(l.Saturation > 0) {
		return fmt.Errorf("absorption law: %g electrons at saturation; give a positive number or +Inf", l.Saturation)
	}
	if math.IsNaN(l.Detuning) || math.IsInf(l.Detuning, 0) {
		return fmt.Errorf("absorption law: detuning %g; give a finite number of full widths", l.Detuning)
	}
	if !(l.Stray >= 0 && l.Stray < 1) {
		return fmt.Errorf("absorption law: stray fraction %g; give 0 to below 1", l.Stray)
	}
	return nil
}

// Transmission returns It/I0 of light that brings the given electrons per pixel, all of
// it absorbable, through a column of σ0 n = depth ≥ 0: the root of the law, to rounding.
func (l Law) Transmission(depth, electrons float64) float64 {
	if depth == 0 {
		return 1
	}
	a := l.Alpha * (1 + 4*l.Detuning*l.Detuning)
	s := electrons / l.Saturation
	// With u = ln(It/I0) the law is f(u) = a u + s e^u − s + depth = 0. f rises and is convex,
	// so that Newton's step cannot run away; where it is short, Halley's factor makes the
	// convergence cubic, and a step below 1e-6 leaves an error below rounding.
	u := 0.0
	for range 64 {
		e := s * math.Expm1(u)
		slope := a + s + e
		step := (a*u + e + depth) / slope
		if h := step * (s + e) / (2 * slope); h < 0.5 {
			step /= 1 - h
		}
		u -= step
		if math.Abs(step) <= 1e-6 {
			break
		}
	}
	return math.Exp(u)
}

// through returns the electrons left of the counted light, stray light included.
func (l Law) through(depth, electrons float64) float64 {
	open := electrons * (1 - l.Stray)
	return electrons*l.Stray + open*l.Transmission(depth, open)
}
