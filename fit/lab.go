package fit

import "fallshadow/model"

// Lab is what the laboratory knows of its machine, in SI units.
type Lab struct {
	Species model.Species
	Trap    model.Trap
	View    model.Rotation
	Release model.Release
	Optics  Optics
	// Calibration lists the settings whose errors the numbers carry.
	Calibration []Calibration
}

// Optics is the way from a column density to counts.
type Optics struct {
	Pixel      float64 // m in the object plane per saved pixel
	Blur       float64 // optical resolution, m rms in the object plane
	Alpha      float64 // correction of the cross-section, σ = σ0/alpha
	Detuning   float64 // of the probe, in full widths Γ
	Saturation float64 // electrons per saved pixel at I = Isat in this exposure; +Inf: a weak probe
	Stray      float64 // part of the counted light that atoms cannot absorb
}

// Calibration is one setting that could be wrong. Apply returns the laboratory with that
// setting moved by k standard deviations, and the flight (s) likewise. Known is false
// where nobody stated an uncertainty: Apply then moves by a nominal one percent, which
// only serves to find the numbers that need it.
type Calibration struct {
	Name  string
	Known bool
	Apply func(lab Lab, flight float64, k float64) (Lab, float64)
}
