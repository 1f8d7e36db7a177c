package bound

import (
	"errors"
	"fmt"

	"fallshadow/model"
)

// Experiment is how a cloud becomes a picture, in SI units.
type Experiment struct {
	Species model.Species
	Trap    model.Trap
	View    model.Rotation
	Release model.Release
	Flight  float64 // s
	Optics  Optics

	Width, Height int     // of the picture, pixels
	X, Y          float64 // centre of the cloud, px from the centre of the first pixel
	// Light returns the electrons that the pixel at (x, y) px of the atoms frame would
	// count without atoms, stray light included.
	Light func(x, y float64) float64
	Noise Noise
	// DensitySigma above 0 makes the picture one of σ0 n with this standard deviation per
	// pixel; Light, Noise and all of Optics but Pixel and Blur then mean nothing.
	DensitySigma float64
	// FreeAngle makes the turn of the cloud in the picture a parameter.
	FreeAngle bool
}

// Optics is the way from a column density to counts. It has the fields of the fit's own
// type, so that one converts to the other.
type Optics struct {
	Pixel      float64 // m in the object plane per saved pixel
	Blur       float64 // optical resolution, m rms in the object plane
	Alpha      float64 // correction of the cross-section, σ = σ0/alpha
	Detuning   float64 // of the probe, in full widths Γ
	Saturation float64 // electrons per saved pixel at I = Isat in this exposure; +Inf: a weak probe
	Stray      float64 // part of the counted light that atoms cannot absorb, below 1
}

// Noise is the variance of counts beside the shot noise of the atoms frame; it has the
// fields of the fit's own type. The reference is an estimate of the light without atoms:
// LightShot is 1 for one light frame and about 1/K for a basis of K.
type Noise struct {
	Read         float64 // rms electrons of one read of the atoms frame
	LightShot    float64 // shot-noise variance of the reference per electron of it
	LightRead    float64 // variance of the reference beside its shot noise, electrons²
	Dark         float64 // variance of the dark that was subtracted from both frames, electrons²
	DarkIsShared bool    // one dark for both frames
}

func (e *Experiment) attractive() bool { return e.Species.ScatteringLength < 0 }
func (e *Experiment) isDensity() bool  { return e.DensitySigma != 0 }

// setting is a number that has a domain.
type setting struct {
	name string
	v    float64
	zero bool // 0 is allowed
}

func (s setting) validate() error {
	if s.v > 0 || s.zero && s.v == 0 {
		return nil
	}
	return fmt.Errorf("%s is %g: it must be positive", s.name, s.v)
}

func validateAll(settings []setting) error {
	for _, s := range settings {
		if err := s.validate(); err != nil {
			return err
		}
	}
	return nil
}

func (e *Experiment) validate() error {
	if err := e.Trap.Validate(); err != nil {
		return err
	}
	settings := []setting{
		{"width of the picture", float64(e.Width), false}, {"height of the picture", float64(e.Height), false},
		{"pixel", e.Optics.Pixel, false}, {"resolution", e.Optics.Blur, true},
	}
	if e.isDensity() {
		return validateAll(append(settings, setting{"noise of the density", e.DensitySigma, false}))
	}
	if e.Light == nil {
		return errors.New("no light is given: set Light, or DensitySigma for a picture of density")
	}
	if e.Optics.Stray >= 1 {
		return fmt.Errorf("stray light is %g: it is a part of the counted light, below 1", e.Optics.Stray)
	}
	return validateAll(append(settings,
		setting{"correction of the cross-section", e.Optics.Alpha, false},
		setting{"electrons per saturation intensity", e.Optics.Saturation, false},
		setting{"stray light", e.Optics.Stray, true},
		setting{"read noise", e.Noise.Read, true},
		setting{"shot noise of the reference", e.Noise.LightShot, true},
		setting{"read noise of the reference", e.Noise.LightRead, true},
		setting{"variance of the dark", e.Noise.Dark, true}))
}
