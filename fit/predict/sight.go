package predict

import (
	"context"
	"fmt"
	"math"

	"fallshadow/fit/bound"
	"fallshadow/model"
)

// Sight is the picture of a plan after a flight.
type Sight struct {
	Flight float64    // s
	Width  [2]float64 // rms of the thermal part in the picture, m, along its principal axes named after trap axes 1 and 2
	Radius [2]float64 // of the condensate, likewise; of a gaussian one its rms; NaN without one
	// Depth is σ0 n over alpha(1 + 4δ²) at the centre, what a weak probe shows as ln(I0/I);
	// Shown is what the counts show, with saturation and stray light. Neither is blurred.
	Depth, Shown float64
	// Reach is the half extent over columns and rows, m: twice the rms of the thermal part or
	// the radius of the condensate.
	Reach  [2]float64
	Errors bound.Errors // of a fit that reaches the bound; zero where Measure was not asked
}

// See returns the picture after a flight in s.
func (p *Plan) See(g *Gas, flight float64) (Sight, error) {
	s := Sight{Flight: flight, Radius: [2]float64{math.NaN(), math.NaN()}, Width: [2]float64{math.NaN(), math.NaN()}}
	e := &p.Experiment
	column := 0.0
	if g.Thermal > 0 {
		b, err := model.ExpandThermal(e.Trap, flight, e.Release)
		if err != nil {
			return s, fmt.Errorf("predict the thermal part: %w", err)
		}
		shape := e.View.Project(model.ThermalVariances(p.T, e.Species.Mass, e.Trap, b))
		column += model.ThermalPeakColumn(g.Thermal, g.Alpha, shape)
		s.Width = p.sizes(shape)
		s.reach(shape.Scale(4))
	}
	if g.Condensate > 0 {
		c, err := p.condensate(g, flight, &s)
		if err != nil {
			return s, fmt.Errorf("predict the condensate: %w", err)
		}
		column += c
	}
	p.deepen(&s, column*e.Species.Sigma0())
	return s, nil
}

// condensate fills in its sizes and returns its column density at the centre.
func (p *Plan) condensate(g *Gas, flight float64, s *Sight) (float64, error) {
	e := &p.Experiment
	m, a := e.Species.Mass, e.Species.ScatteringLength
	if a > 0 {
		b, err := model.ExpandCondensate(e.Trap, flight, e.Release)
		if err != nil {
			return 0, err
		}
		shape := e.View.Project(model.RadiiSquared(g.Mu, m, e.Trap, b))
		s.Radius = p.sizes(shape)
		s.reach(shape)
		return model.CondensatePeakColumn(g.Condensate, shape), nil
	}
	w, err := model.VariationalWidths(g.Condensate, m, a, e.Trap)
	if err != nil {
		return 0, err
	}
	b, err := model.ExpandGaussian(g.Condensate, m, a, e.Trap, flight, e.Release)
	if err != nil {
		return 0, err
	}
	shape := e.View.Project(model.GaussianVariances(w, b))
	s.Radius = p.sizes(shape)
	s.reach(shape.Scale(4))
	return model.GaussianColumn(g.Condensate, shape, 0, 0), nil
}

// sizes returns the roots of the principal squares, the first along what is seen of axis 1.
func (p *Plan) sizes(s model.Shape) [2]float64 {
	v := &p.Experiment.View
	first, second, _ := s.Principal(math.Atan2(v[1][0], v[0][0]))
	return [2]float64{math.Sqrt(first), math.Sqrt(second)}
}

// reach widens the half extents to those of an ellipse.
func (s *Sight) reach(shape model.Shape) {
	s.Reach[0] = math.Max(s.Reach[0], math.Sqrt(shape.XX))
	s.Reach[1] = math.Max(s.Reach[1], math.Sqrt(shape.YY))
}

// deepen fills in the depths that σ0 n at the centre has.
func (p *Plan) deepen(s *Sight, density float64) {
	o := &p.Experiment.Optics
	s.Depth = density / (o.Alpha * (1 + 4*o.Detuning*o.Detuning))
	law := model.Law{Alpha: o.Alpha, Detuning: o.Detuning, Stray: o.Stray}
	s.Shown = -math.Log(law.Transmit(density, p.Saturation()))
}

// Saturation returns I/Isat of the probe at the centre of the cloud, 0 for a weak one.
func (p *Plan) Saturation() float64 {
	e := &p.Experiment
	if math.IsInf(e.Optics.Saturation, 1) || e.Light == nil {
		return 0
	}
	return e.Light(e.X, e.Y) * (1 - e.Optics.Stray) / e.Optics.Saturation
}

// Measure fills in the errors of a fit that reaches the Cramer-Rao bound.
func (p *Plan) Measure(ctx context.Context, g *Gas, s *Sight) error {
	e := p.Experiment
	e.Flight = s.Flight
	var err error
	s.Errors, err = bound.Bound(ctx, e, bound.Cloud{T: p.T, ThermalAtoms: g.Thermal, CondensateAtoms: g.Condensate, Mu: g.Mu, Alpha: g.Alpha})
	if err != nil {
		return fmt.Errorf("predict the errors after %g ms: %w", s.Flight*1e3, err)
	}
	return nil
}

// Inside says that the picture holds the cloud to twice its rms.
func (p *Plan) Inside(s *Sight) bool {
	e := &p.Experiment
	left, up := math.Min(e.X, float64(e.Width-1)-e.X), math.Min(e.Y, float64(e.Height-1)-e.Y)
	return s.Reach[0] <= left*e.Optics.Pixel && s.Reach[1] <= up*e.Optics.Pixel
}

// First returns the shortest flight between from and to, to a thousandth, from which on
// want holds; NaN where it does not hold at to. want must not fail again once it holds.
func (p *Plan) First(g *Gas, from, to float64, want func(*Sight) bool) (float64, error) {
	holds := func(flight float64) (bool, error) {
		s, err := p.See(g, flight)
		return err == nil && want(&s), err
	}
	ok, err := holds(to)
	if err != nil || !ok {
		return math.NaN(), err
	}
	for to-from > 1e-3*to {
		middle := (from + to) / 2
		if ok, err = holds(middle); err != nil {
			return math.NaN(), err
		}
		if ok {
			to = middle
		} else {
			from = middle
		}
	}
	return to, nil
}
