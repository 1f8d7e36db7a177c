package simulate

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/imageio/synth"
	"fallshadow/model"
)

// machine is the laboratory of the settings in SI units.
type machine struct {
	species model.Species
	trap    model.Trap
	view    model.Rotation
	angle   float64 // of axis 1 in the picture, rad
	release model.Release
	pixel   float64 // m in the object plane per saved pixel
}

// newMachine returns the laboratory of the settings before any rebinning of the fit, and
// the electrons per saved pixel at I = Isat.
func newMachine(s *settings.Settings) (m machine, saturation float64, err error) {
	lab, err := s.Lab()
	if err != nil {
		return m, 0, err
	}
	rebin := float64(s.Fit.Rebin)
	return machine{
		species: lab.Species,
		trap:    lab.Trap,
		view:    lab.View,
		angle:   s.Trap.AngleDeg.Value * math.Pi / 180,
		release: lab.Release,
		pixel:   lab.Optics.Pixel / rebin,
	}, lab.Optics.Saturation / (rebin * rebin), nil
}

// Night is a scenario at a laboratory, ready to be drawn. It is only read once made.
type Night struct {
	Scenario Scenario
	Settings *settings.Settings
	// SettingsText is the file that Settings were read from; it goes with the night.
	SettingsText []byte

	machine machine
	scene   synth.Scene // all but the cloud
	sensor  *synth.Sensor
}

// New puts a scenario and a laboratory together. It fails where the settings describe a
// layout that is not written here, or leave out what a picture needs.
func New(s Scenario, text []byte, name string) (*Night, error) {
	lab, err := settings.Parse(text, name)
	if err != nil {
		return nil, err
	}
	if err := s.check(); err != nil {
		return nil, fmt.Errorf("scenario %s: %w", s.Name, err)
	}
	n := &Night{Scenario: s, Settings: lab, SettingsText: text}
	if err := n.setUp(); err != nil {
		return nil, fmt.Errorf("simulate scenario %s with settings %s: %w", s.Name, name, err)
	}
	return n, nil
}

// setUp makes the machine, its camera and the scene without a cloud.
func (n *Night) setUp() error {
	if err := n.writable(); err != nil {
		return err
	}
	camera, err := n.camera()
	if err != nil {
		return err
	}
	known := *n.Settings
	known.Camera.ElectronsPerCount = settings.Number{Value: camera.ElectronsPerCount, Given: true}
	m, saturation, err := newMachine(&known)
	if err != nil {
		return err
	}
	n.machine = m
	if n.sensor, err = synth.NewSensor(camera, n.Scenario.Picture.Width, n.Scenario.Picture.Height); err != nil {
		return err
	}
	n.scene, err = n.stage(saturation)
	return err
}

func (n *Night) writable() error {
	shots := n.Settings.Shots
	switch {
	case shots.Layout != "cube" && shots.Layout != "files":
		return fmt.Errorf("layout %q is not written by simulate; take cube or files", shots.Layout)
	case !slices.Contains(shots.Planes, "dark"):
		return errors.New("simulate writes a dark frame with each shot; add dark to shots.planes")
	case shots.Layout == "files" && len(shots.Suffixes) != len(shots.Planes):
		return errors.New("give one of shots.suffixes for each of shots.planes")
	case n.Settings.Clock.From == "" && !n.Settings.Clock.FixedMs.Given:
		return errors.New("the settings say nothing of the flight")
	case !n.Settings.Clock.FixedMs.Given && len(n.Scenario.Flight.Ms) == 0:
		return errors.New("the scenario gives no flight.ms")
	}
	return n.readable()
}

func (n *Night) camera() (synth.Camera, error) {
	own, extra := n.Settings.Camera, n.Scenario.Camera
	c := synth.Camera{
		ElectronsPerCount: given(own.ElectronsPerCount, extra.ElectronsPerCount),
		ReadNoise:         given(own.ReadNoise, extra.ReadNoise),
		Offset:            extra.OffsetCounts,
		OffsetPattern:     extra.PatternCounts,
		DarkElectrons:     extra.DarkElectrons,
		FullScale:         int(min(given(own.FullScale, math.MaxUint16), math.MaxUint16)),
		Hot:               extra.HotPixels,
		HotElectrons:      extra.HotElectrons,
		Seed:              n.Scenario.Seed,
	}
	if c.ElectronsPerCount <= 0 {
		return c, errors.New("electrons_per_count is neither in the settings nor in the scenario's camera")
	}
	return c, nil
}

func given(n settings.Number, otherwise float64) float64 {
	if n.Given {
		return n.Value
	}
	return otherwise
}

// stage returns the scene without its cloud.
func (n *Night) stage(saturation float64) (synth.Scene, error) {
	probe, p := n.Settings.Probe, n.Scenario.Probe
	electrons := p.Electrons
	if p.Intensity > 0 {
		electrons = p.Intensity * saturation
	}
	if math.IsInf(electrons, 1) {
		return synth.Scene{}, errors.New("intensity_isat needs probe.counts_per_isat in the settings; give probe.electrons instead")
	}
	granularity := 0.0
	if n.Scenario.Picture.Granularity {
		granularity = n.machine.pixel * n.machine.pixel / n.machine.species.Sigma0()
	}
	return synth.Scene{
		Width: n.Scenario.Picture.Width, Height: n.Scenario.Picture.Height,
		Granularity: granularity,
		Law: synth.Law{
			Alpha: probe.Alpha.Value, Detuning: probe.DetuningGamma.Value,
			Saturation: saturation, Stray: probe.StrayFraction.Value,
		},
		Probe: synth.Probe{
			Electrons: electrons, X: p.X, Y: p.Y, Waist: p.Waist,
			PowerNoise: p.PowerNoise, SlopeNoise: p.SlopeNoise,
			Fringes: n.Scenario.waves(),
		},
		Blur: n.Settings.Camera.ResolutionUm.Value * 1e-6 / n.machine.pixel,
	}, nil
}
