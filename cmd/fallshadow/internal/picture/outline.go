package picture

import (
	"math"

	"fallshadow/fit"
)

// Outline is where a part of the cloud has fallen to a stated fraction of its value at
// the centre, as runs of points; it is broken where it leaves the picture.
type Outline struct {
	Part string // "thermal" or "condensate"
	Runs [][]Point
}

// Point is a place in pixels of the maps.
type Point struct{ X, Y float64 }

// The fractions at which the parts are outlined: the thermal part at 1/e² of its column
// density at the centre, the condensate next to its edge.
const (
	ThermalFraction    = 0.1353
	CondensateFraction = 0.02
)

// outlines traces the parts that the fitted cloud has.
func outlines(m *fit.Maps, x, y float64) []Outline {
	thermal := func(i int) float64 { return float64(m.Thermal[i]) }
	condensate := func(i int) float64 { return float64(m.Total[i]) - float64(m.Thermal[i]) }
	var list []Outline
	for _, p := range []struct {
		part     string
		value    func(int) float64
		fraction float64
	}{{"thermal", thermal, ThermalFraction}, {"condensate", condensate, CondensateFraction}} {
		if runs := trace(m, p.value, x, y, p.fraction); len(runs) > 0 {
			list = append(list, Outline{p.part, runs})
		}
	}
	return list
}

// rays is how many directions an outline is looked for in.
const rays = 96

// trace walks from the centre outwards along rays until the value falls below the
// fraction of that at the centre. The parts of a cloud fall along every ray, so this finds
// their outline whatever its shape.
func trace(m *fit.Maps, value func(int) float64, x, y, fraction float64) (runs [][]Point) {
	peak := sample(m, value, x, y)
	if !(peak > 1e-4) {
		return nil
	}
	var run []Point
	for k := range rays + 1 {
		sin, cos := math.Sincos(2 * math.Pi * float64(k) / rays)
		d, ok := crossing(func(d float64) float64 { return sample(m, value, x+d*cos, y+d*sin) }, fraction*peak)
		if ok {
			run = append(run, Point{x + d*cos, y + d*sin})
			continue
		}
		if len(run) > 1 {
			runs = append(runs, run)
		}
		run = nil
	}
	if len(run) > 1 {
		runs = append(runs, run)
	}
	return runs
}

// crossing returns the distance at which a value falls below a limit; ok is false where
// the picture ends first, where the value is NaN.
func crossing(along func(float64) float64, limit float64) (d float64, ok bool) {
	const step = 0.5
	before := along(0)
	for d = step; ; d += step {
		v := along(d)
		if math.IsNaN(v) {
			return 0, false
		}
		if v < limit {
			return d - step*(limit-v)/(before-v), true
		}
		before = v
	}
}

// sample interpolates between four pixels; NaN outside the picture.
func sample(m *fit.Maps, value func(int) float64, x, y float64) float64 {
	i, j := math.Floor(x), math.Floor(y)
	if !(i >= 0 && j >= 0 && i < float64(m.Width-1) && j < float64(m.Height-1)) {
		return math.NaN()
	}
	o := int(j)*m.Width + int(i)
	u, v := x-i, y-j
	return (1-v)*((1-u)*value(o)+u*value(o+1)) + v*((1-u)*value(o+m.Width)+u*value(o+m.Width+1))
}
