package settings

import (
	"cmp"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// key is one setting: its name, what it may be, where it goes and what it means. All
// that is said of settings anywhere (checks, defaults, template, tables) is made from
// the list of keys.
type key struct {
	table, name string
	unit        string // as a person reads it
	field       func(*Settings) any
	def         string   // in TOML, empty where there is none
	sample      string   // a value for the template, where it is not the default
	low, high   float64  // of every number
	most        float64  // that err may be; where it is 0, less than the value
	words       []string // that the text may be
	also        []string // names that others give it
	doc         string
	required    bool
	ends        bool      // of names, so that a space before them is part of the text
	shown       bool      // stands uncommented in the template
	silent      bool      // changes no number of a given shot: not in the digest
	unstated    certainty // what a missing uncertainty means
}

// certainty is what a calibrated setting's missing uncertainty means.
type certainty int

const (
	unknown     certainty = iota // nobody knows: the numbers that need it get no calibration error
	exact                        // known well enough always
	exactAtZero                  // exact while it is 0: a correction that is not made
)

// tables holds the tables of the file in order, with what they are about.
var tables = []struct{ name, doc string }{
	{"atom", "The atom and its imaging line: a species known by name, or the four numbers; a number given beside a species replaces the species' own."},
	{"trap", "The harmonic trap. Frequencies, not angular ones. Without a tilt axes 1 and 2 lie in the picture and axis 3 is the line of sight."},
	{"camera", "The sensor and the optics. x is the column, y the row (downwards), both from 0."},
	{"probe", "The imaging pulse: sigma0 n = alpha (1 + 4 detuning^2) ln(I0/I) + (I0 - I)/Isat."},
	{"flight", "The time of flight: fixed_ms, or the name in the shot's metadata (header keyword, named group of shots.pattern, column of the side table) that holds it."},
	{"shots", "What makes a shot."},
	{"region", "The part of the picture that is fitted, in saved pixels. Leave all four out and it is found, shot by shot."},
	{"fit", "How clouds are fitted."},
}

const (
	hz   = "Hz, not angular"
	um   = "um"
	ms   = "ms"
	deg  = "degrees"
	full = "full widths Gamma"
)

var keys = []key{
	{table: "atom", name: "species", field: func(s *Settings) any { return &s.Atom.Species }, sample: `"87Rb"`, shown: true, silent: true,
		also: []string{"name", "element", "isotope", "atom"},
		doc:  "The atom, mass number and symbol."},
	{table: "atom", name: "state", field: func(s *Settings) any { return &s.Atom.State }, sample: `"|1,-1>"`, silent: true,
		doc: "The internal state |F,mF> in the trap, which chooses the scattering length; left out, the usual state of the species."},
	{table: "atom", name: "mass_u", unit: "u", field: func(s *Settings) any { return &s.Atom.MassU }, sample: "86.909180529", low: 1, high: 300,
		doc: "Mass. The species' own if left out."},
	{table: "atom", name: "wavelength_nm", unit: "nm", field: func(s *Settings) any { return &s.Atom.WavelengthNm }, sample: "780.241209686", low: 100, high: 3000,
		also: []string{"lambda_nm"},
		doc:  "Vacuum wavelength of the imaging line. The species' own if left out."},
	{table: "atom", name: "linewidth_MHz", unit: "MHz", field: func(s *Settings) any { return &s.Atom.LinewidthMHz }, sample: "6.0666", low: 1e-4, high: 1000,
		also: []string{"gamma_MHz", "gamma"},
		doc:  "Natural full width Gamma/2pi of the imaging line. The species' own if left out."},
	{table: "atom", name: "scattering_length_a0", unit: "Bohr radii", field: func(s *Settings) any { return &s.Atom.ScatteringLengthA0 }, sample: "{ value = 100.4, err = 0.1 }", low: -1e5, high: 1e5, most: 1e4,
		doc: "s-wave scattering length at the field of the trap. The species' own if left out; to be given where a magnetic field sets it."},

	{table: "trap", name: "axis1_hz", unit: hz, field: func(s *Settings) any { return &s.Trap.Axis1Hz }, sample: "{ value = 20.0, err = 0.1 }", low: 1e-3, high: 1e6, required: true, shown: true,
		also: []string{"fx_hz", "x_hz", "axis_x_hz", "f1_hz"},
		doc:  "Trap frequency along axis 1."},
	{table: "trap", name: "axis2_hz", unit: hz, field: func(s *Settings) any { return &s.Trap.Axis2Hz }, sample: "{ value = 120.0, err = 0.5 }", low: 1e-3, high: 1e6, required: true, shown: true,
		also: []string{"fy_hz", "y_hz", "axis_y_hz", "f2_hz"},
		doc:  "Trap frequency along axis 2."},
	{table: "trap", name: "sight_hz", unit: hz, field: func(s *Settings) any { return &s.Trap.SightHz }, sample: "{ value = 120.0, err = 0.5 }", low: 1e-3, high: 1e6, required: true, shown: true,
		also: []string{"axis3_hz", "fz_hz", "z_hz", "axis_z_hz", "f3_hz", "line_of_sight_hz"},
		doc:  "Trap frequency along axis 3, the line of sight."},
	{table: "trap", name: "angle_deg", unit: deg, field: func(s *Settings) any { return &s.Trap.AngleDeg }, def: "0.0", sample: "4.0", low: -180, high: 180, most: 45, shown: true, unstated: exact,
		also: []string{"rotation_deg"},
		doc:  "Angle of axis 1 in the picture from +x towards +y: clockwise on the screen, y points down."},
	{table: "trap", name: "tilt_deg", unit: deg, field: func(s *Settings) any { return &s.Trap.TiltDeg }, def: "0.0", low: -180, high: 180, most: 45, unstated: exact,
		doc: "An oblique camera: before it is turned by angle_deg, the trap is tilted by this angle out of the picture."},
	{table: "trap", name: "tilt_about_deg", unit: deg, field: func(s *Settings) any { return &s.Trap.TiltAboutDeg }, def: "0.0", low: -180, high: 180,
		doc: "Direction in the plane of axes 1 and 2 about which the trap is tilted, from axis 1 towards axis 2: 0 tilts about axis 1, 90 about axis 2."},
	{table: "trap", name: "release", field: func(s *Settings) any { return &s.Trap.Release }, def: `"sudden"`, words: []string{"sudden", "linear", "exponential"},
		doc: "How the trap is switched off: all at once, or omega^2 ramped down linearly or exponentially."},
	{table: "trap", name: "release_ms", unit: ms, field: func(s *Settings) any { return &s.Trap.ReleaseMs }, def: "0.0", low: 0, high: 1000,
		doc: "Length of the linear ramp, or time constant of the exponential one. The flight counts from its start."},

	{table: "camera", name: "pixel_um", unit: um, field: func(s *Settings) any { return &s.Camera.PixelUm }, sample: "6.45", low: 0.5, high: 200, required: true, shown: true, unstated: exact,
		also: []string{"pixel_size_um", "pixelsize_um"},
		doc:  "Side of the physical pixel on the sensor."},
	{table: "camera", name: "binning", field: func(s *Settings) any { return &s.Camera.Binning }, def: "1", low: 1, high: 64, shown: true,
		also: []string{"bin"},
		doc:  "Physical pixels along one side of a saved pixel."},
	{table: "camera", name: "magnification", field: func(s *Settings) any { return &s.Camera.Magnification }, sample: "{ value = 2.0, err = 0.02 }", low: 1e-3, high: 1000, required: true, shown: true,
		also: []string{"mag"},
		doc:  "Size on the sensor over size of the object."},
	{table: "camera", name: "electrons_per_count", field: func(s *Settings) any { return &s.Camera.ElectronsPerCount }, sample: "1.0", low: 1e-3, high: 1e4, shown: true,
		also: []string{"gain", "conversion"},
		doc:  "Photoelectrons per count. Left out, it is measured from the night. It takes no uncertainty: the atoms, the light and counts_per_isat are all counts, so that an error cancels."},
	{table: "camera", name: "read_noise_electrons", unit: "electrons", field: func(s *Settings) any { return &s.Camera.ReadNoise }, sample: "6.0", low: 1e-3, high: 1e4, shown: true,
		doc: "Noise of one read, rms electrons per saved pixel. Left out, it is measured from the night."},
	{table: "camera", name: "full_scale_counts", unit: "counts", field: func(s *Settings) any { return &s.Camera.FullScale }, sample: "65535", low: 15, high: 1e10,
		also: []string{"saturation_counts", "full_well_counts"},
		doc:  "Counts at which the camera stops counting, such as 65535 for 16 bits, 16383 for 14, 4095 for 12. Left out, it is taken from the highest count where many pixels share it."},
	{table: "camera", name: "bad_pixels", field: func(s *Settings) any { return &s.Camera.BadPixels }, def: "[]", sample: "[[11, 7], [200, 31]]", low: 0, high: 65535,
		also: []string{"hot_pixels", "dead_pixels"},
		doc:  "Saved pixels never to be used, each [x, y]."},
	{table: "camera", name: "resolution_um", unit: um, field: func(s *Settings) any { return &s.Camera.ResolutionUm }, def: "0.0", sample: "{ value = 3.0, err = 0.5 }", low: 0, high: 100, most: 20, shown: true,
		also: []string{"psf_um", "blur_um"},
		doc:  "Optical resolution in the plane of the atoms, rms of the spot (0.21 wavelength/NA at best, Rayleigh distance over 2.9)."},

	{table: "probe", name: "alpha", field: func(s *Settings) any { return &s.Probe.Alpha }, def: "1.0", sample: "{ value = 2.0, err = 0.1 }", low: 0.1, high: 100, shown: true,
		doc: "Correction of the cross-section for polarisation and level structure: sigma = sigma0/alpha, so that the atom number grows with it."},
	{table: "probe", name: "detuning_gamma", unit: full, field: func(s *Settings) any { return &s.Probe.DetuningGamma }, def: "0.0", low: -100, high: 100, most: 10, unstated: exactAtZero,
		also: []string{"detuning"},
		doc:  "Detuning of the probe from resonance."},
	{table: "probe", name: "counts_per_isat", unit: "counts", field: func(s *Settings) any { return &s.Probe.CountsPerIsat }, sample: "{ value = 9000.0, err = 300.0 }", low: 1e-2, high: 1e12, shown: true,
		also: []string{"isat_counts", "isat", "counts_per_saturation"},
		doc:  "Counts per saved pixel, at this exposure and gain, of light at the bare two-level saturation intensity (not multiplied by alpha). Left out, the probe is taken as weak."},
	{table: "probe", name: "exposure_us", unit: "us", field: func(s *Settings) any { return &s.Probe.ExposureUs }, sample: "40.0", low: 0.1, high: 1e5, shown: true,
		also: []string{"pulse_us", "tau_us"},
		doc:  "Length of the imaging pulse: for the photons scattered per atom and to check counts_per_isat."},
	{table: "probe", name: "stray_fraction", field: func(s *Settings) any { return &s.Probe.StrayFraction }, def: "0.0", low: 0, high: 0.5, most: 0.2, unstated: exactAtZero,
		doc: "Fraction of the counted light that atoms cannot absorb; it caps ln(I0/I) at about ln(1/fraction)."},

	{table: "flight", name: "fixed_ms", unit: ms, field: func(s *Settings) any { return &s.Clock.FixedMs }, sample: "15.0", low: 0, high: 1e4,
		doc: "One time of flight for all shots, instead of from."},
	{table: "flight", name: "from", field: func(s *Settings) any { return &s.Clock.From }, sample: `"TOF"`, shown: true,
		also: []string{"header", "keyword", "group", "column", "key", "tof"},
		doc:  "Name under which a shot's metadata hold its time of flight."},
	{table: "flight", name: "unit", field: func(s *Settings) any { return &s.Clock.Unit }, def: `"ms"`, words: []string{"ms", "us", "s"}, shown: true,
		doc: "Unit of the number found under that name."},
	{table: "flight", name: "zero_ms", unit: ms, field: func(s *Settings) any { return &s.Clock.ZeroMs }, def: "0.0", sample: "{ value = 0.0, err = 0.01 }", low: -100, high: 100, most: 10, shown: true,
		also: []string{"offset_ms"},
		doc:  "Added to every time of flight: the delay between the clock's zero and the release. A time counted from elsewhere than the release is no flight, and not to be mended here."},

	{table: "shots", name: "layout", field: func(s *Settings) any { return &s.Shots.Layout }, def: `"cube"`, words: []string{"cube", "extensions", "files", "density"}, shown: true, silent: true,
		doc: "One file with the frames as planes of one array, one with the frames as image extensions, one file a frame, or a ready density image."},
	{table: "shots", name: "planes", field: func(s *Settings) any { return &s.Shots.Planes }, def: `["atoms", "light", "dark"]`, words: []string{"atoms", "light", "dark", "dark_of_light", "unused"}, shown: true, silent: true,
		also: []string{"frames", "order"},
		doc:  "Order of the frames in the file. Without dark the night's dark_files are used; dark_of_light is a second dark taken beside the light frame; unused skips a plane."},
	{table: "shots", name: "suffixes", field: func(s *Settings) any { return &s.Shots.Suffixes }, def: "[]", sample: `["_atoms", "_light", "_dark"]`, silent: true, ends: true,
		also: []string{"suffix", "endings"},
		doc:  "One for each of planes. For layout files: the end of the file name before its ending; or a folder, where it ends in /. For layout extensions, where given: the names of the extensions, whatever their order."},
	{table: "shots", name: "pattern", field: func(s *Settings) any { return &s.Shots.Pattern }, def: `""`, sample: `'scan_(?P<run>\d+)_tof(?P<tof>[\d.]+)ms'`, silent: true,
		also: []string{"regex", "regexp"},
		doc:  "Regular expression over the path in the night: its named groups become metadata, and files that do not match are no shots. Single quotes keep backslashes."},
	{table: "shots", name: "dark_files", field: func(s *Settings) any { return &s.Shots.DarkFiles }, def: "[]", sample: `["dark/*.fits"]`, silent: true,
		doc: "The night's dark frames: paths in the night's folder, in which * stands for any letters of a name and ? for one."},
	{table: "shots", name: "side_table", field: func(s *Settings) any { return &s.Shots.SideTable }, def: `""`, sample: `"log.csv"`, silent: true,
		also: []string{"sidecar", "table", "csv"},
		doc:  "CSV file in the night's folder with metadata, a row a shot, under one line of names."},
	{table: "shots", name: "side_key", field: func(s *Settings) any { return &s.Shots.SideKey }, def: `""`, sample: `"shot"`, silent: true,
		doc: "Column of the side table that names the shot, by its path, a file name or its number; the first column if left out. Where a name holds several numbers, a group of pattern with the name of the column says which."},
	{table: "shots", name: "scan", field: func(s *Settings) any { return &s.Shots.Scan }, def: "[]", sample: `["EVAP"]`, silent: true,
		also: []string{"variables", "scan_variables"},
		doc:  "Names in the metadata to carry into the table."},
	{table: "shots", name: "density_unit", field: func(s *Settings) any { return &s.Shots.DensityUnit }, sample: `"log_ratio"`, words: []string{"log_ratio", "sigma0_n", "atoms_per_pixel"},
		doc: "For layout density, what a pixel holds: ln(I0/I), sigma0 n, or atoms."},

	{table: "region", name: "x", unit: "pixels", field: func(s *Settings) any { return &s.Region.X }, sample: "0", high: 65535, doc: "First column."},
	{table: "region", name: "y", unit: "pixels", field: func(s *Settings) any { return &s.Region.Y }, sample: "0", high: 65535, doc: "First row."},
	{table: "region", name: "width", unit: "pixels", field: func(s *Settings) any { return &s.Region.Width }, sample: "320", low: 8, high: 65535, doc: "Columns."},
	{table: "region", name: "height", unit: "pixels", field: func(s *Settings) any { return &s.Region.Height }, sample: "320", low: 8, high: 65535, doc: "Rows."},

	{table: "fit", name: "thermal", field: func(s *Settings) any { return &s.Fit.Thermal }, def: `"bose"`, words: []string{"bose", "gauss", "semi-ideal"},
		doc: "Profile of the thermal part: Bose-enhanced, gaussian, or semi-ideal (beside a condensate it felt the condensate in the trap)."},
	{table: "fit", name: "tie", field: func(s *Settings) any { return &s.Fit.Tie }, def: `"tied"`, words: []string{"tied", "free"},
		doc: "tied: all widths follow from one temperature and one chemical potential through trap and flight. free: each width its own parameter."},
	{table: "fit", name: "angle", field: func(s *Settings) any { return &s.Fit.Angle }, def: `"fixed"`, words: []string{"fixed", "free"},
		doc: "Whether trap.angle_deg holds, or is fitted from there."},
	{table: "fit", name: "fugacity", field: func(s *Settings) any { return &s.Fit.Fugacity }, def: `"model"`, words: []string{"model", "free", "number"},
		doc: "model: 1 beside a condensate, fitted without one. free: fitted always. number: the thermal number follows from T through the trap."},
	{table: "fit", name: "errors", field: func(s *Settings) any { return &s.Fit.Errors }, def: `"stated"`, words: []string{"stated", "scaled"},
		doc: "stated: statistical errors from the camera's noise as stated. scaled: times the root of chi2 a pixel."},
	{table: "fit", name: "condensate_chi2", field: func(s *Settings) any { return &s.Fit.CondensateChi2 }, sample: "18.0", low: 1, high: 1e6,
		also: []string{"threshold", "criterion"},
		doc:  "By how much chi2 must fall before a condensate is reported beside a thermal part. Left out, the program's own threshold."},
	{table: "fit", name: "rebin", field: func(s *Settings) any { return &s.Fit.Rebin }, def: "1", low: 1, high: 4,
		doc: "Saved pixels summed along each side before the fit: 1, 2 or 4."},
	{table: "fit", name: "reference", field: func(s *Settings) any { return &s.Fit.Reference }, def: `"auto"`, words: []string{"auto", "own", "basis"},
		doc: "The light the cloud would have seen: the shot's own light frame, the best combination of the night's light frames, or whichever is better on parts left out."},
	{table: "fit", name: "basis_size", field: func(s *Settings) any { return &s.Fit.BasisSize }, def: "40", low: 2, high: 200,
		doc: "How many neighbouring light frames the combination may use."},
}

func (k *key) full() string { return k.table + "." + k.name }

// lookup finds a key in the table that a header names, or nil.
func lookup(header []string, name string) *key {
	if len(header) != 1 {
		return nil
	}
	for i := range keys {
		if keys[i].table == header[0] && keys[i].name == name {
			return &keys[i]
		}
	}
	return nil
}

func (k *key) isText() bool {
	switch k.field(&Settings{}).(type) {
	case *string, *[]string:
		return true
	}
	return false
}

// calibrated reports whether the key takes an uncertainty.
func (k *key) calibrated() bool {
	_, ok := k.field(&Settings{}).(*Quantity)
	return ok
}

// whole reports whether the key's numbers are whole.
func (k *key) whole() bool {
	switch k.field(&Settings{}).(type) {
	case *int, *[][2]int:
		return true
	}
	return false
}

// expected says what the value must be, for messages.
func (k *key) expected() string {
	number := "a number"
	if k.unit != "" {
		number += " (" + k.unit + ")"
	}
	switch k.field(&Settings{}).(type) {
	case *Quantity:
		return number + " or { value = ..., err = ... }"
	case *int:
		return strings.Replace(number, "number", "whole number", 1)
	case *string:
		if k.words != nil {
			return orList(k.words)
		}
		return "text in quotes"
	case *[]string:
		if k.words != nil {
			return "a list of " + orList(k.words)
		}
		return "a list of texts"
	case *[][2]int:
		return "a list of pixels [[x, y], ...]"
	}
	return number
}

// form says how the key is written.
func (k *key) form() string {
	if k.calibrated() {
		return k.name + " = { value = ..., err = ... }"
	}
	return k.name + " = " + cmp.Or(k.sample, k.def)
}

// domain says what the value may be, for the documentation; empty for free text.
func (k *key) domain() string {
	if k.words != nil {
		return strings.Join(k.words, ", ")
	}
	if k.isText() {
		return ""
	}
	return short(k.low) + " to " + short(k.high)
}

// short writes a number to six digits.
func short(x float64) string {
	if x == math.Trunc(x) && math.Abs(x) < 1e7 {
		return strconv.FormatFloat(x, 'f', 0, 64)
	}
	return strconv.FormatFloat(x, 'g', 6, 64)
}

func orList(words []string) string {
	quoted := make([]string, len(words))
	for i, w := range words {
		quoted[i] = strconv.Quote(w)
	}
	if len(quoted) < 2 {
		return strings.Join(quoted, "")
	}
	return fmt.Sprintf("%s or %s", strings.Join(quoted[:len(quoted)-1], ", "), quoted[len(quoted)-1])
}
