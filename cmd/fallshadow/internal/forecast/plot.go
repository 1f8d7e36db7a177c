package forecast

import (
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/interp"

	"fallshadow/cmd/fallshadow/internal/figure"
	"fallshadow/fit/predict"
)

// Plot draws sizes, peak optical density and errors against the flight; the flights whose
// peak is not to be trusted have a grey ground in all three.
func (f *Forecast) Plot() figure.Stack {
	x := figure.Axis{Label: figure.Plain("flight  (ms)"), Min: f.request.From * 1e3, Max: f.request.To * 1e3}
	stack := figure.Stack{f.sizes(x), f.depth(x), f.errors(x)}
	if !slices.ContainsFunc(f.Smooth, dense) {
		return stack
	}
	for _, g := range stack {
		g.Bands = []figure.Band{f.ground(&g.Y)}
	}
	stack[1].Bands[0].Legend = fmt.Sprintf("above %d: not to be trusted", deep)
	return stack
}

func dense(s predict.Sight) bool { return s.Depth >= deep }

// ground spans the flights that are dense.
func (f *Forecast) ground(y *figure.Axis) figure.Band {
	b := figure.Band{Role: figure.Ground}
	for _, s := range f.Smooth {
		low, high := math.NaN(), math.NaN()
		if dense(s) {
			low, high = y.Min, y.Max
		}
		b.X, b.Low, b.High = append(b.X, s.Flight*1e3), append(b.Low, low), append(b.High, high)
	}
	return b
}

// trace is a quantity along the flights, drawn as a curve.
func trace(sights []predict.Sight, legend string, role figure.Role, value func(*predict.Sight) float64) figure.Curve {
	c := figure.Curve{Legend: legend, Role: role}
	for i := range sights {
		c.X, c.Y = append(c.X, sights[i].Flight*1e3), append(c.Y, value(&sights[i]))
	}
	return c
}

// eased draws a curve of few flights through places between them, by a spline of its
// logarithm.
func eased(c figure.Curve) figure.Curve {
	const parts = 12
	y := make([]float64, len(c.Y))
	for i, v := range c.Y {
		y[i] = math.Log(v)
	}
	var through interp.AkimaSpline
	if !finite(y) || through.Fit(c.X, y) != nil {
		return c
	}
	fine := figure.Curve{Legend: c.Legend, Role: c.Role}
	for i := range (len(c.X)-1)*parts + 1 {
		x := c.X[0] + (c.X[len(c.X)-1]-c.X[0])*float64(i)/float64((len(c.X)-1)*parts)
		fine.X, fine.Y = append(fine.X, x), append(fine.Y, math.Exp(through.Predict(x)))
	}
	return fine
}

func finite(list []float64) bool {
	return !slices.ContainsFunc(list, func(v float64) bool { return v-v != 0 })
}

// told keeps the curves that have a value.
func told(curves ...figure.Curve) (list []figure.Curve) {
	for _, c := range curves {
		if slices.ContainsFunc(c.Y, func(y float64) bool { return !math.IsNaN(y) }) {
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
	name := "peak optical density  (*σ*_{0}*n* / *α*" + f.divided("", "(1 + 4*δ*^{2})") + ")"
	g := &figure.Figure{X: x, Y: figure.Axis{Label: figure.Markup(name), Log: true}}
	g.Curves = told(
		trace(f.Smooth, "", figure.Law2, func(s *predict.Sight) float64 { return s.Depth }),
		trace(f.Smooth, "as counts show it", figure.Law1, func(s *predict.Sight) float64 { return s.Shown }),
	)
	g.Curves[0].Legend = "cloud"
	g.Y.Min, g.Y.Max = math.Min(deep/2, least(g.Curves)/1.5), math.Max(2*deep, most(g.Curves)*1.5)
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
	for i := range g.Curves {
		g.Curves[i] = eased(g.Curves[i])
	}
	g.Y.Min = least(g.Curves) / 1.4
	g.Y.Max = math.Max(4*g.Y.Min, math.Min(100, most(g.Curves)*1.4))
	return g
}

func most(curves []figure.Curve) float64 {
	v := 0.0
	for _, c := range curves {
		for _, y := range c.Y {
			if y > v {
				v = y
			}
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
