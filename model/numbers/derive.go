package numbers

import (
	"math"

	"fallshadow/model"
)

// Derive returns the numbers that follow from a measurement in a laboratory whose
// settings are taken at their word. A sum Σσ0n becomes atoms as Σσ0n p²/σ0, p the pixel.
// An Alpha below 0, as an error may make it, counts as 0.
func Derive(m Measured, lab Lab) Derived {
	d := nothing()
	area := lab.Pixel * lab.Pixel / lab.Species.Sigma0()
	d.Thermal, d.Condensate = m.ThermalSum*area, m.CondensateSum*area
	d.Atoms = d.Thermal + d.Condensate
	if d.Atoms == 0 {
		return d
	}
	d.Fraction = d.Condensate / d.Atoms
	d.Tc0 = model.CriticalTemperature(d.Atoms, lab.Trap)
	peak := 0.
	if m.CondensateSum != 0 {
		peak += d.condense(m, lab)
	}
	if m.ThermalSum != 0 {
		peak += d.heat(m, lab)
		d.PhaseSpaceDensity = model.PhaseSpaceDensity(peak, m.T, lab.Species.Mass)
	}
	d.PeakDensity = peak
	return d
}

// condense fills in what the condensate tells and returns its peak density in the trap.
func (d *Derived) condense(m Measured, lab Lab) float64 {
	mass, a := lab.Species.Mass, lab.Species.ScatteringLength
	d.Mu = m.Mu
	d.ThomasFermiParameter = d.Condensate * a / lab.Trap.Length(mass)
	if a < 0 {
		d.Collapse = d.Condensate / model.CriticalNumber(lab.Trap, mass, a)
	}
	if a <= 0 {
		return gaussianPeak(d.Condensate, lab)
	}
	mu, err := model.Mu(d.Condensate, mass, a, lab.Trap)
	if err != nil {
		return math.NaN()
	}
	d.MuFromAtoms = mu
	d.MuOverMuAtoms = d.Mu / mu
	return mu / model.Coupling(mass, a)
}

// gaussianPeak returns the peak density in the trap of a condensate that has no
// Thomas-Fermi form; NaN beyond collapse.
func gaussianPeak(n0 float64, lab Lab) float64 {
	w, err := model.VariationalWidths(n0, lab.Species.Mass, lab.Species.ScatteringLength, lab.Trap)
	if err != nil {
		return math.NaN()
	}
	return n0 / (math.Pow(math.Pi, 1.5) * w[0] * w[1] * w[2])
}

// heat fills in what the thermal part tells and returns its peak density in the trap.
func (d *Derived) heat(m Measured, lab Lab) float64 {
	mass, a := lab.Species.Mass, lab.Species.ScatteringLength
	alpha := math.Max(0, m.Alpha)
	d.T = m.T
	d.Reduced = d.T / d.Tc0
	d.ReducedCorrected = d.T / model.TransitionTemperature(d.Atoms, mass, a, lab.Trap)
	d.Fugacity = math.Exp(-alpha)
	d.ThermalOverSaturated = d.Thermal / model.ThermalNumber(d.T, 0, lab.Trap)
	d.EntropyPerAtom = (1 - d.Fraction) * model.ThermalEntropy(alpha)
	return model.ThermalPeakDensity(d.Thermal, d.T, alpha, mass, lab.Trap)
}

// nothing returns numbers none of which exists.
func nothing() Derived {
	var d Derived
	for _, q := range quantities {
		*q.derived(&d) = math.NaN()
	}
	return d
}
