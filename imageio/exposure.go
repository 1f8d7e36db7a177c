package imageio

// Exposure is a shot made ready for a fit: electrons above the dark, the light that the
// cloud would have seen, and how noisy both are. All slices are row by row, Width*Height.
type Exposure struct {
	Width, Height int
	Atoms         []float64 // electrons above the dark
	Light         []float64 // reference, electrons above the dark
	Good          []bool    // false: bad, saturated, or struck pixel
	Noise         Noise
	// Density is set instead of Atoms and Light for a shot with no raw frames,
	// in the unit that its settings name.
	Density []float64
	// Reference says what Light is made of: "own" (the scaled light frame) or "basis".
	Reference string
	// Notes are the words of what was seen on the way, from the table in imageio/light.
	Notes []string
}

// Noise is the variance of counts in electrons², apart from the shot noise of the atoms
// frame, which follows from its expected counts.
type Noise struct {
	Read         float64 // rms electrons of one read
	LightShot    float64 // shot-noise variance of Light per electron of it: 1 for one frame, about 1/K for K
	LightRead    float64 // read variance of Light, electrons²
	Dark         float64 // variance of the dark subtracted from both frames, electrons²
	DarkIsShared bool    // one dark for both frames; otherwise each frame had its own
}
