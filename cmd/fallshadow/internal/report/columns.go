package report

import (
	"image"
	"math"
	"slices"
	"strconv"
	"strings"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/fit"
	"fallshadow/model"
	"fallshadow/model/numbers"
)

// Column is one column of the table of results. Cells that are numbers are filled from
// Facts once, when the shot has been fitted, and then live in the ledger.
type Column struct {
	Name    string
	Unit    string // empty: a word or a pure number
	Meaning string

	number func(*Facts) float64
	word   func(*Facts) string
	row    func(*ledger.Row) string // said by the row itself
}

// Facts is what is known of a shot once it has been fitted.
type Facts struct {
	Flight    float64         // s
	X, Y      float64         // centre of the cloud in pixels of the saved frame
	Reference string          // what the light was made of
	Notes     []string        // words of what was seen in the frames
	Region    image.Rectangle // that was fitted, saved pixels
	Pixel     float64         // side of a fitted pixel in the plane of the atoms, m
	Fit       *fit.Result
}

// Promised is how many of the Columns stand first in every table under names and in an
// order that do not change.
const Promised = 41

// Columns is the one table of columns; the files, the help and the documents are made
// from it. Scan variables follow under their own names.
var Columns = slices.Concat([]Column{
	fromRow("shot", "path of the shot in the night", func(r *ledger.Row) string { return r.Shot }),
	fromRow("file", "files of the shot, joined by ;", func(r *ledger.Row) string { return strings.Join(r.Files, ";") }),
	fromRow("status", "ok or failed", status),
	fromRow("flags", "reasons to distrust the shot, joined by +", func(r *ledger.Row) string { return strings.Join(Flags(r), "+") }),
	word("model", "thermal, bimodal, condensate, or none where the picture is empty", func(f *Facts) string { return f.Fit.Model }),
	word("form", "profiles of the thermal part and the condensate", func(f *Facts) string { return f.Fit.Form }),
	number("flight_ms", "ms", "time of flight with its zero added", func(f *Facts) float64 { return f.Flight * 1e3 }),
},
	value("atoms", "", "atom number N of both parts", 1, func(n *numbers.Result) *numbers.Value { return &n.Atoms }, itself, err, cal),
	value("condensate", "", "atom number N0 of the condensate", 1, func(n *numbers.Result) *numbers.Value { return &n.Condensate }, itself, err, cal),
	value("thermal", "", "atom number of the thermal part", 1, func(n *numbers.Result) *numbers.Value { return &n.Thermal }, itself, err),
	value("fraction", "", "condensate fraction N0/N", 1, func(n *numbers.Result) *numbers.Value { return &n.Fraction }, itself, err, cal),
	value("T_nK", "nK", "temperature from the widths", nano, func(n *numbers.Result) *numbers.Value { return &n.T }, itself, err, cal),
	value("mu_nK", "nK", "chemical potential over k from the radii", nanoK, func(n *numbers.Result) *numbers.Value { return &n.Mu }, itself, err, cal),
	value("mu_from_atoms_nK", "nK", "chemical potential over k from N0", nanoK, func(n *numbers.Result) *numbers.Value { return &n.MuFromAtoms }, itself),
	value("Tc0_nK", "nK", "critical temperature of N atoms of the ideal gas", nano, func(n *numbers.Result) *numbers.Value { return &n.Tc0 }, itself),
	value("t_reduced", "", "T over Tc0", 1, func(n *numbers.Result) *numbers.Value { return &n.Reduced }, itself),
	value("fugacity", "", "fugacity of the thermal part, 1 below Tc", 1, func(n *numbers.Result) *numbers.Value { return &n.Fugacity }, itself),
	[]Column{
		number("width1_um", "um", "rms width of the thermal part along axis 1 after the flight", func(f *Facts) float64 { return f.Fit.Width[0] * micro }),
		number("width2_um", "um", "rms width of the thermal part along axis 2 after the flight", func(f *Facts) float64 { return f.Fit.Width[1] * micro }),
		number("radius1_um", "um", "radius of the condensate along axis 1 after the flight", func(f *Facts) float64 { return f.Fit.Radius[0] * micro }),
		number("radius2_um", "um", "radius of the condensate along axis 2 after the flight", func(f *Facts) float64 { return f.Fit.Radius[1] * micro }),
		number("x_px", "px", "column of the centre, that of the first saved pixel being 0", func(f *Facts) float64 { return f.X }),
		number("y_px", "px", "row of the centre, downwards, that of the first saved pixel being 0", func(f *Facts) float64 { return f.Y }),
		number("angle_deg", "deg", "angle of axis 1 from +x towards +y", func(f *Facts) float64 { return f.Fit.Angle * 180 / math.Pi }),
		number("peak_od", "", "sigma0 n at the peak of the fit; the optical density of a weak resonant probe is sigma0 n/alpha", func(f *Facts) float64 { return f.Fit.PeakOD }),
		number("chi2_per_dof", "", "chi2 over degrees of freedom in the whole picture", func(f *Facts) float64 { return f.Fit.ChiPerDof }),
		number("chi2_cloud", "", "chi2 under the cloud: the worse of the condensate's ellipse and 8x8 blocks", func(f *Facts) float64 { return f.Fit.ChiCloud }),
		number("thermal_over_saturated", "", "thermal atoms over zeta(3) (kT/hbar w)^3", func(f *Facts) float64 { return f.Fit.Numbers.ThermalOverSaturated.V }),
		number("atoms_sum", "", "atom number by the plain sum of the density", func(f *Facts) float64 { return f.Fit.Sum }),
		number("atoms_sum_err", "", "statistical error of atoms_sum", func(f *Facts) float64 { return f.Fit.SumErr }),
		fromRow("reason", "why the shot failed", func(r *ledger.Row) string { return r.Reason }),
		word("reference", "what the light was made of: own or basis", func(f *Facts) string { return f.Reference }),
	},
	value("atoms", "", "atom number N", 1, func(n *numbers.Result) *numbers.Value { return &n.Atoms }, low, high),
	value("condensate", "", "condensate number N0", 1, func(n *numbers.Result) *numbers.Value { return &n.Condensate }, low, high),
	value("thermal", "", "atom number of the thermal part", 1, func(n *numbers.Result) *numbers.Value { return &n.Thermal }, cal, low, high),
	value("fraction", "", "condensate fraction", 1, func(n *numbers.Result) *numbers.Value { return &n.Fraction }, low, high),
	value("T_nK", "nK", "temperature", nano, func(n *numbers.Result) *numbers.Value { return &n.T }, low, high),
	value("mu_nK", "nK", "chemical potential", nanoK, func(n *numbers.Result) *numbers.Value { return &n.Mu }, low, high),
	value("mu_from_atoms_nK", "nK", "chemical potential from N0", nanoK, func(n *numbers.Result) *numbers.Value { return &n.MuFromAtoms }, err, cal),
	value("Tc0_nK", "nK", "critical temperature", nano, func(n *numbers.Result) *numbers.Value { return &n.Tc0 }, err, cal),
	value("t_reduced", "", "T over Tc0", 1, func(n *numbers.Result) *numbers.Value { return &n.Reduced }, err, cal),
	value("t_reduced_corrected", "", "T over Tc with finite-size and first-order interaction shifts", 1, func(n *numbers.Result) *numbers.Value { return &n.ReducedCorrected }, itself, err, cal),
	value("fugacity", "", "fugacity", 1, func(n *numbers.Result) *numbers.Value { return &n.Fugacity }, err),
	value("thermal_over_saturated", "", "thermal atoms over their saturated number", 1, func(n *numbers.Result) *numbers.Value { return &n.ThermalOverSaturated }, err, cal),
	value("mu_over_mu_atoms", "", "mu from the radii over mu from N0", 1, func(n *numbers.Result) *numbers.Value { return &n.MuOverMuAtoms }, itself, err, cal),
	[]Column{
		check("mu_axes_ratio", "mu from radius 1 over mu from radius 2, free fit", func(c *fit.Checks) float64 { return c.MuRatio }),
		check("mu_axes_ratio_err", "statistical error of mu_axes_ratio", func(c *fit.Checks) float64 { return c.MuRatioErr }),
		check("T_axes_ratio", "T along axis 1 over T along axis 2, free fit", func(c *fit.Checks) float64 { return c.TRatio }),
		check("T_axes_ratio_err", "statistical error of T_axes_ratio", func(c *fit.Checks) float64 { return c.TRatioErr }),
		number("wings_T_nK", "nK", "temperature from the wings alone", func(f *Facts) float64 { return f.Fit.Checks.WingsT * nano }),
		number("wings_T_nK_err", "nK", "statistical error of wings_T_nK", func(f *Facts) float64 { return f.Fit.Checks.WingsTErr * nano }),
		check("tied_over_free", "chi2 of the tied fit less that of the free fit", func(c *fit.Checks) float64 { return c.TiedOverFree }),
		check("tied_over_free_dof", "parameters that the free fit has more", func(c *fit.Checks) float64 { return float64(c.TiedOverFreeDof) }),
		check("atoms_over_sum", "atoms over atoms_sum", func(c *fit.Checks) float64 { return c.AtomsOverSum }),
		check("condensate_detected", "N0 that would have been reported beside the thermal part; the upper limit is condensate_high", func(c *fit.Checks) float64 { return c.CondensateDetected }),
	},
	value("phase_space_density", "", "peak density in the trap times the cube of the thermal wavelength", 1, func(n *numbers.Result) *numbers.Value { return &n.PhaseSpaceDensity }, itself, err, cal),
	value("peak_density_um3", "1/um^3", "peak density in the trap", perCubicMicro, func(n *numbers.Result) *numbers.Value { return &n.PeakDensity }, itself, err, cal),
	value("entropy_per_atom", "k", "entropy per atom of the ideal gas", 1, func(n *numbers.Result) *numbers.Value { return &n.EntropyPerAtom }, itself, err, cal),
	value("thomas_fermi_parameter", "", "N0 a over the oscillator length", 1, func(n *numbers.Result) *numbers.Value { return &n.ThomasFermiParameter }, itself, err),
	value("collapse", "", "N0 over the number at which an attractive condensate collapses", 1, func(n *numbers.Result) *numbers.Value { return &n.Collapse }, itself, err),
	[]Column{
		correlation("thermal", "condensate", 0, 1),
		correlation("thermal", "T", 0, 2),
		correlation("thermal", "mu", 0, 3),
		correlation("condensate", "T", 1, 2),
		correlation("condensate", "mu", 1, 3),
		correlation("T", "mu", 2, 3),
		number("iterations", "", "steps of the minimisation", func(f *Facts) float64 { return float64(f.Fit.Iterations) }),
		fromRow("bad", "a person's word against the shot", func(r *ledger.Row) string { return r.Bad }),
	},
)

