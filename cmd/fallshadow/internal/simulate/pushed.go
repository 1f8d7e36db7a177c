package simulate

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/integrate/quad"

	"fallshadow/model"
)

// The thermal part of the semi-ideal gas feels the Thomas-Fermi condensate as a hill: it
// is λ^−3 g_{3/2}(e^−α) with α = |V − μ|/kT everywhere (Naraschewski, Stamper-Kurn, Phys.
// Rev. A 58, 2423 (1998)), a hollow shell. Released, the atoms fly freely; the push of the
// expanding condensate is left out. Written as a sum over k of classical gases,
//
//	f(r, p) ∝ Σ_k exp(−k p²/2mkT) exp(−k α(r)),
//
// each flies into its own density, smeared by a gaussian of variance kT t²/mk, the same
// in all directions. In the trap α depends on ρ² = Σ x_i²/R_i² alone, so the column's
// Fourier transform at the wave vector κ of the picture is
//
//	λ^−3 R1R2R3 Σ_k k^(−3/2) H_k(√(κᵀSκ)) exp(−κ² kT t²/2mk)
//
// with H_k(q) = 4π ∫ρ² e^(−kα) sin(qρ)/(qρ) dρ and S the condensate's squared radii in
// the trap, projected. This route shares nothing with the profiles that are fitted.

// pushedOut returns the column density in 1/m² of that gas after its flight, normalised
// to t.Thermal atoms. It needs a sudden release and a flight that smears the shell over
// the grid.
func pushedOut(t *Truth, p Picture, m machine) (func(x, y float64) float64, error) {
	if m.release.Duration > 0 && m.release.Ramp != "sudden" {
		return nil, errors.New("the semi-ideal cloud is drawn after a sudden release only")
	}
	kT := model.KB * t.T
	smear := kT / m.species.Mass * t.Flight * t.Flight
	g := newGrid(max(p.Width, p.Height), m.pixel)
	if math.Sqrt(smear) < 4*g.step {
		return nil, errors.New("the semi-ideal cloud needs a flight that grows it by some pixels")
	}
	in := [3]float64{1, 1, 1}
	g.fill(shell{
		shape: m.view.Project(model.RadiiSquared(t.Mu, m.species.Mass, m.trap, in)),
		hill:  t.Mu / kT,
		smear: smear,
	}.transform)
	g.scale(t.Thermal)
	return g.at, nil
}

// shell is the semi-ideal gas after a flight.
type shell struct {
	shape model.Shape // squared radii of the condensate in the trap, m²
	hill  float64     // μ/kT
	smear float64     // kT t²/m, m²
}

// class is a lump of neighbouring terms of the sum over k.
type class struct {
	k, weight float64
	step      float64   // of q between the rows of the table
	table     []float64 // H_k
}

const (
	alone = 24   // terms taken one by one
	ratio = 1.15 // of the ends of a lump beyond
	lastK = 1e5  // what lies beyond is below 1e-6 of the sum
	faint = 40.0 // exponents beyond are nothing
	nodes = 80   // of each quadrature; the phase qρ stays below 60
)

// classes lists the terms k^(−3/2) in lumps: each is its middle times its number of terms.
func classes() []class {
	var list []class
	for k := 1.0; k <= alone; k++ {
		list = append(list, class{k: k, weight: math.Pow(k, -1.5)})
	}
	for from := alone + 1.0; from < lastK; {
		to := math.Ceil(from * ratio)
		middle := math.Sqrt((from - 0.5) * (to - 0.5))
		list = append(list, class{k: middle, weight: (to - from) * math.Pow(middle, -1.5)})
		from = to
	}
	return list
}

// transform returns the column's Fourier transform up to a factor, for wave vectors whose
// components stay below limit (rad/m).
func (s shell) transform(limit float64) func(kx, ky float64) float64 {
	list := classes()
	for i := range list {
		s.tabulate(&list[i], limit)
	}
	return func(kx, ky float64) float64 {
		square := kx*kx + ky*ky
		q := math.Sqrt(s.shape.XX*kx*kx + 2*s.shape.XY*kx*ky + s.shape.YY*ky*ky)
		sum := 0.0
		for _, c := range list {
			e := square * s.smear / (2 * c.k)
			if e < faint {
				sum += c.weight * math.Exp(-e) * lookup(c.table, q/c.step)
			}
		}
		return sum
	}
}

// tabulate computes H_k up to the limit, or to where the flight has smeared it away.
func (s shell) tabulate(c *class, limit float64) {
	size := math.Sqrt(s.shape.XX + s.shape.YY)
	top := min(limit*math.Sqrt2, math.Sqrt(2*c.k*faint/s.smear)) * size
	c.step = 0.1 / math.Sqrt(1+10/(c.k*s.hill)) // a tenth of a radian at the shell's outside
	c.table = make([]float64, int(top/c.step)+4)
	rho, weight := s.quadrature(c.k)
	for i := range c.table {
		q := float64(i) * c.step
		for j, r := range rho {
			c.table[i] += weight[j] * sinc(q*r)
		}
	}
}

// quadrature returns nodes and weights of ∫ρ² e^(−k hill |ρ²−1|) … dρ.
func (s shell) quadrature(k float64) (rho, weight []float64) {
	reach := faint / (k * s.hill)
	for _, ends := range [2][2]float64{{math.Sqrt(max(0, 1-reach)), 1}, {1, math.Sqrt(1 + reach)}} {
		x, w := make([]float64, nodes), make([]float64, nodes)
		quad.Legendre{}.FixedLocations(x, w, ends[0], ends[1])
		for i, r := range x {
			w[i] *= r * r * math.Exp(-k*s.hill*math.Abs(r*r-1))
		}
		rho, weight = append(rho, x...), append(weight, w...)
	}
	return rho, weight
}

func sinc(x float64) float64 {
	if x == 0 {
		return 1
	}
	return math.Sin(x) / x
}

// lookup interpolates a table by a cubic through four points; beyond its end is nothing.
func lookup(table []float64, at float64) float64 {
	i := int(at)
	if i+3 > len(table) {
		return 0
	}
	before := table[1] // H_k is even
	if i > 0 {
		before = table[i-1]
	}
	return cubic(before, table[i], table[i+1], table[i+2], at-float64(i))
}
