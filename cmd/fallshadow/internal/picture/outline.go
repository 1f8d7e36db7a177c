package picture

import (
	"math"

	"fallshadow/fit"
)

// Outline is where a part of the cloud has fallen to a stated fraction of its value at
// the centre: a closed line, which may leave the picture.
type Outline struct {
	Part string // "thermal" or "condensate"
	Line []Point
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
		if line := ellipse(x, y, trace(m, p.value, x, y, p.fraction)); line != nil {
			list = append(list, Outline{p.part, line})
		}
	}
	return list
}

// rays is how many directions an outline is looked for in.
const rays = 96

// trace walks from the centre outwards along rays until the value falls below the
// fraction of that at the centre. The parts of a cloud fall along every ray. Rays that
// leave the picture first give no point.
func trace(m *fit.Maps, value func(int) float64, x, y, fraction float64) (points []Point) {
	peak := sample(m, value, x, y)
	if !(peak > 1e-4) {
		return nil
	}
	for k := range rays {
		sin, cos := math.Sincos(2 * math.Pi * float64(k) / rays)
		if d, ok := crossing(func(d float64) float64 { return sample(m, value, x+d*cos, y+d*sin) }, fraction*peak); ok {
			points = append(points, Point{x + d*cos, y + d*sin})
		}
	}
	return points
}

// ellipse returns the ellipse about a centre that lies best on some points: the parts of a
// cloud are functions of a quadratic form, and points of coarse pixels scatter about it.
// It is nil where the points give none.
func ellipse(x, y float64, points []Point) []Point {
	if len(points) < rays/6 {
		return nil
	}
	// a u² + 2b uv + c v² = 1, each point weighted by its distance⁻⁴, which is the inverse
	// square of the form.
	var h [3][4]float64
	for _, p := range points {
		u, v := p.X-x, p.Y-y
		w := 1 / math.Pow(u*u+v*v, 2)
		row := [4]float64{u * u, 2 * u * v, v * v, 1}
		for i := range 3 {
			for k := range 4 {
				h[i][k] += w * row[i] * row[k]
			}
		}
	}
	a, b, c, ok := solve3(h)
	if !ok || !(a > 0 && a*c > b*b) {
		return nil
	}
	line := make([]Point, 0, rays+1)
	for k := range rays + 1 {
		sin, cos := math.Sincos(2 * math.Pi * float64(k) / rays)
		d := 1 / math.Sqrt(a*cos*cos+2*b*sin*cos+c*sin*sin)
		line = append(line, Point{x + d*cos, y + d*sin})
	}
	return line
}

// solve3 solves three equations, given with their right sides, by Cramer's rule.
func solve3(h [3][4]float64) (a, b, c float64, ok bool) {
	det := func(i, j, k int) float64 {
		return h[0][i]*(h[1][j]*h[2][k]-h[1][k]*h[2][j]) - h[0][j]*(h[1][i]*h[2][k]-h[1][k]*h[2][i]) + h[0][k]*(h[1][i]*h[2][j]-h[1][j]*h[2][i])
	}
	all := det(0, 1, 2)
	return det(3, 1, 2) / all, det(0, 3, 2) / all, det(0, 1, 3) / all, all != 0
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
