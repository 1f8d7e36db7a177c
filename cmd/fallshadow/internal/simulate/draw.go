package simulate

import (
	"bytes"
	"fmt"
	"math"
	"strings"

	"fallshadow/imageio/fits"
	"fallshadow/imageio/synth"
)

// Draw returns the frames of shot i, counted from 0, and what they show. It depends on
// the scenario, the settings and i alone, so that shots may be drawn in any order and
// from several goroutines.
func (n *Night) Draw(i int) (synth.Frames, Truth, error) {
	scene, t, err := n.sceneOf(i)
	if err != nil {
		return synth.Frames{}, t, err
	}
	frames, err := scene.Draw(n.sensor, n.Scenario.frameRandom(i))
	if err != nil {
		return frames, t, fmt.Errorf("shot %s: %w", t.Shot, err)
	}
	return spoil(frames, t.Damage, n.sensor.FullScale), t, nil
}

// Expect returns the frames of shot i as the camera would count them on average, in
// electrons above the dark.
func (n *Night) Expect(i int) (synth.Expected, Truth, error) {
	scene, t, err := n.sceneOf(i)
	if err != nil {
		return synth.Expected{}, t, err
	}
	e, err := scene.Expect(n.Scenario.frameRandom(i))
	return e, t, err
}

// sceneOf puts the cloud of shot i before the camera.
func (n *Night) sceneOf(i int) (synth.Scene, Truth, error) {
	scene := n.scene
	t, err := n.Truth(i)
	if err != nil {
		return scene, t, err
	}
	c, err := layOut(&t, n.Scenario, n.machine)
	if err != nil {
		return scene, t, fmt.Errorf("shot %s: %w", t.Shot, err)
	}
	scene.Cloud = c.density(t, n.machine)
	return scene, t, nil
}

// file is one file of a night, its path relative to the night's folder.
type file struct {
	path string
	data []byte
}

// files returns the files of shot i in the layout of the settings.
func (n *Night) files(i int) ([]file, Truth, error) {
	frames, t, err := n.Draw(i)
	if err != nil || t.Damage == absent {
		return nil, t, err
	}
	planes := n.planes(frames, i)
	shots := n.Settings.Shots
	paths := []string{t.Shot + ".fits"}
	groups := [][][]uint16{planes}
	if shots.Layout == "files" {
		paths, groups = nil, nil
		for k, p := range planes {
			paths = append(paths, framePath(t.Shot, shots.Suffixes[k]))
			groups = append(groups, [][]uint16{p})
		}
	}
	if t.Damage == missingFrame {
		paths, groups = drop(paths, groups)
	}
	rng := n.Scenario.cloudRandom(i)
	var list []file
	for k, path := range paths {
		var buf bytes.Buffer
		if err := fits.WriteCube(&buf, frames.Width, frames.Height, groups[k], n.cards(i, t)); err != nil {
			return nil, t, fmt.Errorf("shot %s: %w", t.Shot, err)
		}
		list = append(list, file{path, spoilFile(buf.Bytes(), t.Damage, rng)})
	}
	return list, t, nil
}

// planes puts the frames into the order of the settings.
func (n *Night) planes(f synth.Frames, i int) [][]uint16 {
	var planes [][]uint16
	for _, role := range n.Settings.Shots.Planes {
		switch role {
		case "atoms":
			planes = append(planes, f.Atoms)
		case "light":
			planes = append(planes, f.Light)
		case "dark":
			planes = append(planes, f.Dark)
		case "dark_of_light":
			second := n.sensor.Expose(nil, n.Scenario.secondDarkRandom(i))
			planes = append(planes, second[:len(f.Dark)])
		}
	}
	return planes
}

// framePath puts a suffix behind the name of a shot; one that ends in / is a folder.
func framePath(shot, suffix string) string {
	if strings.HasSuffix(suffix, "/") {
		return suffix + shot + ".fits"
	}
	return shot + suffix + ".fits"
}

// drop leaves out the last frame: of the one cube, or as a file.
func drop(paths []string, groups [][][]uint16) ([]string, [][][]uint16) {
	if len(paths) > 1 {
		return paths[:len(paths)-1], groups
	}
	return paths, [][][]uint16{groups[0][:len(groups[0])-1]}
}

// cards are the header of a shot.
func (n *Night) cards(i int, t Truth) []fits.Card {
	cards := []fits.Card{
		{Key: "SIMULATE", Value: "T", Comment: "simulated frames, no measurement"},
		fits.Integer("SHOT", i+1, "number of the shot"),
	}
	if f := n.Settings.Clock; f.From != "" {
		unit := map[string]float64{"ms": 1e-3, "us": 1e-6, "s": 1}[f.Unit]
		clock := t.Flight - f.ZeroMs.Value*1e-3
		cards = append(cards, fits.Number(strings.ToUpper(f.From), tidy(clock/unit), "["+f.Unit+"] time of flight"))
	}
	if scan := n.Settings.Shots.Scan; len(scan) > 0 {
		cards = append(cards, fits.Number(strings.ToUpper(scan[0]), tidy(t.Scan), "scan variable"))
	}
	return cards
}

// tidy takes the rounding of unit conversions off a number.
func tidy(v float64) float64 { return math.Round(v*1e9) / 1e9 }
