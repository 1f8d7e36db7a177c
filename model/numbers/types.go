// Package numbers turns what a fit measured into what a laboratory asks for: atom
// number, condensate fraction, temperature, chemical potential and all that follows
// from them, each with a statistical and a calibration error.
package numbers

import "fallshadow/model"

// Measured is what a fit knows of a cloud, in units that need no cross-section. A part
// that is absent has a zero sum; T or Mu that the picture cannot tell is NaN.
type Measured struct {
	ThermalSum    float64 // Σ σ0 n of the thermal part over pixels (dimensionless)
	CondensateSum float64 // Σ σ0 n of the condensate over pixels (dimensionless)
	T             float64 // temperature from the widths, K
	Mu            float64 // chemical potential from the radii, J
	Alpha         float64 // −ln z of the thermal part, 0 below Tc
}

// NumMeasured is the length of a Measured as a vector, in the order of its fields.
const NumMeasured = 5

// Lab is what the conversion needs to know of the laboratory, in SI units.
type Lab struct {
	Species model.Species
	Trap    model.Trap
	Pixel   float64 // m in the object plane per saved pixel
}

// Shift is one calibration moved up by one standard deviation: by how much the fit's
// answer moves, and the laboratory as it then is. Known is false for a setting whose
// uncertainty nobody stated; it is then moved by a nominal part, only to find out which
// numbers need it, and those get no calibration error.
type Shift struct {
	Name  string
	Known bool
	Delta Measured
	Lab   Lab
}

// Value is a number with its errors: one standard deviation each, NaN where there is
// none. Low and High, where set, are the ends of the interval that takes the place of a
// symmetric statistical error: 68.3 % central, or one-sided at 95 % when the other end
// is NaN.
type Value struct{ V, Err, Cal, Low, High float64 }
