package light

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"fallshadow/imageio"
)

// ridge is the share of the frames' own white noise that is added once more to the
// diagonal of the normal equations. It makes equations of equal frames solvable; much more
// of it would shrink the fringes.
const ridge = 0.01

// least is the lowest transmission by which an atoms frame is divided; tiles with less
// are closed.
const least = 0.1

// normal holds the normal equations of a reference in units of the frames' means, apart
// for the two halves of the checkerboard of tiles.
type normal struct {
	noise []float64 // white variance of a block of a frame over its mean squared
	half  [2]system
}

// system is one half: products of frames with each other and with the atoms frame.
type system struct {
	gram   []float64 // k x k
	rhs    []float64
	square float64 // of the atoms frame with itself
	sum    float64 // of its blocks
	blocks float64
}

func newSystem(k int) system { return system{gram: make([]float64, k*k), rhs: make([]float64, k)} }

// openTiles tells which tiles neither the mask nor too low a transmission closes.
func (r *References) openTiles(cloud Cloud) (open []bool, blocks int) {
	open = make([]bool, len(r.tiles.blocks))
	for i := range open {
		open[i] = true
	}
	t := cloud.Transmission
	r.tiles.close(open, func(i int) bool { return cloud.Mask[i] || t != nil && !(t[i] >= least) })
	for i, n := range r.tiles.blocks {
		if open[i] {
			blocks += n
		}
	}
	return open, blocks
}

// bare returns the atoms frame divided by the transmission.
func bare(e *imageio.Exposure, transmission []float64) []float64 {
	if transmission == nil {
		return e.Atoms
	}
	out := make([]float64, len(e.Atoms))
	for i, a := range e.Atoms {
		out[i] = a / transmission[i]
	}
	return out
}

// equations gathers the sums over the open tiles of a shot.
func (r *References) equations(frames []*lightFrame, atoms []float64, open []bool) *normal {
	k := len(frames)
	n := &normal{noise: make([]float64, k), half: [2]system{newSystem(k), newSystem(k)}}
	values := r.tiles.values(atoms)
	square := r.tiles.folded(r.tiles.products(values, values), open)
	sum := r.tiles.folded(r.tiles.sums(values), open)
	for h := range n.half {
		n.half[h].square, n.half[h].sum = square[h], sum[h]
	}
	for i, blocks := range r.tiles.blocks {
		if open[i] {
			n.half[r.tiles.fold(i)].blocks += float64(blocks)
		}
	}
	for a, f := range frames {
		n.noise[a] = (f.mean + r.readVar() + f.darkVar) / (blockSide * blockSide * f.mean * f.mean)
		with := r.tiles.folded(r.tiles.products(f.values, values), open)
		for h := range n.half {
			n.half[h].rhs[a] = with[h] / f.mean
		}
		for b, g := range frames[:a+1] {
			both := r.tiles.folded(r.productsOf(f, g), open)
			for h := range n.half {
				v := both[h] / (f.mean * g.mean)
				n.half[h].gram[a*k+b], n.half[h].gram[b*k+a] = v, v
			}
		}
	}
	return n
}

// all is both halves together.
func (n *normal) all() system {
	a, b := n.half[0], n.half[1]
	s := newSystem(len(n.noise))
	for i := range s.gram {
		s.gram[i] = a.gram[i] + b.gram[i]
	}
	for i := range s.rhs {
		s.rhs[i] = a.rhs[i] + b.rhs[i]
	}
	s.square, s.sum, s.blocks = a.square+b.square, a.sum+b.sum, a.blocks+b.blocks
	return s
}

// first is the equations of the first frame alone.
func (n *normal) first() *normal {
	f := &normal{noise: n.noise[:1]}
	for h, s := range n.half {
		s.gram, s.rhs = s.gram[:1], s.rhs[:1]
		f.half[h] = s
	}
	return f
}

// solve returns the coefficients, in units of the means, that solve one system with the
// ridge about equal shares of the atoms frame's light; ok is false where it has no light.
func (n *normal) solve(s system) (c []float64, ok bool) {
	k := len(n.noise)
	if !(s.blocks > 0) || !(s.sum > 0) {
		return nil, false
	}
	share := s.sum / s.blocks / float64(k)
	g := mat.NewSymDense(k, append([]float64(nil), s.gram...))
	rhs := mat.NewVecDense(k, append([]float64(nil), s.rhs...))
	for a := range k {
		hold := ridge * s.blocks * n.noise[a]
		g.SetSym(a, a, g.At(a, a)+hold)
		rhs.SetVec(a, rhs.AtVec(a)+hold*share)
	}
	var factor mat.Cholesky
	var x mat.VecDense
	if !factor.Factorize(g) || factor.SolveVecTo(&x, rhs) != nil {
		return nil, false
	}
	return x.RawVector().Data, true
}

// leftOut is the sum of squares over each half with coefficients from the other.
func (n *normal) leftOut() float64 {
	total := 0.0
	for h := range n.half {
		c, ok := n.solve(n.half[1-h])
		if !ok {
			return math.Inf(1)
		}
		total += n.half[h].squares(c)
	}
	return total
}

// squares is the sum of squares of the atoms frame less the combination c.
func (s system) squares(c []float64) float64 {
	k := len(c)
	sum := s.square
	for a := range c {
		row := -2 * s.rhs[a]
		for b, v := range c {
			row += s.gram[a*k+b] * v
		}
		sum += c[a] * row
	}
	return sum
}
