package fit

import "math"

// Flag is a reason to distrust a shot.
type Flag struct {
	Name     string // a word, as it stands in the table
	Sentence string // what it means and what to do, for a person
}

// The names of the flags.
const (
	FlagNoCloud            = "no_cloud"
	FlagNoThermal          = "no_thermal"
	FlagDense              = "dense"
	FlagCeiling            = "ceiling"
	FlagMisfit             = "misfit"
	FlagNoise              = "noise"
	FlagCut                = "cut"
	FlagSmall              = "small_condensate"
	FlagHot                = "poor_temperature"
	FlagByNumber           = "temperature_from_number"
	FlagWidths             = "axes_disagree"
	FlagWings              = "wings_disagree"
	FlagSum                = "sum_disagrees"
	FlagRatios             = "ratios_disagree"
	FlagFrequencyUnit      = "suspect_frequency_unit"
	FlagAxes               = "suspect_axes"
	FlagAxis1              = "suspect_axis1"
	FlagAxis2              = "suspect_axis2"
	FlagSight              = "suspect_sight"
	FlagFlight             = "suspect_flight"
	FlagPixel              = "suspect_pixel"
	FlagNumber             = "suspect_cross_section"
	FlagForm               = "suspect_thermal_form"
	FlagPlain              = "ideal_form"
	FlagBlurred            = "blurred"
	FlagAttractive         = "attractive"
	FlagCollapse           = "beyond_collapse"
	FlagDensityNoReference = "density_image"
)

// Flags is the one table of flags that a fit can raise.
var Flags = []Flag{
	{FlagNoCloud, "no cloud stands out of the noise; the number of atoms is an upper limit"},
	{FlagNoThermal, "no thermal wing can be told from the noise; T is an upper limit that assumes a saturated thermal part, and atoms that may hide under the condensate widen N0 downwards"},
	{FlagDense, "the peak optical density (sigma0 n/alpha on resonance) is above 3: multiple scattering and stray light bend the law there; lengthen the flight or detune"},
	{FlagCeiling, "in the middle of the cloud most of the counted light is the stray light of stray_fraction: the density there follows from its edges; lengthen the flight or detune"},
	{FlagMisfit, "the residuals under the cloud are above their noise: shape, blur, fringes or a saturated camera do not fit the model"},
	{FlagNoise, "the residuals of the whole picture do not match the stated noise: check electrons_per_count and read_noise_electrons"},
	{FlagCut, "the cloud reaches beyond the picture or over many bad pixels; numbers lean on the model there"},
	{FlagSmall, "the condensate holds too few atoms for the Thomas-Fermi form (N0 a/ā below 10): mu from its radius is low in trust"},
	{FlagHot, "the temperature is known to worse than a fifth; T_nK_low and T_nK_high give the interval"},
	{FlagByNumber, "the widths of the faint thermal part cannot be those of its number; T follows from the number of a saturated thermal part and hangs on the cross-section"},
	{FlagWidths, "the widths along the two axes do not follow from one T and one mu: check trap frequencies, angle and flight; heating or hydrodynamic expansion look alike"},
	{FlagWings, "the wings alone give another temperature than the whole cloud"},
	{FlagSum, "the fitted atom number and the plain sum of the density disagree"},
	{FlagRatios, "mu from radius and from number disagree, or the thermal number and what T and fugacity hold, and no single setting is seen to mend it: check magnification, alpha, counts_per_isat and trap frequencies"},
	{FlagFrequencyUnit, "the ratios agree if the trap frequencies are in rad/s: settings take Hz (axis1_hz, axis2_hz, sight_hz)"},
	{FlagAxes, "the ratios agree if two trap axes are exchanged: check which of axis1_hz, axis2_hz, sight_hz is which, and angle_deg"},
	{FlagAxis1, "the ratios agree with another frequency along axis 1: check axis1_hz"},
	{FlagAxis2, "the ratios agree with another frequency along axis 2: check axis2_hz"},
	{FlagSight, "the ratios agree with another frequency along the line of sight: check sight_hz"},
	{FlagFlight, "the ratios agree with another flight: check the flight's source and unit, and zero_ms"},
	{FlagPixel, "the ratios agree with another pixel in the object plane: check pixel_um, binning and magnification"},
	{FlagNumber, "the ratios agree with another cross-section: check alpha, detuning_gamma and counts_per_isat (a magnification that is off can look alike)"},
	{FlagForm, "the number of thermal atoms fits their temperature with the other thermal form, all else agrees: a repulsive condensate may push them aside; compare fit.thermal = \"bose\" with \"semi-ideal\""},
	{FlagPlain, "so cold a thermal part, or so short a flight, is outside what the semi-ideal form is known for: the ideal one was fitted"},
	{FlagBlurred, "the blur, with the pixel's width, is above a third of the smallest radius or width: the resolution decides the result"},
	{FlagAttractive, "the gas is attractive: Thomas-Fermi does not exist; the condensate is a gaussian of the variational width and has no mu from a radius"},
	{FlagCollapse, "N0 is above the number at which an attractive condensate collapses: check the scattering length and the cross-section"},
	{FlagDensityNoReference, "a density image without raw frames: noise is estimated, saturation and black pixels cannot be seen"},
}

