package settings

import (
	"math"
	"path"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/model"
)

// check holds the keys against each other and fills in the species' own numbers.
func (b *binder) check() {
	b.checkAtom()
	b.checkRelease()
	b.checkFlight()
	b.checkLayout()
	b.checkNames()
	b.checkRegion()
}

func (b *binder) checkAtom() {
	a := &b.s.Atom
	numbers := []string{"atom.mass_u", "atom.wavelength_nm", "atom.linewidth_MHz", "atom.scattering_length_a0"}
	if !b.sound(append(numbers, "atom.species", "atom.state")...) {
		return
	}
	if a.Species == "" {
		if !b.given(numbers...) {
			b.wrong(b.at("atom.species"), "[atom] must give species, such as species = \"87Rb\", or all of mass_u, wavelength_nm, linewidth_MHz and scattering_length_a0")
		} else if a.State != "" {
			b.wrong(b.at("atom.state"), "state chooses among the scattering lengths of a species: give species, or leave state out")
		}
		return
	}
	sp, err := model.LookupSpecies(a.Species)
	if err != nil {
		near := nearest(a.Species, model.SpeciesNames())
		if near != "" {
			near = "; nearest: " + strconv.Quote(near)
		}
		b.wrong(b.at("atom.species"), "species = %s is not known%s; known are %s", strconv.Quote(clip(a.Species)), near, strings.Join(model.SpeciesNames(), ", "))
		return
	}
	if a.State != "" {
		if sp, err = sp.WithState(a.State); err != nil && !a.ScatteringLengthA0.Given {
			b.wrong(b.at("atom.state"), "%v", err)
			return
		}
	}
	if sp.NeedsScatteringLength && !a.ScatteringLengthA0.Given {
		b.wrong(b.at("atom.species"), "%s needs scattering_length_a0: the magnetic field sets it", a.Species)
		return
	}
	a.fill(sp)
}

// fill gives the numbers that the file leaves out the species' own values.
func (a *Atom) fill(sp model.Species) {
	own := func(n *Number, x float64) {
		if !n.Given {
			n.Value = tidy(x)
		}
	}
	own(&a.MassU, sp.Mass/model.U)
	own(&a.WavelengthNm, sp.Wavelength*1e9)
	own(&a.LinewidthMHz, sp.Linewidth/(2e6*math.Pi))
	if !a.ScatteringLengthA0.Given {
		a.ScatteringLengthA0.Value = tidy(sp.ScatteringLength / model.A0)
	}
}

// tidy drops what conversion from SI units has added behind the twelfth digit.
func tidy(x float64) float64 {
	y, _ := strconv.ParseFloat(strconv.FormatFloat(x, 'g', 12, 64), 64)
	return y
}

func (b *binder) checkRelease() {
	t := &b.s.Trap
	switch {
	case !b.sound("trap.release", "trap.release_ms"):
	case t.Release == "sudden" && t.ReleaseMs > 0:
		b.wrong(b.at("trap.release_ms"), "release_ms has no meaning with release = \"sudden\": leave it out, or choose \"linear\" or \"exponential\"")
	case t.Release != "sudden" && t.ReleaseMs == 0:
		b.wrong(b.at("trap.release"), "release = %q needs release_ms, such as release_ms = 0.5", t.Release)
	}
}

func (b *binder) checkFlight() {
	f := &b.s.Clock
	fixed := b.given("flight.fixed_ms")
	switch {
	case !b.sound("flight.fixed_ms", "flight.from", "flight.zero_ms"):
	case fixed && f.From != "":
		b.wrong(b.at("flight.from"), "fixed_ms and from exclude each other: one time for all shots, or one from each shot's metadata")
	case !fixed && f.From == "":
		b.wrong(b.at("flight.from"), "[flight] must give fixed_ms, such as fixed_ms = 15.0, or from, such as from = \"TOF\"")
	case fixed && b.given("flight.unit") && f.Unit != "ms":
		b.wrong(b.at("flight.unit"), "unit is that of a time found in the metadata: fixed_ms is in ms always")
	case fixed && f.FixedMs.Value+f.ZeroMs.Value < 0:
		b.wrong(b.at("flight.zero_ms"), "fixed_ms + zero_ms is negative: zero_ms is added to the time of flight")
	}
}

