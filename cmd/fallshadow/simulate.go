package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"runtime"
	"text/tabwriter"

	"fallshadow/cmd/fallshadow/internal/simulate"
)

// simulateCmd writes a night of raw shots whose truth is known.
type simulateCmd struct {
	Folder   string     `arg:"" optional:"" help:"New folder for the night."`
	Preset   string     `default:"demo" help:"Scenario that comes with the program, with the settings of its laboratory; --list names them."`
	Scenario string     `placeholder:"FILE" help:"Scenario of your own instead of the preset's, such as the simulated.toml of a simulated night."`
	Settings string     `placeholder:"FILE" help:"Settings of your own laboratory instead of the preset's; FITS is written, in layout cube or files, with a dark frame for each shot."`
	Shots    atLeastOne `placeholder:"N" help:"Number of shots instead of the scenario's."`
	Seed     *uint64    `help:"Seed instead of the scenario's. The same seed gives the same bytes."`
	List     bool       `help:"List the presets and stop."`
}

// Run draws the night, or lists the presets on out.
func (c *simulateCmd) Run(ctx context.Context, out io.Writer) error {
	if c.List {
		return listPresets(out)
	}
	if c.Folder == "" {
		return errors.New("simulate: name a new folder for the night")
	}
	night, err := c.night()
	if err != nil {
		return err
	}
	if err := night.Write(ctx, c.Folder, runtime.GOMAXPROCS(0), nil); err != nil {
		return err
	}
	lab := ""
	if c.Settings != "" {
		lab = ", drawn with the atom, trap and camera of " + c.Settings
	}
	_, err = fmt.Fprintf(out, "%d simulated shots in %s: %s%s\nwhat they show: %s\n",
		night.Scenario.Shots, c.Folder, night.Scenario.About, lab, simulate.TruthFile)
	return err
}

// night puts scenario and settings together from preset, files and options.
func (c *simulateCmd) night() (*simulate.Night, error) {
	scenario, lab, err := simulate.Preset(c.Preset)
	if err != nil {
		return nil, err
	}
	name := "of preset " + c.Preset
	if c.Scenario != "" {
		data, err := os.ReadFile(c.Scenario)
		if err != nil {
			return nil, fmt.Errorf("read scenario: %w", err)
		}
		if scenario, err = simulate.Parse(data, c.Scenario); err != nil {
			return nil, err
		}
	}
	if c.Settings != "" {
		name = c.Settings
		if lab, err = os.ReadFile(c.Settings); err != nil {
			return nil, fmt.Errorf("read settings: %w", err)
		}
	}
	if c.Shots != 0 {
		scenario = scenario.WithShots(int(c.Shots))
	}
	if c.Seed != nil {
		scenario.Seed = *c.Seed
	}
	return simulate.New(scenario, lab, name)
}

func listPresets(out io.Writer) error {
	list, err := simulate.Presets()
	if err != nil {
		return err
	}
	w := tabwriter.NewWriter(out, 0, 0, 2, ' ', 0)
	for _, p := range list {
		fmt.Fprintf(w, "%s\t%d shots\t%s\n", p.Preset, p.Scenario.Shots, p.Scenario.About)
	}
	return w.Flush()
}
