package forecast

import (
	"fmt"
	"math"

	"fallshadow/cmd/fallshadow/internal/figure"
	"fallshadow/fit/predict"
)

// Plot draws sizes, peak optical density and errors against the flight.
func (f *Forecast) Plot() figure.Stack {
	x := figure.Axis{Label: figure.Plain("flight  (ms)"), Min: f.request.From * 1e3, Max: f.request.To * 1e3}
	return figure.Stack{f.sizes(x), f.depth(x), f.errors(x)}
}

// trace is a quantity along the flights, drawn as a curve.
func trace(sights []predict.Sight, legend string, role figure.Role, value func(*predict.Sight) float64) figure.Curve {
	c := figure.Curve{Legend: legend, Role: role}
	for i := range sights {
		c.X, c.Y = append(c.X, sights[i].Flight*1e3), append(c.Y, value(&sights[i]))
	}
	return c
}

// told keeps the curves that have a value.
func told(curves ...figure.Curve) (list []figure.Curve) {
	for _, c := range curves {
		if !math.IsNaN(c.Y[len(c.Y)-1]) {
			list = append(list, c)
		}
	}
	return list
}

func (f *Forecast) sizes(x figure.Axis) *figure.Figure {
	g := &figure.Figure{X: x, Y: figure.Axis{Label: figure.Plain("size  (µm)")}}
	g.Curves = told(
		trace(f.Smooth, "thermal rms, axis 1", figure.Law2, func(s *predict.Sight) float64 { return s.Width[0] * um }),
		trace(f.Smooth, "thermal rms, axis 2", figure.Law5, func(s *predict.Sight) float64 { return s.Width[1] * um }),
		trace(f.Smooth, f.condensateLegend()+", axis 1", figure.Law3, func(s *predict.Sight) float64 { return s.Radius[0] * um }),
		trace(f.Smooth, f.condensateLegend()+", axis 2", figure.Law4, func(s *predict.Sight) float64 { return s.Radius[1] * um }),
	)
	g.Y.Max = 1.25 * most(g.Curves)
	return g
}

func (f *Forecast) condensateLegend() string {
	if f.Plan.Experiment.Species.ScatteringLength > 0 {
		return "condensate radius"
	}
	return "condensate rms"
}

func (f *Forecast) depth(x figure.Axis) *figure.Figure {
	g := &figure.Figure{X: x, Y: figure.Axis{Label: figure.Plain("peak optical density"), Log: true}}
	g.Curves = told(
		trace(f.Smooth, "", figure.Law2, func(s *predict.Sight) float64 { return s.Depth }),
		trace(f.Smooth, "as counts show it", figure.Law1, func(s *predict.Sight) float64 { return s.Shown }),
	)
	g.Curves[0].Legend = "cloud"
	g.Lines = []figure.Line{{Role: figure.Law4, At: deep, Across: true}}
	g.Y.Min, g.Y.Max = math.Min(deep/2, least(g.Curves)/1.5), math.Max(2*deep, most(g.Curves)*1.5)
	g.Marks = []figure.Mark{{X: x.Min + 0.02*(x.Max-x.Min), Y: deep * math.Pow(g.Y.Max/g.Y.Min, 0.015), Label: figure.Plain(fmt.Sprintf("%d, limit of trust", deep))}}
	return g
}

func (f *Forecast) errors(x figure.Axis) *figure.Figure {
	g := &figure.Figure{X: x, Y: figure.Axis{Label: figure.Plain("least error of a shot  (%)"), Log: true}}
	p, gas := &f.Plan, &f.Gas
	g.Curves = told(
		trace(f.Sights, "*N*", figure.Law1, func(s *predict.Sight) float64 { return 100 * s.Errors.Atoms / p.Atoms }),
		trace(f.Sights, "*T*", figure.Law2, func(s *predict.Sight) float64 { return 100 * s.Errors.T / p.T }),
		trace(f.Sights, "*N*_{0} / *N*, absolute", figure.Law3, func(s *predict.Sight) float64 { return 100 * s.Errors.Fraction }),
		trace(f.Sights, "*μ*", figure.Law4, func(s *predict.Sight) float64 { return 100 * s.Errors.Mu / gas.Mu }),
	)
	g.Y.Min = least(g.Curves) / 1.4
	g.Y.Max = math.Max(4*g.Y.Min, math.Min(100, most(g.Curves)*1.4))
	return g
}

func most(curves []figure.Curve) float64 {
	v := 0.0
	for _, c := range curves {
		for _, y := range c.Y {
			v = math.Max(v, y)
		}
	}
	return v
}

func least(curves []figure.Curve) float64 {
	v := math.Inf(1)
	for _, c := range curves {
		for _, y := range c.Y {
			if y > 0 {
				v = math.Min(v, y)
			}
		}
	}
	return v
}

// Title names the plan in a line.
func (f *Forecast) Title() string {
	return fmt.Sprintf("%.3g atoms at %.4g nK", f.Plan.Atoms, f.Plan.T*nK)
}
