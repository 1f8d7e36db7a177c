package fit

import (
	"fmt"
	"math"

	"fallshadow/model"
)

// excess is what a condensate does to the thermal column: the semi-ideal gas after its flight
// over the saturated ideal one, as a function of the place in widths along the thermal axes.
// It is scaled so that it leaves the number of the thermal part as it is. Beyond the grid it
// keeps its border value.
type excess struct {
	values  []float64 // rows in v from 0, columns in u from −excessReach
	surplus float64   // atoms of the semi-ideal thermal part over those of the ideal one
}

// The grid of an excess: u from −4.5 to 4.5 widths, v from 0 (the cloud looks the same from
// behind), in steps of 1/16: the atoms that fly slowly from the condensate's edge in the trap draw
// it into the picture, a ridge of 0.05 to 0.3 widths.
const (
	excessReach = 4.5
	excessStep  = 1. / 16
	excessW     = int(2*excessReach/excessStep) + 1
	excessH     = int(excessReach/excessStep) + 1
)

// newExcess tabulates the semi-ideal cloud at T in K and μ in J. It fails where the cloud does:
// a flight too short, a release that is not sudden, μ far above kT.
func newExcess(lab *Lab, flight, T, mu float64) (*excess, error) {
	sp := &lab.Species
	cloud, err := model.NewSemiIdealCloud(T, mu, sp.Mass, lab.Trap, lab.View, flight, lab.Release)
	if err != nil {
		return nil, fmt.Errorf("thermal part beside the condensate: %w", err)
	}
	b, err := model.ExpandThermal(lab.Trap, flight, lab.Release)
	if err != nil {
		return nil, fmt.Errorf("expand the thermal part: %w", err)
	}
	shape := lab.View.Project(model.ThermalVariances(T, sp.Mass, lab.Trap, b))
	axes := principal(shape, math.Atan2(lab.View[1][0], lab.View[0][0]))
	n := model.ThermalNumber(T, 0, lab.Trap)
	mix, err := model.SemiIdealAt(T, mu, sp.Mass, sp.ScatteringLength, lab.Trap)
	if err != nil {
		return nil, fmt.Errorf("thermal part beside the condensate: %w", err)
	}
	c, s := math.Cos(axes.angle), math.Sin(axes.angle)
	s1, s2 := math.Sqrt(axes.square[0]), math.Sqrt(axes.square[1])
	place := func(u, v float64) (x, y float64) { return c*u*s1 - s*v*s2, s*u*s1 + c*v*s2 }
	var nodes excessNodes
	nodes.fill(func(u, v float64) float64 {
		x, y := place(u, v)
		return cloud.Column(x, y) / model.ThermalColumn(n, 0, shape, x, y)
	})
	e := &excess{values: make([]float64, excessW*excessH), surplus: mix.Thermal / n}
	var with, without float64
	for j := range excessH {
		for i := range excessW {
			u, v := float64(i)*excessStep-excessReach, float64(j)*excessStep
			r := nodes.at(u, v)
			e.values[j*excessW+i] = r
			x, y := place(u, v)
			plain := model.ThermalColumn(n, 0, shape, x, y)
			if j > 0 {
				plain *= 2 // the other half
			}
			with += r * plain
			without += plain
		}
	}
	for i := range e.values {
		e.values[i] *= without / with
	}
	return e, nil
}

// excessNodes holds an excess where it is worked out: at nodeUnit sinh(k nodeStep) widths, so that
// nodes stand close together at the centre only. Row 0 is that before the centre's, a mirror image.
type excessNodes [nodesH + 1][nodesW]float64

const (
	nodesH   = 19
	nodesW   = 2*nodesH - 1
	nodeUnit = 0.25
)

var nodeStep = math.Asinh(excessReach/nodeUnit) / (nodesH - 1)

// fill works out f, which is the same at u, v and at −u, −v.
func (n *excessNodes) fill(f func(u, v float64) float64) {
	place := func(k int) float64 { return nodeUnit * math.Sinh(float64(k)*nodeStep) }
	for j := range nodesH {
		for i := range nodesW {
			n[j+1][i] = f(place(i-nodesH+1), place(j))
		}
	}
	for i := range nodesW {
		n[0][i] = n[2][nodesW-1-i]
	}
}

// at interpolates by cubics through four nodes in both directions, for v from 0.
func (n *excessNodes) at(u, v float64) float64 {
	i, across := stencil(u, nodesH-1, nodesW)
	j, down := stencil(v, 1, nodesH+1)
	sum := 0.0
	for k, f := range down {
		row := n[j+k][i:]
		sum += f * (across[0]*row[0] + across[1]*row[1] + across[2]*row[2] + across[3]*row[3])
	}
	return sum
}

// stencil returns the first of the four nodes about x widths, among n of which that of the centre
// is given, and their weights.
func stencil(x float64, centre, n int) (first int, weights [4]float64) {
	t := math.Asinh(x/nodeUnit)/nodeStep + float64(centre)
	first = min(max(int(t)-1, 0), n-4)
	t -= float64(first)
	a, b, c, d := t, t-1, t-2, t-3
	return first, [4]float64{-b * c * d / 6, a * c * d / 2, -a * b * d / 2, a * b * c / 6}
}

// number is the surplus, 1 for a nil excess.
func (e *excess) number() float64 {
	if e == nil {
		return 1
	}
	return e.surplus
}

// at interpolates at u, v widths from the centre; 1 for a nil excess.
func (e *excess) at(u, v float64) float64 {
	if e == nil {
		return 1
	}
	if v < 0 {
		u, v = -u, -v
	}
	x := math.Min(math.Max((u+excessReach)*(1/excessStep), 0), float64(excessW-1)-1e-9)
	y := math.Min(v*(1/excessStep), float64(excessH-1)-1e-9)
	i, j := int(x), int(y)
	x, y = x-float64(i), y-float64(j)
	a := e.values[j*excessW+i:]
	b := a[excessW:]
	return (a[0]*(1-x)+a[1]*x)*(1-y) + (b[0]*(1-x)+b[1]*x)*y
}

// meanField refits a condensed cloud with the thermal part that its own condensate shapes, until
// T and μ no longer move. The derivatives leave out that of the excess: the estimate stays true,
// since its residuals still mean nothing at the truth. Where T and μ, or the flight, are outside what
// the semi-ideal cloud is known for, the ideal form stays.
func (s *session) meanField(st *state) (*state, error) {
	for range 5 {
		m, _ := s.tmpl.measured(&st.p, st.kind)
		e, err := newExcess(s.lab, s.flight, m.T, m.Mu)
		if err != nil {
			s.tmpl.excess, s.opt.MeanField, s.plain = nil, false, true
			return s.refine(st)
		}
		s.tmpl.excess = e
		next, err := s.refine(st)
		if err != nil {
			return nil, err
		}
		moved := next.moved(st)
		if st = next; moved < 0.05 {
			break
		}
	}
	return st, nil
}
