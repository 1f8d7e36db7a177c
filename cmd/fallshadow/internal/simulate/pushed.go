package simulate

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
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

// cubic is the Lagrange cubic through p at −1, 0, 1, 2.
func cubic(p0, p1, p2, p3, f float64) float64 {
	return -f*(f-1)*(f-2)/6*p0 + (f+1)*(f-1)*(f-2)/2*p1 - (f+1)*f*(f-2)/2*p2 + (f+1)*f*(f-1)/6*p3
}

// grid is a square periodic picture around the cloud's centre.
type grid struct {
	n    int
	step float64 // m
	v    []float64
}

// newGrid spans twice a frame of the given side, a point a pixel.
func newGrid(side int, pixel float64) *grid {
	n := 64
	for n < 2*side {
		n *= 2
	}
	return &grid{n: n, step: pixel, v: make([]float64, n*n)}
}

// fill sets the grid to the inverse Fourier transform of a real, even spectrum.
func (g *grid) fill(spectrum func(limit float64) func(kx, ky float64) float64) {
	f := spectrum(math.Pi / g.step)
	n := g.n
	unit := 2 * math.Pi / (float64(n) * g.step)
	wave := func(i int) float64 {
		if i > n/2 {
			i -= n
		}
		return float64(i) * unit
	}
	rows := make([]complex128, n*n)
	for j := range n/2 + 1 { // the other half is its mirror image
		for i := range n {
			v := complex(f(wave(i), wave(j)), 0)
			rows[j*n+i] = v
			rows[(n-j)%n*n+(n-i)%n] = v
		}
	}
	for i, v := range transposed(transposed(rows, n), n) {
		g.v[i] = max(0, real(v))
	}
}

// transposed transforms the rows of a square array in place and returns its transpose.
func transposed(rows []complex128, n int) []complex128 {
	fft := fourier.NewCmplxFFT(n)
	out := make([]complex128, n*n)
	for j := range n {
		row := rows[j*n : (j+1)*n]
		fft.Sequence(row, row)
		for i, v := range row {
			out[i*n+j] = v
		}
	}
	return out
}

// scale makes the integral over the grid equal to total.
func (g *grid) scale(total float64) {
	sum := 0.0
	for _, v := range g.v {
		sum += v
	}
	f := total / (sum * g.step * g.step)
	for i := range g.v {
		g.v[i] *= f
	}
}

// at interpolates at an offset in m from the centre; beyond the grid is nothing.
func (g *grid) at(x, y float64) float64 {
	u, v := x/g.step, y/g.step
	if half := float64(g.n/2 - 2); math.Abs(u) > half || math.Abs(v) > half {
		return 0
	}
	i, j := int(math.Floor(u)), int(math.Floor(v))
	var line [4]float64
	for k := range line {
		row := ((j-1+k)%g.n + g.n) % g.n * g.n
		p := func(d int) float64 { return g.v[row+((i+d)%g.n+g.n)%g.n] }
		line[k] = cubic(p(-1), p(0), p(1), p(2), u-float64(i))
	}
	return max(0, cubic(line[0], line[1], line[2], line[3], v-float64(j)))
}
