// Package curve reads the clouds of a night together: condensate fraction against
// temperature beside the laws for exactly this gas, where the transition lies, whether one
// common number factor mends the night, and what chemical potential and release energy say
// of the mean field. Points carry the full covariance of their measured numbers and the
// signed change of each under every calibration, so that errors that are common to a night
// stay common.
package curve

import (
	"math"

	"fallshadow/model"
)

// Gas is what is common to the clouds of a night, in SI units.
type Gas struct {
	Mass             float64 // kg
	ScatteringLength float64 // m; 0 or less has no Thomas-Fermi condensate
	Trap             model.Trap
	Release          model.Release
}

// repulsive says that laws of a Thomas-Fermi condensate hold.
func (g *Gas) repulsive() bool { return g.ScatteringLength > 0 }

// Reduced returns t = T/Tc⁰ of n atoms at T in K.
func (g *Gas) Reduced(T, n float64) float64 { return T / model.CriticalTemperature(n, g.Trap) }

// eta returns μ(T=0)/kTc⁰ of n atoms.
func (g *Gas) eta(n float64) float64 {
	return model.Eta(n, g.Mass, g.ScatteringLength, g.Trap)
}

// mu returns the Thomas-Fermi chemical potential in J of n0 atoms, NaN where there is none.
func (g *Gas) mu(n0 float64) float64 {
	mu, err := model.Mu(n0, g.Mass, g.ScatteringLength, g.Trap)
	if err != nil {
		return math.NaN()
	}
	return mu
}

// saturated returns ζ(3)(kT/ħω̄)³, the most atoms that an ideal thermal part holds at T in K.
func (g *Gas) saturated(T float64) float64 { return model.ThermalNumber(T, 0, g.Trap) }
