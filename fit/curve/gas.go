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

// scales are a gas with what the laws need of it for one atom; the rest goes with powers
// of N and T.
type scales struct {
	Gas
	tc, logEta, mu1, sat float64
}

func (g Gas) scales() *scales {
	s := &scales{Gas: g, tc: model.CriticalTemperature(1, g.Trap), sat: model.ThermalNumber(1, 0, g.Trap), logEta: math.NaN(), mu1: math.NaN()}
	if g.repulsive() {
		s.logEta = math.Log(model.Eta(1, g.Mass, g.ScatteringLength, g.Trap))
		s.mu1, _ = model.Mu(1, g.Mass, g.ScatteringLength, g.Trap)
	}
	return s
}

// reduced returns t = T/Tc⁰ of n atoms at T in K.
func (s *scales) reduced(T, n float64) float64 { return T / (s.tc * math.Cbrt(n)) }

// logEtaOf returns the logarithm of η = μ(T=0)/kTc⁰ of n atoms, which goes with n^(1/15).
func (s *scales) logEtaOf(n float64) float64 { return s.logEta + math.Log(n)/15 }

func (s *scales) eta(n float64) float64 { return math.Exp(s.logEtaOf(n)) }

// mu returns the Thomas-Fermi chemical potential in J of n0 atoms, NaN where there is none.
func (s *scales) mu(n0 float64) float64 { return s.mu1 * math.Pow(n0, 0.4) }

// saturated returns ζ(3)(kT/ħω̄)³, the most atoms that an ideal thermal part holds at T in K.
func (s *scales) saturated(T float64) float64 { return s.sat * T * T * T }
