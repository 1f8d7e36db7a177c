// Package settings reads what a laboratory says of its machine: one TOML file a night,
// every key defined once in a table (keys.go) that also makes the defaults, the checks,
// the template and the documentation. A file with anything wrong in it is refused with
// all of its problems at once.
package settings

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
)

// FileName is the name under which a night's folder holds its settings.
const FileName = "fallshadow.toml"

// maxSize bounds a settings file, bytes.
const maxSize = 256 << 10

// Quantity is a calibrated setting in the unit of its key. Given is false where the file
// leaves it to the default; Known is false where nobody stated the uncertainty. Known
// with Err 0 means exact.
type Quantity struct {
	Value, Err   float64
	Given, Known bool
}

// Number is a setting without an uncertainty that need not be there.
type Number struct {
	Value float64
	Given bool
}

// Settings are the effective settings of a night: parsed, checked, defaults filled in.
// Every field is in the unit of the key that its name repeats.
type Settings struct {
	Atom   Atom
	Trap   Trap
	Camera Camera
	Probe  Probe
	Clock  Clock
	Shots  Shots
	Region Region
	Fit    Fit

	measured bool // the gain, which the file leaves out
}

// Atom is the atom and its imaging line. The four numbers hold the species' own where
// the file does not give them.
type Atom struct {
	Species, State     string
	MassU              Number
	WavelengthNm       Number
	LinewidthMHz       Number
	ScatteringLengthA0 Quantity // Bohr radii
}

// Trap is the harmonic trap, its orientation and how it is switched off.
type Trap struct {
	Axis1Hz, Axis2Hz, SightHz Quantity
	AngleDeg, TiltDeg         Quantity
	TiltAboutDeg              float64
	Release                   string // "sudden", "linear" or "exponential"
	ReleaseMs                 float64
}

// Camera is the sensor and the optics in front of it. A number that is not Given is to be
// measured from the night: the runner fills it into its own copy.
type Camera struct {
	PixelUm           Quantity
	Binning           int
	Magnification     Quantity
	ElectronsPerCount Number
	ReadNoise         Number   // rms electrons
	FullScale         Number   // counts
	BadPixels         [][2]int // x, y, sorted by row, then column, each once
	ResolutionUm      Quantity // rms in the object plane
}

// Probe is the light of the imaging pulse and how atoms take it.
type Probe struct {
	Alpha         Quantity
	DetuningGamma Quantity
	CountsPerIsat Quantity // not Given: a weak probe
	ExposureUs    Number
	StrayFraction Quantity
}

// Clock says where a shot's time of flight comes from: one of FixedMs and From.
type Clock struct {
	FixedMs Number
	From    string // a name in the shot's metadata
	Unit    string // "ms", "us" or "s", of the metadata
	ZeroMs  Quantity
}

// Shots says what makes a shot.
type Shots struct {
	Layout      string // "cube", "extensions", "files" or "density"
	Planes      []string
	Suffixes    []string // beside Planes, for layout "files"
	Pattern     string
	DarkFiles   []string
	SideTable   string
	SideKey     string
	Scan        []string
	DensityUnit string // "log_ratio", "sigma0_n" or "atoms_per_pixel"
}

// Region is the part of the picture that is fitted, in saved pixels; Width 0 lets the
// program find it.
type Region struct{ X, Y, Width, Height int }

// Auto reports whether the region is left to the program.
func (r Region) Auto() bool { return r.Width == 0 }

// Fit is what a user may choose of the fit.
type Fit struct {
	Thermal        string // "bose", "gauss" or "semi-ideal"
	Tie            string // "tied" or "free"
	Angle          string // "fixed" or "free"
	Fugacity       string // "model", "free" or "number"
	Errors         string // "stated" or "scaled"
	CondensateChi2 Number
	Rebin          int    // 1, 2 or 4
	Reference      string // "auto", "own" or "basis"
	BasisSize      int
}

// typed is a path as it can be put into a command line.
func typed(path string) string {
	if strings.ContainsAny(path, " &()") {
		return `"` + path + `"`
	}
	return path
}

// Find returns the path of the settings in a night's folder.
func Find(nightDir string) (string, error) {
	path := filepath.Join(nightDir, FileName)
	info, err := os.Stat(path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return "", fmt.Errorf("no %s in %s: write one with `fallshadow init --write %s`, or name another with --settings",
			FileName, nightDir, typed(path))
	case err != nil:
		return "", fmt.Errorf("look for settings: %w", err)
	case info.IsDir():
		return "", fmt.Errorf("%s is a folder: the settings are a file", path)
	}
	return path, nil
}

// Load reads and checks a settings file; see Parse.
func Load(path string) (*Settings, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, fmt.Errorf("read settings: %w", err)
	}
	defer f.Close()
	data, err := io.ReadAll(io.LimitReader(f, maxSize+1))
	if err != nil {
		return nil, fmt.Errorf("read settings %s: %w", path, err)
	}
	return Parse(data, path)
}

// Parse checks settings in TOML; name stands in the messages. The error, where there is
// one, is a Problems with everything that is wrong, and no settings are returned.
func Parse(data []byte, name string) (*Settings, error) {
	doc := newDocument(name, data)
	if !doc.readable() {
		return nil, doc.report()
	}
	s := defaults()
	b := newBinder(doc, s)
	b.bind(doc.read())
	b.require()
	b.check()
	doc.confirm()
	if len(doc.problems) > 0 {
		return nil, doc.report()
	}
	return s, nil
}
