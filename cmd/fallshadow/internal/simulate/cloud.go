package simulate

import (
	"math"

	"fallshadow/imageio/synth"
	"fallshadow/model"
)

// cloud is the column density of a shot in 1/m² at an offset in m from its centre.
type cloud struct {
	thermal, condensate func(x, y float64) float64
}

func (c cloud) at(x, y float64) float64 { return c.thermal(x, y) + c.condensate(x, y) }

// layOut returns the parts of a shot after its flight and writes their sizes and the peak
// density into t.
func layOut(t *Truth, s Scenario, m machine) (c cloud, err error) {
	if t.N == 0 {
		return cloud{nothing, nothing}, nil
	}
	b, err := model.ExpandThermal(m.trap, t.Flight, m.release)
	if err != nil {
		return c, err
	}
	shape := m.view.Project(model.ThermalVariances(t.T, m.species.Mass, m.trap, b))
	t.Width = axes(shape, m.angle)
	number, alpha := t.Thermal, t.Alpha
	c.thermal = func(x, y float64) float64 { return model.ThermalColumn(number, alpha, shape, x, y) }
	if t.T == 0 {
		c.thermal = nothing
	}
	if c.condensate, err = condensate(t, m); err != nil {
		return c, err
	}
	if s.Gas.Law == "semi-ideal" && t.N0 > 0 {
		c.thermal, err = pushedOut(t, s.Picture, m)
	}
	t.PeakOD = m.species.Sigma0() * c.at(0, 0)
	return c, err
}

func nothing(x, y float64) float64 { return 0 }

// condensate returns the column of the condensate: Thomas-Fermi, or gaussian of the
// variational width where the gas does not repel.
func condensate(t *Truth, m machine) (func(x, y float64) float64, error) {
	n0, mass, a := t.N0, m.species.Mass, m.species.ScatteringLength
	t.Radius = [2]float64{math.NaN(), math.NaN()}
	if n0 == 0 {
		return nothing, nil
	}
	if a > 0 {
		b, err := model.ExpandCondensate(m.trap, t.Flight, m.release)
		shape := m.view.Project(model.RadiiSquared(t.Mu, mass, m.trap, b))
		t.Radius = axes(shape, m.angle)
		return func(x, y float64) float64 { return model.CondensateColumn(n0, shape, x, y) }, err
	}
	w, err := model.VariationalWidths(n0, mass, a, m.trap)
	if err != nil {
		return nil, err
	}
	b, err := model.ExpandGaussian(n0, mass, a, m.trap, t.Flight, m.release)
	shape := m.view.Project(model.GaussianVariances(w, b))
	return func(x, y float64) float64 { return model.GaussianColumn(n0, shape, x, y) }, err
}

// axes returns the half-axes of a shape, named after the trap axis nearest to each.
func axes(s model.Shape, angle float64) [2]float64 {
	first, second, _ := s.Principal(angle)
	return [2]float64{math.Sqrt(first), math.Sqrt(second)}
}

// density returns the cloud as the renderer takes it, σ0 n over pixels.
func (c cloud) density(t Truth, m machine) synth.Cloud {
	sigma := m.species.Sigma0()
	return func(x, y float64) float64 {
		return sigma * c.at((x-t.X)*m.pixel, (y-t.Y)*m.pixel)
	}
}
