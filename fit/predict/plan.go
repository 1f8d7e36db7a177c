// Package predict says of a planned shot what gas it will be, how its picture will look
// after any flight, and how well the picture will tell its numbers.
package predict

import (
	"errors"
	"fmt"
	"math"

	"fallshadow/fit/bound"
	"fallshadow/model"
)

// Plan is a shot that has not been taken, in SI units.
type Plan struct {
	// Experiment is the machine; its Flight is not used.
	Experiment bound.Experiment
	Atoms      float64
	T          float64 // K
}

// Gas is the cloud in the trap.
type Gas struct {
	Law                          string // by which it condenses: semi-ideal, or ideal for a gas that is not repulsive
	Tc0                          float64
	FiniteSize, MeanField        float64 // relative shifts of Tc; the second NaN in a gas that is not repulsive
	BeyondMeanField              float64 // in place of MeanField, with a coefficient quoted from memory
	Reduced                      float64 // T/Tc⁰
	Condensate, Thermal          float64
	IdealFraction                float64
	Mu                           float64 // J, Thomas-Fermi; NaN without such a condensate
	Alpha                        float64 // −ln z above the transition
	ThomasFermiParameter         float64 // N0 a/ā
	Collapse                     float64 // N0 over the critical number of an attractive gas, else NaN
	PeakDensity, PhaseSpace      float64 // 1/m³, and times λ_T³
	Entropy                      float64 // per atom in k, of the ideal gas
	CollisionsPerRadian, Slowest float64 // collision rate over the largest and over the least ω_i
}

// Fraction returns N0/N.
func (g *Gas) Fraction() float64 { return g.Condensate / (g.Condensate + g.Thermal) }

// ErrPlan says that a plan has no atoms or no temperature.
var ErrPlan = errors.New("a plan needs a number of atoms and a temperature above 0")

// Gas returns the cloud in the trap: semi-ideal where a > 0, else the ideal gas.
func (p *Plan) Gas() (Gas, error) {
	e := &p.Experiment
	if !(p.Atoms > 0) || !(p.T > 0) || math.IsInf(p.Atoms+p.T, 0) {
		return Gas{}, ErrPlan
	}
	if err := e.Trap.Validate(); err != nil {
		return Gas{}, err
	}
	m, a := e.Species.Mass, e.Species.ScatteringLength
	g := Gas{
		Law: "ideal", Tc0: model.CriticalTemperature(p.Atoms, e.Trap), FiniteSize: model.FiniteSizeShift(p.Atoms, e.Trap),
		MeanField: math.NaN(), BeyondMeanField: math.NaN(), Mu: math.NaN(), Collapse: math.NaN(),
	}
	g.Reduced = p.T / g.Tc0
	g.IdealFraction = model.IdealFraction(g.Reduced)
	g.Condensate = g.IdealFraction * p.Atoms
	if a > 0 {
		mixture, err := model.SolveSemiIdeal(p.Atoms, p.T, m, a, e.Trap)
		if err != nil {
			return Gas{}, fmt.Errorf("predict the gas: %w", err)
		}
		g.Law, g.Condensate = "semi-ideal", mixture.Condensate
		g.MeanField = model.InteractionShift(p.Atoms, m, a, e.Trap)
		g.BeyondMeanField = model.BeyondMeanFieldShift(p.Atoms, m, a, e.Trap)
		if g.Condensate > 0 {
			g.Mu = mixture.Mu
		}
	}
	g.Thermal = p.Atoms - g.Condensate
	p.trapped(&g)
	return g, nil
}

// trapped fills in what follows from the parts.
func (p *Plan) trapped(g *Gas) {
	e := &p.Experiment
	m, a := e.Species.Mass, e.Species.ScatteringLength
	if g.Condensate == 0 {
		g.Alpha = model.ThermalAlpha(p.Atoms, p.T, e.Trap)
		if math.IsNaN(g.Alpha) {
			g.Alpha = 0
		}
	}
	g.PeakDensity = model.ThermalPeakDensity(g.Thermal, p.T, g.Alpha, m, e.Trap)
	switch {
	case a > 0 && g.Condensate > 0:
		g.PeakDensity += g.Mu / model.Coupling(m, a)
	case g.Condensate > 0:
		if w, err := model.VariationalWidths(g.Condensate, m, a, e.Trap); err == nil {
			g.PeakDensity += g.Condensate / (math.Pow(math.Pi, 1.5) * w[0] * w[1] * w[2])
		}
	}
	g.PhaseSpace = model.PhaseSpaceDensity(g.PeakDensity, p.T, m)
	g.Entropy = model.IdealEntropy(g.Reduced)
	g.ThomasFermiParameter = g.Condensate * a / e.Trap.Length(m)
	if a < 0 {
		g.Collapse = g.Condensate / model.CriticalNumber(e.Trap, m, a)
	}
	rate := model.CollisionRate(g.Thermal, p.T, m, a, e.Trap)
	w := e.Trap.Omega
	g.CollisionsPerRadian, g.Slowest = rate/max(w[0], w[1], w[2]), rate/min(w[0], w[1], w[2])
}
