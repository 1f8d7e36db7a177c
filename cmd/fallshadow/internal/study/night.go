// Package study takes the rows of a ledger as one experiment: it selects them, hands them
// to package fit/curve as points, and words, tabulates and draws what comes back.
package study

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/fit"
	"fallshadow/fit/curve"
)

// Night is a night as its ledger and its settings have it.
type Night struct {
	Name     string // of its folder
	Dir      string // folder of the results
	Root     string // absolute path of the folder with the shots when they were fitted
	Rows     []ledger.Row
	Settings *settings.Settings
	lab      fit.Lab
}

// Load reads the ledger of the night in the folder dir. out is the folder of its results,
// empty for the usual one. Rows that do not belong to the settings are marked stale.
func Load(ctx context.Context, dir, out string, s *settings.Settings) (*Night, error) {
	if out == "" {
		var err error
		if out, err = night.Results(dir); err != nil {
			return nil, err
		}
	}
	r, err := ledger.OpenReader(ctx, out)
	if err != nil {
		return nil, err
	}
	n, err := read(ctx, r, s)
	if err := errors.Join(err, r.Close()); err != nil {
		return nil, err
	}
	abs, err := filepath.Abs(dir)
	if err != nil {
		return nil, fmt.Errorf("find the night %s: %w", dir, err)
	}
	n.Name, n.Dir = filepath.Base(abs), out
	return n, nil
}

func read(ctx context.Context, r *ledger.Reader, s *settings.Settings) (*Night, error) {
	n := &Night{Settings: s}
	var err error
	if n.lab, err = labOf(s); err != nil {
		return nil, err
	}
	if n.Root, err = r.Night(ctx); err != nil {
		return nil, err
	}
	if n.Rows, err = r.Rows(ctx); err != nil {
		return nil, err
	}
	regions, err := r.Regions(ctx)
	if err != nil {
		return nil, err
	}
	night.MarkStale(n.Rows, s, regions)
	return n, nil
}

// labOf returns the laboratory for what does not hang on the gain of the camera, which may
// be left to be measured.
func labOf(s *settings.Settings) (fit.Lab, error) {
	c := *s
	if !c.Camera.ElectronsPerCount.Given {
		c.Camera.ElectronsPerCount = settings.Number{Value: 1, Given: true}
	}
	return c.Lab()
}

// Gas returns the gas of a laboratory.
func Gas(lab *fit.Lab) curve.Gas {
	return curve.Gas{Mass: lab.Species.Mass, ScatteringLength: lab.Species.ScatteringLength, Trap: lab.Trap, Release: lab.Release}
}
