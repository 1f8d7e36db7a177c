package settings

import (
	"errors"
	"flag"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

var update = flag.Bool("update", false, "rewrite the golden files")

// base is a small file in which nothing is wrong.
const base = `[atom]
species = "87Rb"
[trap]
axis1_hz = 20.0
axis2_hz = 120.0
sight_hz = { value = 120.0, err = 0.5 }
[camera]
pixel_um = 6.45
magnification = 2.0
[flight]
from = "TOF"
`

// wrongs are files with something wrong in them: base with one text replaced, or with
// lines added at the end where old is empty. What is said of each stands in
// testdata/wrong.golden, to be read.
var wrongs = []wrong{
	{"angular frequency", "axis1_hz = 20.0", "axis1_rad_s = 125.66"},
	{"kilohertz", "axis2_hz = 120.0", "axis2_khz = 0.12"},
	{"axes by other names", "sight_hz", "fz_hz"},
	{"pixel in m", "pixel_um = 6.45", "pixel_m = 6.45e-6"},
	{"pixel in m under the right name", "pixel_um = 6.45", "pixel_um = 6.45e-6"},
	{"pixel in nm under the right name", "pixel_um = 6.45", "pixel_um = 6450"},
	{"detuning in MHz", "", "[probe]\ndetuning_mhz = 3.0\n"},
	{"linewidth in rad/s", `species = "87Rb"`, "species = \"87Rb\"\nlinewidth_rad_s = 38.117e6"},
	{"exposure in s", "", "[probe]\nexposure_us = 40e-6\n"},
	{"misspelt key", "magnification", "magnifcation"},
	{"exchanged letters and capitals", "axis1_hz", "Axsi1_Hz"},
	{"key in another table", "from = \"TOF\"", "from = \"TOF\"\nbinning = 2"},
	{"trade word", "", "[probe]\nisat_counts = 9000\n"},
	{"gain", "magnification", "gain = 1.0\nmagnification"},
	{"nothing like it", "magnification", "wobble_factor = 1.0\nmagnification"},
	{"key before the tables", "[atom]", "axis1_hz = 20.0\n[atom]"},
	{"misspelt table", "[camera]", "[camra]"},
	{"unknown table", "", "[laser]\npower_mW = 3\n"},
	{"table below a table", "", "[trap.axis1_hz]\nvalue = 20.0\n"},
	{"table below a table that is no key", "", "[shots.names]\natoms = 'x'\n"},
	{"table in double brackets", "[trap]", "[[trap]]"},
	{"table twice", "", "[trap]\nangle_deg = 4.0\n"},
	{"table as a key", "[flight]\nfrom = \"TOF\"\n", ""},
	{"key twice", "axis2_hz = 120.0", "axis2_hz = 120.0\naxis2_hz = 121.0"},
	{"table missing", "[camera]\npixel_um = 6.45\nmagnification = 2.0\n", ""},
	{"keys missing", "axis1_hz = 20.0\naxis2_hz = 120.0\n", ""},
	{"no species", "species = \"87Rb\"\n", ""},
	{"unknown species", "87Rb", "87Rn"},
	{"species without a scattering length", "87Rb", "39K"},
	{"unknown state", `species = "87Rb"`, "species = \"87Rb\"\nstate = \"|3,3>\""},
	{"state without a species", `species = "87Rb"`, "mass_u = 87\nwavelength_nm = 780\nlinewidth_MHz = 6\nscattering_length_a0 = 100\nstate = \"|1,-1>\""},
	{"text for a number", "axis1_hz = 20.0", `axis1_hz = "20 Hz"`},
	{"number for text", `"87Rb"`, "87"},
	{"date for a number", "axis1_hz = 20.0", "axis1_hz = 2024-05-01"},
	{"list for a number", "axis1_hz = 20.0", "axis1_hz = [20.0, 0.1]"},
	{"fraction for a whole number", "magnification", "binning = 2.0\nmagnification"},
	{"not a number", "axis1_hz = 20.0", "axis1_hz = nan"},
	{"infinity", "axis1_hz = 20.0", "axis1_hz = { value = +inf, err = inf }"},
	{"negative", "axis1_hz = 20.0", "axis1_hz = -20.0"},
	{"overflow", "magnification", "binning = 99999999999999999999\nmagnification"},
	{"uncertainty of something exact", "magnification", "electrons_per_count = { value = 1.0, err = 0.1 }\nmagnification"},
	{"uncertainty under another name", "err = 0.5", "sigma = 0.5"},
	{"negative uncertainty", "err = 0.5", "err = -0.5"},
	{"uncertainty as large as the value", "err = 0.5", "err = 120"},
	{"uncertainty without a value", "{ value = 120.0, err = 0.5 }", "{ err = 0.5 }"},
	{"value twice", "{ value = 120.0, err = 0.5 }", "{ value = 120.0, value = 121.0 }"},
	{"uncertainty by a dot", "axis1_hz = 20.0", "axis1_hz.value = 20.0\naxis1_hz.err = 0.1"},
	{"wrong word", "", "[fit]\nthermal = \"gaussian\"\ntie = \"none\"\n"},
	{"wrong plane", "", "[shots]\nplanes = [\"atoms\", \"lihgt\", \"dark\", \"dark\"]\n"},
	{"bad pixels", "magnification", "bad_pixels = [[1, 2], [3], [4, 5.5], 7, [-1, 70000]]\nmagnification"},
	{"space at the end of a text", `"TOF"`, `"TOF "`},
	{"two lines of text", `"TOF"`, `"T\nOF"`},
	{"uncertainties of no laboratory", "", "[probe]\nstray_fraction = { value = 0.5, err = 0.5 }\ndetuning_gamma = { value = 0, err = 50 }\n"},
	{"uncertain blur", "magnification", "resolution_um = { value = 0.0, err = 90 }\nmagnification"},
	{"uncertain angle", "axis1_hz", "angle_deg = { value = 0, err = 180 }\ntilt_deg = { value = 0, err = 46 }\naxis1_hz"},
	{"clock of a day", `from = "TOF"`, "from = \"TOF\"\nzero_ms = -1000"},
	{"uncertain clock", `from = "TOF"`, "from = \"TOF\"\nzero_ms = { value = 0, err = 900 }"},
	{"scan by the name of a column", "", "[shots]\nscan = ['EVAP', 'T_nK']\n"},
	{"release without a time", "axis1_hz", "release = \"linear\"\naxis1_hz"},
	{"sudden release with a time", "axis1_hz", "release_ms = 0.5\naxis1_hz"},
	{"no flight", "from = \"TOF\"\n", ""},
	{"two flights", "from = \"TOF\"", "from = \"TOF\"\nfixed_ms = 15.0"},
	{"fixed flight in another unit", "from = \"TOF\"", "fixed_ms = 15.0\nunit = \"us\""},
	{"flight before zero", "from = \"TOF\"", "fixed_ms = 15.0\nzero_ms = -20.0"},
	{"no light frame", "", "[shots]\nplanes = [\"atoms\", \"dark\"]\n"},
	{"no dark frame", "", "[shots]\nplanes = [\"atoms\", \"light\"]\n"},
	{"second dark alone", "", "[shots]\nplanes = [\"atoms\", \"light\", \"dark_of_light\"]\n"},
	{"files without suffixes", "", "[shots]\nlayout = \"files\"\nsuffixes = [\"_a\"]\n"},
	{"space behind a suffix, and nothing else", "", "[shots]\nlayout = \"files\"\nsuffixes = [\" a \", \" \", \"d\"]\n"},
	{"suffixes of a cube", "", "[shots]\nsuffixes = [\"_a\", \"_l\", \"_d\"]\n"},
	{"unused plane among names", "", "[shots]\nlayout = \"extensions\"\nplanes = [\"atoms\", \"light\", \"dark\", \"unused\"]\nsuffixes = [\"A\", \"L\", \"D\", \"U\"]\n"},
	{"density without a unit", "", "[shots]\nlayout = \"density\"\nplanes = [\"atoms\"]\n"},
	{"unit without density", "", "[shots]\ndensity_unit = \"log_ratio\"\n"},
	{"broken pattern", "", "[shots]\npattern = '(?P<tof>'\n"},
	{"path out of the night", "", "[shots]\ndark_files = ['../dark.fits']\nside_table = '/log.csv'\n"},
	{"column of no table", "", "[shots]\nside_key = 'shot'\nscan = ['a,b', '']\n"},
	{"half a region", "", "[region]\nx = 10\ny = 10\nwidth = 100\n"},
	{"rebinning by 3", "", "[fit]\nrebin = 3\n"},
	{"decimal comma", "pixel_um = 6.45", "pixel_um = 6,45"},
	{"plus or minus", "magnification = 2.0", "magnification = 2.0 ± 0.02"},
	{"uncertainty in brackets", "magnification = 2.0", "magnification = 2.00(2)"},
	{"unit behind the number", "axis1_hz = 20.0", "axis1_hz = 20.0 Hz"},
	{"text without quotes", `"87Rb"`, "87Rb # rubidium"},
	{"word without quotes", `"TOF"`, "TOF"},
	{"bare point", "magnification = 2.0", "magnification = 2."},
	{"no value", "magnification = 2.0", "magnification ="},
	{"colon", "magnification = 2.0", "magnification: 2.0"},
	{"header not closed", "[camera]", "[camera"},
	{"list not closed", "magnification", "bad_pixels = [[1, 2], [3, 4]\nmagnification"},
	{"text not closed", `"TOF"`, `"TOF`},
	{"leading zero", "axis1_hz = 20.0", "axis1_hz = 020.0"},
	{"dotted key and table", "[atom]", "trap.angle_deg = 3.0\n[atom]"},
	{"many at once", "axis1_hz = 20.0\naxis2_hz = 120.0", "axis1_rad_s = 125.66\naxis2_hz = -3\nangle_deg = 4 degrees"},
}

func (w wrong) text() string {
	if w.name == "table as a key" {
		return "flight = 15\n" + strings.Replace(base, "[flight]\nfrom = \"TOF\"\n", "", 1)
	}
	if w.old == "" {
		return base + w.new
	}
	return strings.Replace(base, w.old, w.new, 1)
}

type wrong struct{ name, old, new string }

func TestWrongFiles(t *testing.T) {
	var all strings.Builder
	for _, w := range wrongs {
		in := w.text()
		s, err := Parse([]byte(in), FileName)
		var problems Problems
		if s != nil || !errors.As(err, &problems) || len(problems) == 0 {
			t.Errorf("%s: nothing wrong was found, or not reported as problems: %v", w.name, err)
			continue
		}
		all.WriteString("== " + w.name + "\n" + excerpt(in) + err.Error() + "\n\n")
	}
	golden(t, "wrong.golden", all.String())
}

// excerpt gives the lines of a file that are not those of base.
func excerpt(in string) string {
	var out strings.Builder
	for _, line := range strings.SplitAfter(in, "\n") {
		if !strings.Contains(base, line) {
			out.WriteString("    " + line)
		}
	}
	return out.String()
}

// golden compares with a file in testdata; -update writes it.
func golden(t *testing.T, name, got string) {
	t.Helper()
	path := filepath.Join("testdata", name)
	if *update {
		if err := os.WriteFile(path, []byte(got), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if got == string(want) {
		return
	}
	g, w := strings.Split(got, "\n"), strings.Split(string(want), "\n")
	for i := range min(len(g), len(w)) {
		if g[i] != w[i] {
			t.Fatalf("%s, line %d:\ngot  %s\nwant %s", path, i+1, g[i], w[i])
		}
	}
	t.Fatalf("%s has %d lines, got %d", path, len(w), len(g))
}

// goWords are words that only a programmer would understand.
var goWords = regexp.MustCompile(`float64|int64|map\[|struct|unmarshal|unmarshall|toml:|unstable|nil\b`)

func TestMessagesShowNoTypes(t *testing.T) {
	for _, w := range wrongs {
		if _, err := Parse([]byte(w.text()), "s"); goWords.MatchString(err.Error()) {
			t.Errorf("%s: %v", w.name, err)
		}
	}
}

func TestUnreadableText(t *testing.T) {
	for _, c := range []struct{ name, in, want string }{
		{"UTF-16", "\xff\xfe[\x00a\x00", "s.toml:1:1: the file is UTF-16 text: save it as UTF-8"},
		{"Latin-1", base + "# \xb5m\n", "s.toml:12:3: the file is not UTF-8 text here: save it as UTF-8"},
		{"large", strings.Repeat("#\n", maxSize), "s.toml:1:1: the file is larger than 256 kB: this is no settings file"},
	} {
		if _, err := Parse([]byte(c.in), "s.toml"); err == nil || err.Error() != c.want {
			t.Errorf("%s: got %v, want %s", c.name, err, c.want)
		}
	}
}

func TestManyProblemsAreCut(t *testing.T) {
	_, err := Parse([]byte(base+strings.Repeat("wobble = 1\n", 100)), "s.toml")
	lines := strings.Split(err.Error(), "\n")
	if len(lines) != maxShown+1 || lines[maxShown] != "s.toml: and 60 more" {
		t.Errorf("%d lines, the last %q", len(lines), lines[len(lines)-1])
	}
}
