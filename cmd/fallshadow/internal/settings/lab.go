package settings

import (
	"errors"
	"math"

	"fallshadow/fit"
	"fallshadow/model"
)

// Lab returns the laboratory in SI units, with the settings whose errors the numbers
// carry. It fails where counts_per_isat is given but nobody knows the electrons per count
// (see WithCamera).
func (s *Settings) Lab() (fit.Lab, error) {
	sp, err := s.species()
	if err != nil {
		return fit.Lab{}, err
	}
	saturation, err := s.saturation()
	if err != nil {
		return fit.Lab{}, err
	}
	t := s.Trap
	return fit.Lab{
		Species: sp,
		Trap:    model.TrapHz(t.Axis1Hz.Value, t.Axis2Hz.Value, t.SightHz.Value),
		View:    s.view(0, 0),
		Release: model.Release{Ramp: t.Release, Duration: t.ReleaseMs * 1e-3},
		Optics: fit.Optics{
			Pixel:      s.ObjectPixel(),
			Blur:       s.Camera.ResolutionUm.Value * 1e-6,
			Alpha:      s.Probe.Alpha.Value,
			Detuning:   s.Probe.DetuningGamma.Value,
			Saturation: saturation,
			Stray:      s.Probe.StrayFraction.Value,
		},
		Calibration: s.calibrations(),
	}, nil
}

// ObjectPixel returns the side in m, in the plane of the atoms, of a pixel as it is
// fitted: pixel_um * binning * rebin / magnification.
func (s *Settings) ObjectPixel() float64 {
	c := s.Camera
	return c.PixelUm.Value * 1e-6 * float64(c.Binning*s.Fit.Rebin) / c.Magnification.Value
}

// species returns the named species with what the file says of it.
func (s *Settings) species() (model.Species, error) {
	var sp model.Species
	a := s.Atom
	if a.Species != "" {
		var err error
		if sp, err = model.LookupSpecies(a.Species); err != nil {
			return sp, err
		}
	}
	if in, err := sp.WithState(a.State); a.State != "" && err == nil {
		sp = in
	}
	override(&sp.Mass, a.MassU, model.U)
	override(&sp.Wavelength, a.WavelengthNm, 1e-9)
	override(&sp.Linewidth, a.LinewidthMHz, 2e6*math.Pi)
	if a.ScatteringLengthA0.Given {
		sp.ScatteringLength, sp.NeedsScatteringLength = a.ScatteringLengthA0.Value*model.A0, false
	}
	return sp, nil
}

func override(x *float64, n Number, unit float64) {
	if n.Given {
		*x = n.Value * unit
	}
}

func (s *Settings) view(angle, tilt float64) model.Rotation {
	const degree = math.Pi / 180
	t := s.Trap
	return model.View((t.AngleDeg.Value+angle)*degree, (t.TiltDeg.Value+tilt)*degree, t.TiltAboutDeg*degree)
}

// saturation returns the electrons per fitted pixel at I = Isat, +Inf for a weak probe.
func (s *Settings) saturation() (float64, error) {
	per, gain := s.Probe.CountsPerIsat, s.Camera.ElectronsPerCount
	if !per.Given || s.Shots.Layout == "density" {
		return math.Inf(1), nil
	}
	if !gain.Given {
		return 0, errors.New("counts_per_isat needs electrons_per_count, which is neither in the settings nor measured yet")
	}
	pixels := float64(s.Fit.Rebin * s.Fit.Rebin)
	return per.Value * gain.Value * pixels, nil
}

// DensityScale returns by what a pixel of a density image is multiplied to give sigma0 n:
// alpha (1 + 4 detuning²) for ln(I0/I), 1 for sigma0 n, sigma0 over the area of the pixel
// for atoms. The laboratory is an argument so that a calibration's part can be found.
func (s *Settings) DensityScale(lab fit.Lab) float64 {
	o := lab.Optics
	switch s.Shots.DensityUnit {
	case "log_ratio":
		return o.Alpha * (1 + 4*o.Detuning*o.Detuning)
	case "atoms_per_pixel":
		return lab.Species.Sigma0() / (o.Pixel * o.Pixel)
	}
	return 1
}

// Efficiency returns the electrons that counts_per_isat makes of a photon that passes the
// plane of the atoms: counts per Isat times gain over Isat * exposure * pixel area / (hc/lambda).
// It is NaN where one of them is not given. Optics and sensors together give 0.05 to 0.95.
func (s *Settings) Efficiency() float64 {
	sp, err := s.species()
	per, gain, t := s.Probe.CountsPerIsat, s.Camera.ElectronsPerCount, s.Probe.ExposureUs
	if err != nil || !per.Given || !gain.Given || !t.Given {
		return math.NaN()
	}
	side := s.ObjectPixel() / float64(s.Fit.Rebin)
	photons := sp.SaturationIntensity() * t.Value * 1e-6 * side * side * sp.Wavelength / (model.H * model.C)
	return per.Value * gain.Value / photons
}
