package model

import (
	"fmt"
	"math"
)

// CollisionRate returns the mean rate γ = n0 σ v̄/2 = N m σ ω̄³/(2π²kT) in 1/s at which an
// atom of a classical cloud of n atoms at t collides, with σ = 8πa² and v̄ = √(8kT/πm).
// The release is free of collisions while γ is far below every ω_i.
func CollisionRate(n, t, mass, a float64, trap Trap) float64 {
	w := trap.GeometricMean()
	sigma := 8 * math.Pi * a * a
	return n * mass * sigma * w * w * w / (2 * math.Pi * math.Pi * KB * t)
}

// ExpandHydrodynamic returns the scaling of a thermal cloud in which collisions are so
// frequent that it stays in local equilibrium: d²b_i/dt² = ω_i²(0)/[b_i (b1b2b3)^(2/3)] −
// ω_i²(t) b_i, with the invariant Σ(b_i'/ω_i)² + 3(b1b2b3)^(−2/3) = 3 after a sudden
// release. P. Pedri, D. Guéry-Odelin, S. Stringari, Phys. Rev. A 68, 043608 (2003).
func ExpandHydrodynamic(trap Trap, flight float64, rel Release) (Scaling, error) {
	return expand(trap, flight, rel, forces{pressure: squares(trap.Omega)})
}

// ExpandRelaxing returns the scaling of a thermal cloud whose collisions bring the
// temperatures θ_i of the three axes together in the relaxation time τ = tau0 b1b2b3/√θ̄,
// tau0 > 0 in s being that in the trap:
//
//	d²b_i/dt² = ω_i²(0) θ_i/b_i − ω_i²(t) b_i,  dθ_i/dt = −2 θ_i b_i'/b_i − (θ_i − θ̄)/τ.
//
// It goes from ExpandHydrodynamic (slowly: the end of the flight is always free) to
// ExpandThermal at tau0 = +Inf; a tau0 far below 1e-4/ω needs too many steps and is
// refused. Pedri, Guéry-Odelin, Stringari, as above, without the mean field.
func ExpandRelaxing(trap Trap, flight float64, rel Release, tau0 float64) (Scaling, error) {
	if err := validExpansion(trap, flight, rel); err != nil {
		return Scaling{}, err
	}
	if !(tau0 > 0) {
		return Scaling{}, fmt.Errorf("relaxation time is %g s: it must be positive", tau0)
	}
	unit := trap.largest()
	omega2 := squares(trap.in(unit))
	right := func(t float64, y, dy *odeState) {
		mean := (y[6] + y[7] + y[8]) / 3
		rate := math.Sqrt(mean) / (tau0 * unit * y[0] * y[1] * y[2])
		s := rel.strength(t / unit)
		for i := range 3 {
			b, v, theta := y[i], y[i+3], y[i+6]
			dy[i] = v
			dy[i+3] = omega2[i] * (theta/b - s*b)
			dy[i+6] = -2*theta*v/b - rate*(theta-mean)
		}
	}
	y := odeState{1, 1, 1, 0, 0, 0, 1, 1, 1}
	if err := integrateRelease(right, odeMaxDim, flight, unit, rel, &y); err != nil {
		return Scaling{}, err
	}
	return scalingOf(&y, unit), nil
}
