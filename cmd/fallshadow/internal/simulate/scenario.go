// Package simulate draws a night of raw shots whose truth is known: the machine is the
// one that a laboratory's settings describe, the night what a scenario says beyond them.
// Clouds come from the exact functions of package model, or from quadrature of its own,
// so that fitting such a night tests the fit.
package simulate

import (
	"bytes"
	"errors"
	"fmt"
	"maps"
	"math"
	"regexp"
	"slices"

	"github.com/pelletier/go-toml/v2"
)

// Scenario is a night as far as the settings of the laboratory do not describe it. The
// unit stands in the name of a key; px are saved pixels, the centre of the first at (0,0).
type Scenario struct {
	Name  string `toml:"name" comment:"Start of the names of the shots."`
	About string `toml:"about" comment:"What this night is for."`
	Seed  uint64 `toml:"seed" comment:"The same seed gives the same bytes."`
	Shots int    `toml:"shots"`

	Gas     Gas     `toml:"gas"`
	Path    Path    `toml:"path" comment:"From the first to the last shot."`
	Flight  Flight  `toml:"flight"`
	Picture Picture `toml:"picture"`
	Camera  Camera  `toml:"camera" comment:"Beyond the settings."`
	Probe   Probe   `toml:"probe" comment:"Beyond the settings."`
	Fringes Fringes `toml:"fringes"`
	Damage  Damage  `toml:"damage" comment:"Numbers of the shots to break, from 1."`
}

// Gas chooses how many atoms condense.
type Gas struct {
	Law string `toml:"law" comment:"ideal: 1-t^3. finite: with the finite-size correction. semi-ideal: thermal atoms feel the condensate."`
}

// Path is how number and temperature go through the night: the number in equal ratios,
// T/Tc0 (of the shot's own number) or T in equal steps.
type Path struct {
	Atoms       [2]float64 `toml:"atoms" comment:"Mean number in the first and the last shot."`
	AtomsJitter float64    `toml:"atoms_jitter" comment:"Relative rms from shot to shot."`
	TReduced    [2]float64 `toml:"t_reduced" comment:"T/Tc0 in the first and the last shot; or T_nK."`
	TnK         [2]float64 `toml:"T_nK"`
	Scan        [2]float64 `toml:"scan" comment:"First and last value of the scan variable that the settings name."`
}

// Flight is the time of flight, the settings' zero_ms included.
type Flight struct {
	Ms []float64 `toml:"ms" comment:"Taken in turn by the shots; not used where the settings fix the flight."`
}

// Picture is the frame and where the cloud stands in it.
type Picture struct {
	Width       int     `toml:"width_px"`
	Height      int     `toml:"height_px"`
	X           float64 `toml:"x_px" comment:"Mean centre of the cloud."`
	Y           float64 `toml:"y_px"`
	Jitter      float64 `toml:"jitter_px" comment:"Rms of the centre, each way."`
	Granularity bool    `toml:"whole_atoms" comment:"Draw whole atoms, not their smooth mean."`
}

// Camera completes the camera of the settings.
type Camera struct {
	OffsetCounts      float64 `toml:"offset_counts"`
	PatternCounts     float64 `toml:"pattern_counts" comment:"Rms of the fixed pattern."`
	DarkElectrons     float64 `toml:"dark_electrons" comment:"Per exposure."`
	HotPixels         int     `toml:"hot_pixels"`
	HotElectrons      float64 `toml:"hot_electrons"`
	ElectronsPerCount float64 `toml:"electrons_per_count" comment:"Used where the settings leave it to be measured."`
	ReadNoise         float64 `toml:"read_noise_electrons" comment:"Likewise."`
}

// Probe completes the probe of the settings.
type Probe struct {
	Intensity  float64 `toml:"intensity_isat" comment:"I/Isat at the centre of the beam; or electrons."`
	Electrons  float64 `toml:"electrons" comment:"Per pixel, at the centre of the beam."`
	X          float64 `toml:"x_px" comment:"Centre of the beam."`
	Y          float64 `toml:"y_px"`
	Waist      float64 `toml:"waist_px" comment:"1/e^2 radius; 0 is a flat beam."`
	PowerNoise float64 `toml:"power_noise" comment:"Relative rms from frame to frame."`
	SlopeNoise float64 `toml:"slope_noise_per_px" comment:"Rms of the relative slope from frame to frame."`
}

// Fringes are plane waves on the probe, their directions, periods and phases drawn from
// the seed.
type Fringes struct {
	Count    int        `toml:"count"`
	Contrast float64    `toml:"contrast" comment:"Of each."`
	Period   [2]float64 `toml:"period_px" comment:"Shortest and longest."`
	Wander   float64    `toml:"wander_rad" comment:"Rms of the phases from shot to shot."`
	Jitter   float64    `toml:"jitter_rad" comment:"Rms of the phases between the frames of a shot."`
}

