package model

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/integrate/quad"
)

// SemiIdealCloud is the thermal part of a semi-ideal gas (see SemiIdealAt) after a
// ballistic flight, as the camera sees it: atoms that the condensate kept out of the
// middle of the trap fly out from where they were. The push of the expanding condensate
// on them is left out.
type SemiIdealCloud struct {
	y      float64       // μ/kT
	unit   float64       // (kT/ħω̄)³ over 4π^{5/2} √det of the spread
	whiten [2][2]float64 // offset in m → units in which the spread by momenta is round and 1
	place  [2]float64    // variances, in these units, of the places without a condensate
	ideal  Shape         // variances in m² of the cloud without a condensate
	number float64       // its number
}

// NewSemiIdealCloud prepares the cloud at temperature T in K, chemical potential mu in J,
// after a flight in s in the given view. The domain is T > 0, mu/kT ≤ 8.9 and a flight of
// at least 1/10 of every 1/ω_i.
func NewSemiIdealCloud(T, mu, mass float64, trap Trap, view Rotation, flight float64, rel Release) (*SemiIdealCloud, error) {
	y := mu / (KB * T)
	if !(T > 0 && y <= 8.9) {
		return nil, fmt.Errorf("semi-ideal cloud: temperature %g K, μ/kT %g: they must be above 0 and below 8.9", T, y)
	}
	place, spread, err := flightShapes(T, mass, trap, view, flight, rel)
	if err != nil {
		return nil, fmt.Errorf("semi-ideal cloud: %w", err)
	}
	c := &SemiIdealCloud{
		y:      y,
		unit:   thermalUnit(T, trap) / (4 * math.Pow(math.Pi, 2.5) * math.Sqrt(spread.Det())),
		ideal:  Shape{place.XX + spread.XX, place.XY + spread.XY, place.YY + spread.YY},
		number: ThermalNumber(T, math.Max(0, -y), trap),
	}
	c.normalise(place, spread)
	if !(math.Max(c.place[0], c.place[1]) <= 100) {
		return nil, fmt.Errorf("semi-ideal cloud: flight %g s is below a tenth of 1/ω", flight)
	}
	return c, nil
}

// flightShapes returns the variances in the picture of where atoms started, carried along
// by the flight, and of where their momenta took them, both for a harmonic potential.
func flightShapes(T, mass float64, trap Trap, view Rotation, flight float64, rel Release) (place, spread Shape, err error) {
	grown, err := ExpandThermal(trap, flight, rel)
	if err != nil {
		return place, spread, err
	}
	carried, err := expand(trap, flight, rel, forces{})
	if err != nil {
		return place, spread, err
	}
	whole, start := ThermalVariances(T, mass, trap, grown), ThermalVariances(T, mass, trap, carried.B)
	for i := range whole {
		whole[i] -= start[i]
	}
	return view.Project(start), view.Project(whole), nil
}

// normalise finds the linear map that makes the spread the unit matrix and the place
// diagonal.
func (c *SemiIdealCloud) normalise(place, spread Shape) {
	x := math.Sqrt(spread.XX)
	y := math.Sqrt(spread.Det()) / x
	inverse := [2][2]float64{{1 / x, 0}, {-spread.XY / (x * x * y), 1 / y}} // of the Cholesky factor
	first, second, angle := place.mapped(inverse).Principal(0)
	c.place = [2]float64{first, second}
	sin, cos := math.Sincos(angle)
	for k := range 2 {
		c.whiten[0][k] = cos*inverse[0][k] + sin*inverse[1][k]
		c.whiten[1][k] = -sin*inverse[0][k] + cos*inverse[1][k]
	}
}

// mapped returns M S Mᵀ.
func (s Shape) mapped(m [2][2]float64) Shape {
	product := func(a, b [2]float64) float64 {
		return a[0]*(s.XX*b[0]+s.XY*b[1]) + a[1]*(s.XY*b[0]+s.YY*b[1])
	}
	return Shape{product(m[0], m[0]), product(m[0], m[1]), product(m[1], m[1])}
}

// Column returns the column density in 1/m² at the offset (x, y) in m from the centre,
//
//	n = (m/ht)² λ_T^{−1} ∫ g_{1/2}(e^{−|V(r)−μ|/kT − q}) d³r
//
// for a sudden release and a flight t: r is the place in the trap and q the kinetic
// energy, in kT, of the flight from there to (x, y). The integral over a condensed cloud
// is the N_th of SemiIdealAt; the relative error is some 1e-4. One call takes 0.1 ms in a
// long flight, more in a short one: tabulate it.
func (c *SemiIdealCloud) Column(x, y float64) float64 {
	if c.y <= 0 {
		return ThermalColumn(c.number, -c.y, c.ideal, x, y)
	}
	at := [2]float64{c.whiten[0][0]*x + c.whiten[0][1]*y, c.whiten[1][0]*x + c.whiten[1][1]*y}
	// v = y ∓ s²: the kernel has a logarithm at the condensate's edge, s = 0.
	inside := func(s float64) float64 { return 2 * s * c.ring(at, c.y-s*s) }
	outside := func(s float64) float64 { return 2 * s * c.ring(at, c.y+s*s) }
	const reach = 6 // e^{−36}
	return c.unit * (c.radial(inside, math.Sqrt(c.y)) + c.radial(outside, reach))
}

// radial integrates over s from 0; the panels resolve what a flight of one unit smears.
func (c *SemiIdealCloud) radial(f func(float64) float64, end float64) float64 {
	count := int(math.Ceil(end * math.Max(0.5, math.Sqrt(2*math.Max(c.place[0], c.place[1]))/2.5)))
	sum, width := 0., end/float64(count)
	for i := range count {
		sum += quad.Fixed(f, width*float64(i), width*float64(i+1), 14, nil, 0)
	}
	return sum
}

// ring integrates the kernel over the directions of the ellipse of places with potential
// energy v; the trapezoidal rule is exponentially good for it.
func (c *SemiIdealCloud) ring(at [2]float64, v float64) float64 {
	half1, half2 := math.Sqrt(2*c.place[0]*v), math.Sqrt(2*c.place[1]*v)
	count := 16 + 6*int(math.Max(half1, half2))
	step := math.Pi * 2 / float64(count)
	sum := 0.
	for i := range count {
		sin, cos := math.Sincos((float64(i) + 0.5) * step)
		d1, d2 := at[0]-half1*cos, at[1]-half2*sin
		sum += sightKernel(c.y-v, (d1*d1+d2*d2)/2)
	}
	return sum * step
}
