// Package fit measures a cloud in a picture: it carries a model of the column density
// forward through the absorption law to the counts expected in the atoms frame, finds
// the best parameters by Levenberg-Marquardt, and says with what covariance and with
// how much trust. It opens no files.
package fit

// Picture is the input of a fit: counts in electrons above the dark, row by row from
// the top, Width*Height of them. A picture with Density set has no counts: Density is
// then σ0 n (dimensionless) and DensitySigma its standard deviation per pixel, 0 when it
// must be estimated from the picture. Counts and density are finite everywhere, also where Good is
// false and they do not matter.
type Picture struct {
	Width, Height int
	Atoms         []float64
	Light         []float64
	Good          []bool
	Noise         Noise
	Density       []float64
	DensitySigma  float64
}

// Noise is the variance of counts beside the shot noise of the atoms frame.
type Noise struct {
	Read         float64 // rms electrons of one read of the atoms frame
	LightShot    float64 // shot-noise variance of the reference per electron of it
	LightRead    float64 // variance of the reference beside its shot noise, electrons²
	Dark         float64 // variance of the dark that was subtracted from both frames, electrons²
	DarkIsShared bool    // one dark for both frames
}