// Parse reads a scenario in TOML; name stands in the messages. Unknown keys are refused.
func Parse(data []byte, name string) (Scenario, error) {
	var s Scenario
	d := toml.NewDecoder(bytes.NewReader(data)).DisallowUnknownFields()
	if err := d.Decode(&s); err != nil {
		return s, fmt.Errorf("read scenario %s: %w", name, worded(err))
	}
	if err := s.check(); err != nil {
		return s, fmt.Errorf("scenario %s: %w", name, err)
	}
	return s, nil
}

// worded returns the decoder's account with line and excerpt where it has one.
func worded(err error) error {
	var unknown *toml.StrictMissingError
	var bad *toml.DecodeError
	switch {
	case errors.As(err, &unknown):
		return errors.New("unknown keys:\n" + unknown.String())
	case errors.As(err, &bad):
		return errors.New(bad.String())
	}
	return err
}

// TOML writes the scenario out in full, with what its keys mean.
func (s Scenario) TOML() ([]byte, error) { return toml.Marshal(s) }

// WithShots returns the scenario over another number of shots: the same path in other
// steps. Damage beyond the last shot is dropped.
func (s Scenario) WithShots(shots int) Scenario {
	s.Shots = shots
	s.Damage = maps.Clone(s.Damage)
	for kind, list := range s.Damage {
		s.Damage[kind] = slices.DeleteFunc(slices.Clone(list), func(shot int) bool { return shot > shots })
	}
	return s
}

// maxShots bounds a night.
const maxShots = 100000

var safeName = regexp.MustCompile(`^[a-z0-9][a-z0-9_-]{0,39}$`)

// check names the first figure that cannot be.
func (s Scenario) check() error {
	for _, v := range s.figures() {
		if math.IsNaN(v.value) || v.value < v.low || v.value > v.high {
			return fmt.Errorf("%s is %g; give %g to %g", v.name, v.value, v.low, v.high)
		}
	}
	switch {
	case !safeName.MatchString(s.Name):
		return fmt.Errorf("name %q; give lower-case letters, digits, - and _, at most 40", s.Name)
	case !slices.Contains([]string{"ideal", "finite", "semi-ideal"}, s.Gas.Law):
		return fmt.Errorf("gas.law %q; give ideal, finite or semi-ideal", s.Gas.Law)
	case (s.Path.TReduced != [2]float64{}) == (s.Path.TnK != [2]float64{}):
		return errors.New("give one of path.t_reduced and path.T_nK")
	case (s.Probe.Intensity > 0) == (s.Probe.Electrons > 0):
		return errors.New("give one of probe.intensity_isat and probe.electrons")
	case s.Fringes.Count > 0 && !(s.Fringes.Period[0] > 1 && s.Fringes.Period[1] >= s.Fringes.Period[0]):
		return fmt.Errorf("fringes.period_px is %v; give the shortest, above 1, and the longest", s.Fringes.Period)
	}
	return s.Damage.check(s.Shots)
}

type figure struct {
	name             string
	value, low, high float64
}

func (s Scenario) figures() []figure {
	big := 1e12
	list := []figure{
		{"shots", float64(s.Shots), 1, maxShots},
		{"path.atoms", min(s.Path.Atoms[0], s.Path.Atoms[1]), 1, big},
		{"path.atoms", max(s.Path.Atoms[0], s.Path.Atoms[1]), 1, big},
		{"path.atoms_jitter", s.Path.AtomsJitter, 0, 1},
		{"picture.width_px", float64(s.Picture.Width), 8, 8192},
		{"picture.height_px", float64(s.Picture.Height), 8, 8192},
		{"picture.x_px", s.Picture.X, -1e5, 1e5},
		{"picture.y_px", s.Picture.Y, -1e5, 1e5},
		{"picture.jitter_px", s.Picture.Jitter, 0, 1e4},
		{"camera.offset_counts", s.Camera.OffsetCounts, 0, 65535},
		{"camera.pattern_counts", s.Camera.PatternCounts, 0, 65535},
		{"camera.dark_electrons", s.Camera.DarkElectrons, 0, big},
		{"camera.hot_pixels", float64(s.Camera.HotPixels), 0, float64(s.Picture.Width * s.Picture.Height)},
		{"camera.hot_electrons", s.Camera.HotElectrons, 0, big},
		{"probe.waist_px", s.Probe.Waist, 0, 1e6},
		{"probe.power_noise", s.Probe.PowerNoise, 0, 0.5},
		{"probe.slope_noise_per_px", s.Probe.SlopeNoise, 0, 0.1},
		{"fringes.count", float64(s.Fringes.Count), 0, 50},
		{"fringes.contrast", s.Fringes.Contrast, 0, 0.99},
		{"fringes.wander_rad", s.Fringes.Wander, 0, 100},
		{"fringes.jitter_rad", s.Fringes.Jitter, 0, 100},
	}
	for i := range 2 {
		list = append(list,
			figure{"path.t_reduced", s.Path.TReduced[i], 0, 100},
			figure{"path.T_nK", s.Path.TnK[i], 0, 1e6})
	}
	for _, f := range s.Flight.Ms {
		list = append(list, figure{"flight.ms", f, 0, 1e4})
	}
	return list
}