func (b *binder) checkLayout() {
	s := &b.s.Shots
	if !b.sound("shots.layout", "shots.planes", "shots.suffixes", "shots.dark_files", "shots.density_unit") {
		return
	}
	if s.Layout == "density" {
		b.checkDensity()
		return
	}
	has := func(role string) bool { return slices.Contains(s.Planes, role) }
	switch {
	case b.given("shots.density_unit"):
		b.wrong(b.at("shots.density_unit"), "density_unit is for layout = \"density\": leave it out")
	case !has("atoms") || !has("light"):
		b.wrong(b.at("shots.planes"), "planes must hold \"atoms\" and \"light\"")
	case has("dark_of_light") && !has("dark"):
		b.wrong(b.at("shots.planes"), "\"dark_of_light\" is a second dark: planes must hold \"dark\" too")
	case !has("dark") && len(s.DarkFiles) == 0:
		b.wrong(b.at("shots.planes"), "planes hold no \"dark\": add it, or name the night's dark frames in dark_files")
	case len(s.Suffixes) != len(s.Planes) && (s.Layout == "files" || s.Layout == "extensions" && len(s.Suffixes) > 0):
		b.wrong(b.at("shots.suffixes"), "layout = %q needs one suffix for each of planes: %d planes, %d suffixes", s.Layout, len(s.Planes), len(s.Suffixes))
	case len(s.Suffixes) > 0 && has("unused"):
		b.wrong(b.at("shots.planes"), "planes that have suffixes are found by name: leave \"unused\" out")
	case s.Layout == "cube" && len(s.Suffixes) > 0:
		b.wrong(b.at("shots.suffixes"), "suffixes are for layout = \"files\" or \"extensions\": leave them out")
	}
}

func (b *binder) checkDensity() {
	for _, k := range []string{"planes", "suffixes", "dark_files"} {
		if b.given("shots." + k) {
			b.wrong(b.at("shots."+k), "%s has no meaning with layout = \"density\": leave it out", k)
		}
	}
	b.s.Shots.Planes = nil
	if b.s.Shots.DensityUnit == "" {
		b.wrong(b.at("shots.layout"), "layout = \"density\" needs density_unit: %s", orList(lookup([]string{"shots"}, "density_unit").words))
	}
}

func (b *binder) checkNames() {
	s := &b.s.Shots
	if _, err := regexp.Compile(s.Pattern); err != nil {
		b.wrong(b.at("shots.pattern"), "pattern is no regular expression: %s", strings.TrimPrefix(err.Error(), "error parsing regexp: "))
	}
	for _, f := range s.DarkFiles {
		b.checkPath("shots.dark_files", f)
	}
	b.checkPath("shots.side_table", s.SideTable)
	if s.SideKey != "" && s.SideTable == "" && b.sound("shots.side_table") {
		b.wrong(b.at("shots.side_key"), "side_key names a column of side_table: give side_table, or leave side_key out")
	}
	for _, name := range s.Scan {
		if strings.ContainsAny(name, ",\"") {
			b.wrong(b.at("shots.scan"), "scan: %q cannot be the name of a column", name)
		}
	}
	if err := report.CheckScan(s.Scan); err != nil {
		b.wrong(b.at("shots.scan"), "scan: %v", err)
	}
}

// checkPath holds files to the night's folder.
func (b *binder) checkPath(key, file string) {
	if path.IsAbs(file) || strings.ContainsAny(file, "\\:") || slices.Contains(strings.Split(file, "/"), "..") {
		b.wrong(b.at(key), "%q is no path in the night's folder: give it from there, with forward slashes", file)
	}
}

func (b *binder) checkRegion() {
	if b.s.Fit.Rebin == 3 {
		b.wrong(b.at("fit.rebin"), "rebin = 3: expected 1, 2 or 4")
	}
	all := []string{"region.x", "region.y", "region.width", "region.height"}
	some := slices.ContainsFunc(all, func(n string) bool { return b.given(n) })
	if some && !b.given(all...) && b.sound(all...) {
		b.wrong(b.headers["region"], "[region] needs all of x, y, width and height, or none to have it found")
	}
}