// Factors from SI to the units of the columns.
const (
	nano          = 1e9
	micro         = 1e6
	nanoK         = 1e9 / model.KB // J to nK
	perCubicMicro = 1e-18
)

func fromRow(name, meaning string, get func(*ledger.Row) string) Column {
	return Column{Name: name, Meaning: meaning, row: get}
}

func word(name, meaning string, get func(*Facts) string) Column {
	return Column{Name: name, Meaning: meaning, word: get}
}

func number(name, unit, meaning string, get func(*Facts) float64) Column {
	return Column{Name: name, Unit: unit, Meaning: meaning, number: get}
}

func check(name, meaning string, get func(*fit.Checks) float64) Column {
	return number(name, "", meaning, func(f *Facts) float64 { return get(&f.Fit.Checks) })
}

// correlation is that of the statistical errors of two measured numbers, by their places in
// a numbers.Measured; empty where the cloud lacks one of them.
func correlation(a, b string, i, j int) Column {
	return number("corr_"+a+"_"+b, "", "correlation of the statistical errors of "+a+" and "+b, func(f *Facts) float64 {
		if r := f.Fit.Numbers.Correlation[i][j]; r != 0 {
			return r
		}
		return math.NaN()
	})
}

// part is one part of a value with its errors.
type part struct {
	suffix, meaning string // of its name and before the meaning of the value
	get             func(*numbers.Value) float64
}

