package settings

import (
	"fmt"
	"math"
	"slices"
)

// The electrons a photon that optics and sensors together make plausible (common practice).
const (
	LeastEfficiency = 0.05
	MostEfficiency  = 0.95
)

// Warnings returns a sentence for every setting that is possible but looks like one of
// the usual slips, in the order of the table of keys.
func (s *Settings) Warnings() []string {
	var out []string
	warn := func(suspect bool, format string, args ...any) {
		if suspect {
			out = append(out, fmt.Sprintf(format, args...))
		}
	}
	a, t, c, p, f := s.Atom, s.Trap, s.Camera, s.Probe, s.Clock
	pixel, spot := s.ObjectPixel()*1e6, c.ResolutionUm.Value
	warn(a.ScatteringLengthA0.Given && a.ScatteringLengthA0.Value != 0 && math.Abs(a.ScatteringLengthA0.Value) < 1e-3,
		"scattering_length_a0 = %g is next to nothing: it is in Bohr radii, not in m", a.ScatteringLengthA0.Value)
	warn(s.angular(), "axis1_hz, axis2_hz, sight_hz = %g, %g, %g look like angular frequencies: divided by 2 pi they are %.4g, %.4g, %.4g; give frequencies in Hz",
		t.Axis1Hz.Value, t.Axis2Hz.Value, t.SightHz.Value, t.Axis1Hz.Value*rad, t.Axis2Hz.Value*rad, t.SightHz.Value*rad)
	warn(c.Magnification.Value < 0.05, "magnification = %g is very small: it is the size on the sensor over that of the object; was its inverse %.4g meant?",
		c.Magnification.Value, 1/c.Magnification.Value)
	warn(pixel < 0.1 || pixel > 100, "a pixel covers %.4g um of the object: check pixel_um, binning and magnification", pixel)
	warn(c.ElectronsPerCount.Given && !s.measured && s.Shots.Layout != "density" && c.ElectronsPerCount.Value < 0.02, "electrons_per_count = %g is very small: was its inverse, counts per electron, entered?", c.ElectronsPerCount.Value)
	warn(!c.ResolutionUm.Given, "resolution_um is not given: the optics are taken as perfect, and small condensates come out too large")
	warn(spot > 0 && spot < 0.05, "resolution_um = %g is below any optics: it is in um", spot)
	warn(spot > 15*pixel, "resolution_um = %g is %.0f pixels in the plane of the atoms: it is the rms of the spot there, not on the sensor", spot, spot/pixel)
	warn(p.Alpha.Value < 0.9, "alpha = %g makes the cross-section larger than that of a two-level atom: sigma = sigma0/alpha; was its inverse %.3g meant?", p.Alpha.Value, 1/p.Alpha.Value)
	warn(math.Abs(p.DetuningGamma.Value) > 3, "detuning_gamma = %g is far from resonance: it is in full widths Gamma, not in MHz", p.DetuningGamma.Value)
	warn(!p.CountsPerIsat.Given && s.Shots.Layout != "density", "counts_per_isat is not given: the probe is taken as weak, and atoms are missed where it is not")
	a0 := p.Alpha.Value * (1 + 4*p.DetuningGamma.Value*p.DetuningGamma.Value)
	warn(s.Shots.DensityUnit == "log_ratio", "density_unit = \"log_ratio\" leaves saturation out: in a probe of s = I/Isat N is low by up to s/(a + s), a = alpha (1 + 4 detuning_gamma^2), such as %.2g %% at s = 0.1; save the raw frames, or sigma0_n with its term (I0 - I)/Isat",
		100*0.1/(a0+0.1))
	e := s.Efficiency()
	warn(e < LeastEfficiency || e > MostEfficiency, "counts_per_isat means %.3g electrons for a photon that passes the atoms, where %g to %g is plausible: check counts_per_isat, electrons_per_count, exposure_us and the pixel",
		e, LeastEfficiency, MostEfficiency)
	warn(f.FixedMs.Given && f.FixedMs.Value > 0 && f.FixedMs.Value < 0.5, "fixed_ms = %g is very short: it is in ms, not in s", f.FixedMs.Value)
	return out
}

// angular reports whether at least two trap frequencies become round numbers (two digits)
// when divided by 2 pi, and are none themselves. By chance a number does that in a
// hundred to in ten tries.
func (s *Settings) angular() bool {
	n := 0
	for _, f := range []Quantity{s.Trap.Axis1Hz, s.Trap.Axis2Hz, s.Trap.SightHz} {
		if round(f.Value*rad, 5e-4) && !round(f.Value, 1e-9) {
			n++
		}
	}
	return n >= 2
}

// round reports whether x has two digits at most, but for a relative rest.
func round(x, rest float64) bool {
	unit := math.Pow(10, math.Floor(math.Log10(x))-1)
	return math.Abs(x/unit-math.Round(x/unit)) <= rest*x/unit
}

// Hasty returns a sentence where the median of flights (s) that frames or names state is too short
// for an expansion, "" where it is not: images of the trap itself have a flight of 0.
func (s *Settings) Hasty(flights []float64) string {
	if s.Clock.FixedMs.Given || len(flights) == 0 {
		return ""
	}
	slices.Sort(flights)
	if t := flights[len(flights)/2]; t > 0 && t < 0.5e-3 {
		return fmt.Sprintf("the flights from %s are about %.3g ms, which is very short: they are read in %s; check flight.unit", s.Clock.From, t*1e3, s.Clock.Unit)
	}
	return ""
}

// Misplaced returns a sentence where bad_pixels lists pixels that frames of a size do not
// have, "" where it does not.
func (s *Settings) Misplaced(width, height int) string {
	n, first := 0, [2]int{}
	for _, p := range s.Camera.BadPixels {
		if p[0] >= width || p[1] >= height {
			if n++; n == 1 {
				first = p
			}
		}
	}
	if n == 0 {
		return ""
	}
	return fmt.Sprintf("bad_pixels lists %d outside of the frames of %d x %d pixels, such as [%d, %d]: each is [column, row], from 0", n, width, height, first[0], first[1])
}
