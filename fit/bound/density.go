package bound

import (
	"context"
	"fmt"
	"math"

	"fallshadow/model"
	"fallshadow/model/bose"
)

// painter draws the column density of an experiment's clouds.
type painter struct {
	*Experiment
	thermal, condensate [3]float64 // factors of expansion along the trap axes
}

func newPainter(e *Experiment) (p painter, err error) {
	p.Experiment = e
	if p.thermal, err = model.ExpandThermal(e.Trap, e.Flight, e.Release); err != nil {
		return p, fmt.Errorf("expand the thermal part: %w", err)
	}
	if e.attractive() {
		return p, nil
	}
	if p.condensate, err = model.ExpandCondensate(e.Trap, e.Flight, e.Release); err != nil {
		return p, fmt.Errorf("expand the condensate: %w", err)
	}
	return p, nil
}

// density writes σ0 n, sampled at the centres of the pixels, to dst. It returns ctx's error,
// or that of an attractive condensate which cannot exist.
func (p *painter) density(ctx context.Context, q *values, dst []float64) error {
	if err := ctx.Err(); err != nil {
		return err
	}
	clear(dst)
	if q[Thermal] != 0 {
		p.addThermal(q, dst)
	}
	switch {
	case q[Condensate] == 0:
	case p.attractive():
		return p.addGaussian(q, dst)
	default:
		p.addThomasFermi(q, dst)
	}
	return nil
}

func (p *painter) addThermal(q *values, dst []float64) {
	s := p.View.Project(model.ThermalVariances(q[T], p.Species.Mass, p.Trap, p.thermal))
	peak := model.ThermalPeakColumn(q[Thermal], q[Alpha], s) / bose.G2(q[Alpha])
	p.add(q, s, peak, dst, func(u float64) float64 { return bose.G2(q[Alpha] + u/2) })
}

func (p *painter) addThomasFermi(q *values, dst []float64) {
	s := p.View.Project(model.RadiiSquared(q[Mu], p.Species.Mass, p.Trap, p.condensate))
	p.add(q, s, model.CondensatePeakColumn(q[Condensate], s), dst, func(u float64) float64 {
		inside := math.Max(0, 1-u)
		return inside * math.Sqrt(inside)
	})
}

// addGaussian adds the condensate of an attractive gas: the gaussian of the variational width.
func (p *painter) addGaussian(q *values, dst []float64) error {
	n0, m, a := q[Condensate], p.Species.Mass, p.Species.ScatteringLength
	w, err := model.VariationalWidths(n0, m, a, p.Trap)
	if err != nil {
		return fmt.Errorf("condensate of %.4g atoms: %w", n0, err)
	}
	b, err := model.ExpandGaussian(n0, m, a, p.Trap, p.Flight, p.Release)
	if err != nil {
		return fmt.Errorf("expand the condensate: %w", err)
	}
	s := p.View.Project(model.GaussianVariances(w, b))
	p.add(q, s, n0/(2*math.Pi*math.Sqrt(s.Det())), dst, func(u float64) float64 { return math.Exp(-u / 2) })
	return nil
}

// faint is the square distance rᵀS⁻¹r beyond which a part is left out: e⁻³⁰ of its peak.
const faint = 60

// add adds σ0 peak profile(rᵀS⁻¹r) of a part of shape s (m²).
func (p *painter) add(q *values, s model.Shape, peak float64, dst []float64, profile func(u float64) float64) {
	px := p.Optics.Pixel
	inv := s.Turn(q[Angle]).Scale(1 / (px * px)).Inverse()
	peak *= p.Species.Sigma0()
	for j := range p.Height {
		y := float64(j) - q[Y]
		row := dst[j*p.Width : (j+1)*p.Width]
		for i := range row {
			x := float64(i) - q[X]
			if u := inv.XX*x*x + 2*inv.XY*x*y + inv.YY*y*y; u < faint {
				row[i] += peak * profile(u)
			}
		}
	}
}