var (
	itself = part{"", "", func(v *numbers.Value) float64 { return v.V }}
	err    = part{"_err", "statistical error of ", func(v *numbers.Value) float64 { return v.Err }}
	cal    = part{"_cal", "calibration error of ", func(v *numbers.Value) float64 { return v.Cal }}
	low    = part{"_low", "lower end of the interval of ", func(v *numbers.Value) float64 { return v.Low }}
	high   = part{"_high", "upper end of the interval, or upper limit, of ", func(v *numbers.Value) float64 { return v.High }}
)

// value makes the columns of parts of a number.
func value(name, unit, meaning string, factor float64, pick func(*numbers.Result) *numbers.Value, parts ...part) []Column {
	var columns []Column
	for _, p := range parts {
		columns = append(columns, number(name+p.suffix, unit, p.meaning+meaning, func(f *Facts) float64 {
			return p.get(pick(&f.Fit.Numbers)) * factor
		}))
	}
	return columns
}

func status(r *ledger.Row) string {
	if r.Reason != "" {
		return "failed"
	}
	return "ok"
}

// Fill writes the cells of a fitted shot, its flags and the shifts of its calibrations
// into its row.
func Fill(r *ledger.Row, f *Facts) {
	for _, c := range Columns {
		switch {
		case c.number != nil:
			r.SetNumber(c.Name, c.number(f))
		case c.word != nil:
			r.SetWord(c.Name, c.word(f))
		}
	}
	r.Flags = slices.Concat(f.Notes, f.Fit.Flags)
	for _, s := range f.Fit.Numbers.Shifts {
		fillShift(r, s)
	}
}

func fillShift(r *ledger.Row, s numbers.Effect) {
	change := map[string]float64{}
	for name, v := range s.Change.All() {
		if v-v == 0 { // finite
			change[name] = v
		}
	}
	if r.Shifts == nil {
		r.Shifts = map[string]ledger.Shift{}
	}
	r.Shifts[s.Name] = ledger.Shift{Known: s.Known, Change: change}
}

// Cell returns the cell of a row as text, with the digits that give a number back.
func (c Column) Cell(r *ledger.Row) string {
	if c.row != nil {
		return c.row(r)
	}
	if v, ok := r.Numbers[c.Name]; ok {
		return strconv.FormatFloat(v, 'g', -1, 64)
	}
	return r.Words[c.Name]
}

// IsNumber reports whether the cells of the column are numbers.
func (c Column) IsNumber() bool { return c.number != nil }
