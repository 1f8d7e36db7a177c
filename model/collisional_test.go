package model

import (
	"math"
	"testing"
)

// TestCollisionalTemperatures: apparent temperatures (b'/ω)² after long flight in both
// models of P. Pedri et al., PRA 68, 043608 (2003), as tabulated (7 and 6 decimals).
func TestCollisionalTemperatures(t *testing.T) {
	for _, row := range readTable(t, "thermal_collisional.csv") {
		eps, tau := row.num(t, "eps"), row.num(t, "w_perp_tau0")
		trap := Trap{[3]float64{1, 1, eps}}
		what, tol := row["model"]+" eps "+row["eps"]+" tau0 "+row["w_perp_tau0"], 2e-6
		var s Scaling
		if row["model"] == "hydrodynamic" {
			// eps is printed with 8 digits; the distance from the limit falls as 1/flight.
			s = must(ExpandHydrodynamic(trap, 1e9, Release{}))(t)
			tol = 1e-7
		} else {
			s = must(ExpandRelaxing(trap, 1e4/eps, Release{}, tau))(t)
		}
		within(t, what+" perp", s.V[0]*s.V[0], row.num(t, "T_perp_over_T"), tol)
		within(t, what+" z", s.V[2]*s.V[2]/(eps*eps), row.num(t, "T_z_over_T"), tol)
	}
}

func TestHydrodynamicInvariant(t *testing.T) {
	trap := TrapHz(7, 60, 110)
	for _, flight := range []float64{0, 1e-3, 0.02, 5} {
		s := must(ExpandHydrodynamic(trap, flight, Release{}))(t)
		sum := 3 * math.Pow(s.B[0]*s.B[1]*s.B[2], -2.0/3)
		for i, w := range trap.Omega {
			sum += s.V[i] / w * s.V[i] / w
		}
		within(t, "invariant", sum, 3, 1e-12)
	}
}

// TestRelaxingLimits: no collisions give the ballistic widths, also through a ramp; a bad
// relaxation time is refused and one too short for the integrator gives an error, not a
// number.
func TestRelaxingLimits(t *testing.T) {
	trap := TrapHz(20, 90, 120)
	for _, rel := range []Release{{}, {"linear", 1e-3}, {"exponential", 3e-4}} {
		b := must(ExpandThermal(trap, 0.015, rel))(t)
		s := must(ExpandRelaxing(trap, 0.015, rel, math.Inf(1)))(t)
		for i := range 3 {
			near(t, "collisionless "+rel.Ramp, s.B[i], b[i], 1e-11)
		}
	}
	for _, tau := range []float64{0, -1, math.NaN(), 1e-12} {
		if _, err := ExpandRelaxing(trap, 0.015, Release{}, tau); err == nil {
			t.Errorf("relaxation time %g accepted", tau)
		}
	}
}

// TestCollisionRate: the closed form equals n0 σ v̄/2 of a gaussian cloud.
func TestCollisionRate(t *testing.T) {
	rb := must(LookupSpecies("87Rb"))(t)
	trap, n, temperature := TrapHz(20, 120, 120), 2e5, 5e-7
	width := math.Sqrt(2*math.Pi*KB*temperature/rb.Mass) / trap.GeometricMean()
	speed := math.Sqrt(8 * KB * temperature / (math.Pi * rb.Mass))
	sigma := 8 * math.Pi * rb.ScatteringLength * rb.ScatteringLength
	near(t, "collision rate", CollisionRate(n, temperature, rb.Mass, rb.ScatteringLength, trap),
		n/(width*width*width)*sigma*speed/2, 1e-13)
}
