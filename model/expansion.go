package model

import (
	"fmt"
	"math"
)

// Release says how the trap is switched off: ω²(t) = ω²(0) s(t). The zero value is a
// sudden release. The flight counts from the start of the switch-off.
type Release struct {
	// Ramp is "" or "sudden" (s = 0 for t > 0), "linear" (s = 1 − t/Duration, then 0) or
	// "exponential" (s = e^(−t/Duration)).
	Ramp     string
	Duration float64 // s; of no meaning for a sudden release
}

// Validate returns an error for an unknown ramp or a duration that is not ≥ 0.
func (r Release) Validate() error {
	switch r.Ramp {
	case "", "sudden":
		return nil
	case "linear", "exponential":
		if !(r.Duration >= 0) || math.IsInf(r.Duration, 0) {
			return fmt.Errorf("duration of the switch-off is %g s: it must be 0 or more", r.Duration)
		}
		return nil
	}
	return fmt.Errorf("unknown switch-off %q: known are sudden, linear, exponential", r.Ramp)
}

// sudden reports whether nothing of the trap acts after t = 0.
func (r Release) sudden() bool {
	return r.Ramp == "" || r.Ramp == "sudden" || r.Duration == 0
}

// strength returns s(t) for t > 0.
func (r Release) strength(t float64) float64 {
	switch {
	case r.sudden():
		return 0
	case r.Ramp == "exponential":
		return math.Exp(-t / r.Duration)
	}
	return math.Max(0, 1-t/r.Duration)
}

// Scaling is how far a cloud has grown: size along axis i is B[i] times that in the trap,
// and grows by V[i] = dB[i]/dt in 1/s.
type Scaling struct{ B, V [3]float64 }

// ExpandCondensate returns the factors b_i by which the radii of a Thomas-Fermi
// condensate grow in a flight (s ≥ 0). The error is relative 1e-11 or better; an invalid
// trap, flight or release is refused. See ExpandCondensateRates for the equation.
func ExpandCondensate(trap Trap, flight float64, rel Release) ([3]float64, error) {
	s, err := ExpandCondensateRates(trap, flight, rel)
	return s.B, err
}

// ExpandCondensateRates integrates d²b_i/dt² = ω_i²(0)/(b_i b1b2b3) − ω_i²(t) b_i, b_i(0) = 1,
// b_i'(0) = 0. Y. Castin, R. Dum, Phys. Rev. Lett. 77, 5315 (1996); Yu. Kagan, E. L.
// Surkov, G. V. Shlyapnikov, Phys. Rev. A 54, R1753 (1996).
func ExpandCondensateRates(trap Trap, flight float64, rel Release) (Scaling, error) {
	return expand(trap, flight, rel, forces{meanField: squares(trap.Omega)})
}

// CondensateInvariant returns Σ(b_i'/ω_i)² + 2/(b1b2b3) − 2, which is 0 at all times
// after a sudden release: kinetic plus interaction energy in units of μ/7.
func CondensateInvariant(trap Trap, s Scaling) float64 {
	sum := 2/(s.B[0]*s.B[1]*s.B[2]) - 2
	for i, w := range trap.Omega {
		sum += s.V[i] / w * s.V[i] / w
	}
	return sum
}

// ExpandThermal returns the factors b_i by which the widths of an ideal thermal cloud
// grow in a flight (s ≥ 0) without collisions: d²b_i/dt² = ω_i²(0)/b_i³ − ω_i²(t) b_i, so
// b_i² = 1 + ω_i² t² after a sudden release.
func ExpandThermal(trap Trap, flight float64, rel Release) (b [3]float64, err error) {
	if !rel.sudden() {
		s, err := expand(trap, flight, rel, forces{kinetic: squares(trap.Omega)})
		return s.B, err
	}
	if err := validExpansion(trap, flight, rel); err != nil {
		return b, err
	}
	for i, w := range trap.Omega {
		b[i] = math.Hypot(1, w*flight)
	}
	return b, nil
}

// forces are the terms k_i/b_i³ + m_i/(b_i b1b2b3) + p_i/[b_i (b1b2b3)^(2/3)] of the
// acceleration of b_i in 1/s²: free flight or quantum pressure, mean field, local
// pressure of a gas.
type forces struct{ kinetic, meanField, pressure [3]float64 }

func squares(w [3]float64) [3]float64 {
	return [3]float64{w[0] * w[0], w[1] * w[1], w[2] * w[2]}
}

// expansionTolerance makes the factors good to 1e-11 and better.
const expansionTolerance = 1e-13

// expand integrates d²b_i/dt² = forces − ω_i²(t) b_i from b = 1, b' = 0 in units of the
// largest frequency.
func expand(trap Trap, flight float64, rel Release, f forces) (Scaling, error) {
	if err := validExpansion(trap, flight, rel); err != nil {
		return Scaling{}, err
	}
	unit := trap.largest()
	y := odeState{1, 1, 1}
	if err := integrateRelease(f.right(trap, unit, rel), 6, flight, unit, rel, &y); err != nil {
		return Scaling{}, err
	}
	return scalingOf(&y, unit), nil
}

func validExpansion(trap Trap, flight float64, rel Release) error {
	if err := trap.Validate(); err != nil {
		return err
	}
	if err := rel.Validate(); err != nil {
		return err
	}
	if !(flight >= 0) || math.IsInf(flight, 0) {
		return fmt.Errorf("flight is %g s: it must be 0 or more", flight)
	}
	return nil
}

// integrateRelease integrates over the flight and stops at the kink of a linear ramp.
func integrateRelease(right odeRight, dim int, flight, unit float64, rel Release, y *odeState) error {
	from := 0.0
	if rel.Ramp == "linear" && 0 < rel.Duration && rel.Duration < flight {
		from = rel.Duration * unit
		if err := integrate(right, dim, 0, from, expansionTolerance, y); err != nil {
			return fmt.Errorf("expansion during the switch-off of %g s: %w", rel.Duration, err)
		}
	}
	if err := integrate(right, dim, from, flight*unit, expansionTolerance, y); err != nil {
		return fmt.Errorf("expansion over %g s: %w", flight, err)
	}
	return nil
}

// right is the equation of motion of (b, db/dτ) in the time τ = unit·t.
func (f forces) right(trap Trap, unit float64, rel Release) odeRight {
	omega2 := squares(trap.in(unit))
	for i := range 3 {
		for _, v := range []*[3]float64{&f.kinetic, &f.meanField, &f.pressure} {
			v[i] /= unit * unit
		}
	}
	return func(tau float64, y, dy *odeState) {
		volume := y[0] * y[1] * y[2]
		field, pressure := 1/volume, 0.0
		if f.pressure[0] > 0 {
			c := math.Cbrt(field)
			pressure = c * c
		}
		s := rel.strength(tau / unit)
		for i := range 3 {
			b := y[i]
			dy[i] = y[i+3]
			dy[i+3] = (f.kinetic[i]/(b*b)+f.meanField[i]*field+f.pressure[i]*pressure)/b - s*omega2[i]*b
		}
	}
}

func scalingOf(y *odeState, unit float64) (s Scaling) {
	for i := range 3 {
		s.B[i], s.V[i] = y[i], y[i+3]*unit
	}
	return s
}
