package numbers

import "iter"

// Derived are the numbers that follow from one measurement, in SI units; NaN where one
// does not exist, such as μ without a condensate or T without a thermal part.
type Derived struct {
	Atoms                float64 // N, both parts
	Thermal              float64 // N_th
	Condensate           float64 // N0
	Fraction             float64 // N0/N, 0 without a condensate
	T                    float64 // K
	Mu                   float64 // from the radii, J
	MuFromAtoms          float64 // Thomas-Fermi from N0, J
	Tc0                  float64 // ideal critical temperature of N atoms, K
	Reduced              float64 // T/Tc⁰
	ReducedCorrected     float64 // T/Tc, Tc with finite-size and first-order interaction shifts
	Fugacity             float64 // e^{−α}
	ThermalOverSaturated float64 // N_th / ζ(3)(kT/ħω̄)³
	MuOverMuAtoms        float64 // Mu / MuFromAtoms
	PhaseSpaceDensity    float64 // PeakDensity times λ_T³
	PeakDensity          float64 // at the centre of the trap: condensate from N0, thermal part ideal, 1/m³
	EntropyPerAtom       float64 // of the ideal gas with this N_th and α, in k
	ThomasFermiParameter float64 // N0 a/ā; Thomas-Fermi is good to 2 % in μ above 100
	Collapse             float64 // N0 over the critical number, for a < 0 only
}

// Result are the numbers of Derived, each with its errors.
type Result struct {
	Atoms, Thermal, Condensate, Fraction           Value
	T, Mu, MuFromAtoms                             Value
	Tc0, Reduced, ReducedCorrected                 Value
	Fugacity, ThermalOverSaturated, MuOverMuAtoms  Value
	PhaseSpaceDensity, PeakDensity, EntropyPerAtom Value
	ThomasFermiParameter, Collapse                 Value

	// Correlation holds the correlation coefficients of the statistical errors of thermal
	// number, condensate number, T, Mu and Alpha, in the order of Measured; rows and columns
	// of what has no error are 0.
	Correlation [NumMeasured][NumMeasured]float64

	// Shifts tells by how much each calibration moves the numbers when it moves up by
	// one standard deviation, in the order given. The signs keep the correlation of
	// calibration errors, between numbers and over the shots of a night.
	Shifts []Effect
}

// Effect is the change of every number under one Shift.
type Effect struct {
	Name   string
	Known  bool
	Change Derived
}

// quantity is a number's name and its place in both structs.
type quantity struct {
	name    string
	derived func(*Derived) *float64
	result  func(*Result) *Value
}

// quantities is the one list of numbers; its order is that of All.
var quantities = [...]quantity{
	{"atoms", func(d *Derived) *float64 { return &d.Atoms }, func(r *Result) *Value { return &r.Atoms }},
	{"condensate", func(d *Derived) *float64 { return &d.Condensate }, func(r *Result) *Value { return &r.Condensate }},
	{"thermal", func(d *Derived) *float64 { return &d.Thermal }, func(r *Result) *Value { return &r.Thermal }},
	{"fraction", func(d *Derived) *float64 { return &d.Fraction }, func(r *Result) *Value { return &r.Fraction }},
	{"T", func(d *Derived) *float64 { return &d.T }, func(r *Result) *Value { return &r.T }},
	{"mu", func(d *Derived) *float64 { return &d.Mu }, func(r *Result) *Value { return &r.Mu }},
	{"mu_from_atoms", func(d *Derived) *float64 { return &d.MuFromAtoms }, func(r *Result) *Value { return &r.MuFromAtoms }},
	{"Tc0", func(d *Derived) *float64 { return &d.Tc0 }, func(r *Result) *Value { return &r.Tc0 }},
	{"t_reduced", func(d *Derived) *float64 { return &d.Reduced }, func(r *Result) *Value { return &r.Reduced }},
	{"t_reduced_corrected", func(d *Derived) *float64 { return &d.ReducedCorrected }, func(r *Result) *Value { return &r.ReducedCorrected }},
	{"fugacity", func(d *Derived) *float64 { return &d.Fugacity }, func(r *Result) *Value { return &r.Fugacity }},
	{"thermal_over_saturated", func(d *Derived) *float64 { return &d.ThermalOverSaturated }, func(r *Result) *Value { return &r.ThermalOverSaturated }},
	{"mu_over_mu_atoms", func(d *Derived) *float64 { return &d.MuOverMuAtoms }, func(r *Result) *Value { return &r.MuOverMuAtoms }},
	{"phase_space_density", func(d *Derived) *float64 { return &d.PhaseSpaceDensity }, func(r *Result) *Value { return &r.PhaseSpaceDensity }},
	{"peak_density", func(d *Derived) *float64 { return &d.PeakDensity }, func(r *Result) *Value { return &r.PeakDensity }},
	{"entropy_per_atom", func(d *Derived) *float64 { return &d.EntropyPerAtom }, func(r *Result) *Value { return &r.EntropyPerAtom }},
	{"thomas_fermi_parameter", func(d *Derived) *float64 { return &d.ThomasFermiParameter }, func(r *Result) *Value { return &r.ThomasFermiParameter }},
	{"collapse", func(d *Derived) *float64 { return &d.Collapse }, func(r *Result) *Value { return &r.Collapse }},
}

// All yields the numbers by name, always in the same order; units are SI.
func (r Result) All() iter.Seq2[string, Value] {
	return func(yield func(string, Value) bool) {
		for _, q := range quantities {
			if !yield(q.name, *q.result(&r)) {
				return
			}
		}
	}
}

// All yields the numbers by name, in the order of Result.All.
func (d Derived) All() iter.Seq2[string, float64] {
	return func(yield func(string, float64) bool) {
		for _, q := range quantities {
			if !yield(q.name, *q.derived(&d)) {
				return
			}
		}
	}
}
