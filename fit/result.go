package fit

import "fallshadow/model/numbers"

// Result is what a fit says of a picture. Lengths are in m in the object plane, centres
// in pixels, angles in rad; a quantity that the picture does not tell is NaN.
type Result struct {
	Model string // one of the Model constants
	Form  string // profiles used: thermal+condensate, such as "bose+tf"

	Numbers numbers.Result

	X, Y   float64    // centre, px from the centre of the first pixel
	Angle  float64    // of axis 1 from +x towards +y
	Width  [2]float64 // rms of the thermal part along the picture's principal axes, named after trap axes 1 and 2
	Radius [2]float64 // of the condensate, likewise

	PeakOD     float64 // of the fitted σ0 n, both parts
	ChiPerDof  float64
	ChiCloud   float64 // the worse of the ellipse of the condensate and the 8x8 blocks under the cloud
	Sum        float64 // atoms by the plain sum of the density
	SumErr     float64
	Iterations int
	Touches    bool // two widths or the radius of the cloud reach over the border of the picture

	Maps   *Maps // nil unless asked for
	Checks Checks
	Flags  []string // names from the flag table
}

// Checks are the comparisons of two routes to one number; NaN where one does not exist.
type Checks struct {
	MuRatio              float64 // μ from radius 1 over μ from radius 2, free fit
	MuRatioErr           float64
	MuOverMuAtoms        float64 // μ from the radii over μ from N0
	MuOverMuAtomsErr     float64
	TRatio               float64 // T along axis 1 over T along axis 2, free fit
	TRatioErr            float64
	ThermalOverSaturated float64 // N_thermal over ζ(3)(kT/ħω̄)³
	ThermalOverSatErr    float64
	WingsT               float64 // K, from the wings alone
	WingsTErr            float64
	TiedOverFree         float64 // χ² of the tied fit minus that of the free fit
	TiedOverFreeDof      int
	AtomsOverSum         float64
	CondensateDetected   float64 // N0 that would have been believed in a thermal cloud
}

// The models a picture can be given.
const (
	ModelNone       = "none"
	ModelThermal    = "thermal"
	ModelBimodal    = "bimodal"
	ModelCondensate = "condensate"
)
