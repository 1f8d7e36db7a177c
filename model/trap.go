package model

import (
	"fmt"
	"math"
)

// Trap is a harmonic trap V = (m/2) Σ ω_i² x_i², by its angular frequencies in
// rad/s along the trap axes 1, 2 and 3. Axis 3 is the line of sight unless the
// camera looks obliquely (see Rotation).
type Trap struct{ Omega [3]float64 }

// TrapHz builds a Trap from frequencies in Hz.
func TrapHz(f1, f2, f3 float64) Trap {
	return Trap{[3]float64{2 * math.Pi * f1, 2 * math.Pi * f2, 2 * math.Pi * f3}}
}

// GeometricMean returns ω̄ = (ω1 ω2 ω3)^(1/3) in rad/s.
func (t Trap) GeometricMean() float64 {
	return math.Cbrt(t.Omega[0] * t.Omega[1] * t.Omega[2])
}

// ArithmeticMean returns ω_m = (ω1+ω2+ω3)/3 in rad/s.
func (t Trap) ArithmeticMean() float64 {
	return (t.Omega[0] + t.Omega[1] + t.Omega[2]) / 3
}

// Length returns the oscillator length ā = √(ħ/mω̄) in m of a particle of the given mass in kg.
func (t Trap) Length(mass float64) float64 {
	return math.Sqrt(HBar / (mass * t.GeometricMean()))
}

// Validate returns an error unless all three frequencies are positive and finite.
func (t Trap) Validate() error {
	for i, w := range t.Omega {
		if !(w > 0) || math.IsInf(w, 0) {
			return fmt.Errorf("trap frequency %d is %g Hz: it must be positive", i+1, w/(2*math.Pi))
		}
	}
	return nil
}

// in returns the frequencies in the given unit (rad/s).
func (t Trap) in(unit float64) [3]float64 {
	return [3]float64{t.Omega[0] / unit, t.Omega[1] / unit, t.Omega[2] / unit}
}

func (t Trap) largest() float64 { return max(t.Omega[0], t.Omega[1], t.Omega[2]) }