// warnings raises the flags of a result.
func (s *session) warnings(r *Result) []string {
	var f []string
	raise := func(on bool, name string) {
		if on {
			f = append(f, name)
		}
	}
	n, c := &r.Numbers, &r.Checks
	raise(r.Model == ModelNone, FlagNoCloud)
	raise(r.Model == ModelCondensate, FlagNoThermal)
	raise(s.levels[0].linear, FlagDensityNoReference)
	raise(r.PeakOD > 3*s.law.a, FlagDense)
	raise(s.atCeiling(r), FlagCeiling)
	raise(r.ChiCloud > 1.6, FlagMisfit)
	raise(math.Abs(r.ChiPerDof-1) > 0.25, FlagNoise)
	if r.Model == ModelNone {
		return f
	}
	raise(s.isCut(r), FlagCut)
	raise(r.Model != ModelThermal && n.ThomasFermiParameter.V < 10, FlagSmall)
	raise(n.T.Err > poor*n.T.V, FlagHot)
	size := math.Min(math.Min(orInf(r.Width[0]), orInf(r.Width[1])), math.Min(orInf(r.Radius[0]), orInf(r.Radius[1])))
	raise(s.plain, FlagPlain)
	raise(math.Sqrt(s.lab.Optics.Blur*s.lab.Optics.Blur+s.tmpl.pixel*s.tmpl.pixel/12) > size/3, FlagBlurred)
	raise(s.tmpl.gaussian && r.Model != ModelThermal, FlagAttractive)
	raise(n.Collapse.V > 1, FlagCollapse)
	raise(off(c.WingsT/n.T.V, c.WingsTErr/n.T.V, 0.1), FlagWings)
	raise(off(c.AtomsOverSum, r.SumErr/r.Sum, 0.05), FlagSum)
	return append(f, s.suspects(r)...)
}

func orInf(x float64) float64 {
	if math.IsNaN(x) {
		return math.Inf(1)
	}
	return x
}

// off says that a ratio that should be 1 is not: by more than the tolerance and five errors.
func off(ratio, err, tol float64) bool {
	d := math.Abs(ratio - 1)
	return d > tol && d > 5*err
}

// isCut says that the cloud reaches over the border, or that many pixels inside one width or
// radius are bad.
func (s *session) isCut(r *Result) bool {
	if r.Touches {
		return true
	}
	e := s.extent(r)
	l := s.levels[0]
	in := e.reach(r.X, r.Y)
	bad, all := 0, 0
	for j := range l.h {
		a, b := in.row(float64(j), 0.25, l.w)
		all += b - a
		for _, c := range l.count[j*l.w+a : j*l.w+b] {
			if c == 0 {
				bad++
			}
		}
	}
	return bad*10 > all
}

// extent is the ellipse of two widths or one radius, the larger, along each axis.
func (s *session) extent(r *Result) ellipse {
	e := ellipse{angle: r.Angle}
	for i := range e.square {
		v := math.Max(2*zeroNaN(r.Width[i]), zeroNaN(r.Radius[i])) / s.tmpl.pixel
		e.square[i] = v * v
	}
	return e
}

// touches says that two widths or the radius of the cloud reach over the border.
func (s *session) touches(r *Result) bool {
	d := s.extent(r).half(1)
	l := s.levels[0]
	return r.X-d[0] < 0 || r.Y-d[1] < 0 || r.X+d[0] > float64(l.w-1) || r.Y+d[1] > float64(l.h-1)
}
