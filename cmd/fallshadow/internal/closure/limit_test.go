package closure

import (
	"context"
	"math"

	"fallshadow/fit/bound"
	"fallshadow/imageio"
)

// limit holds the Cramer-Rao bounds of a shot in the quantities' own units.
type limit = bound.Errors

// limitOf returns the bound of shot i: the laboratory that drew it, the mean light of its own
// frame, and the noise of the exposure that was fitted, so that a reference made of many
// light frames counts as the better one that it is.
func limitOf(ctx context.Context, d *drawn, i int, noise imageio.Noise) (limit, error) {
	lab, err := d.Settings.Lab()
	if err != nil {
		return limit{}, err
	}
	seen, truth, err := d.Expect(i)
	if err != nil {
		return limit{}, err
	}
	e := bound.Experiment{
		Species: lab.Species, Trap: lab.Trap, View: lab.View, Release: lab.Release,
		Flight: truth.Flight, Optics: bound.Optics(lab.Optics),
		Width: seen.Width, Height: seen.Height, X: truth.X, Y: truth.Y,
		Light: func(x, y float64) float64 { return seen.Light[int(y)*seen.Width+int(x)] },
		Noise: bound.Noise(noise),
	}
	c := bound.Cloud{T: truth.T, ThermalAtoms: truth.Thermal, CondensateAtoms: truth.N0, Mu: truth.Mu, Alpha: truth.Alpha}
	if truth.N == 0 || math.IsNaN(truth.T) {
		return limit{}, nil
	}
	return bound.Bound(ctx, e, c)
}
