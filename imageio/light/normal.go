package light

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"fallshadow/imageio"
)

// ridge is the share of the frames' own white noise that is added once more to the
// diagonal of the normal equations: it holds back combinations that differ by noise only,
// and makes equations of equal frames solvable.
const ridge = 1.0

// least is the lowest transmission by which an atoms frame is divided; tiles with less
// are closed.
const least = 0.1

// normal holds the normal equations of a reference in units of the frames' means, apart
// for the two halves of the checkerboard of tiles.
type normal struct {
	noise []float64 // white variance of a block of a frame over its mean squared
	open  int       // blocks
	half  [2]system
}

// system is one half: products of frames with each other and with the atoms frame.
type system struct {
	gram   []float64 // k x k
	rhs    []float64
	square float64 // Σ A²
	sum    float64 // Σ A
	blocks float64
}

func newSystem(k int) system { return system{gram: make([]float64, k*k), rhs: make([]float64, k)} }

// sums gathers the equations over the open tiles of a shot.
func (r *References) sums(frames []*lightFrame, e *imageio.Exposure, cloud Cloud) *normal {
	open := r.tiles.open(cloud.Mask)
	at := func(i int) float64 { return e.Atoms[i] }
	if t := cloud.Transmission; t != nil {
		r.tiles.close(open, func(i int) bool { return !(t[i] >= least) })
		at = func(i int) float64 { return e.Atoms[i] / t[i] }
	}
	k := len(frames)
	n := &normal{noise: make([]float64, k), half: [2]system{newSystem(k), newSystem(k)}}
	atoms := r.tiles.average(at)
	for i, isOpen := range open {
		if isOpen {
			n.half[r.tiles.fold(i)].own(atoms[r.tiles.start[i]:r.tiles.start[i+1]])
		}
	}
	n.open = int(n.half[0].blocks + n.half[1].blocks)
	read := r.night.readVar() * float64(r.night.win.bin*r.night.win.bin)
	for a, f := range frames {
		n.noise[a] = (f.mean + read + f.darkVar) / (blockSide * blockSide * f.mean * f.mean)
		with := r.tiles.folded(r.tiles.products(f.blocks, atoms), open)
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

// own takes in the blocks of the atoms frame of one tile.
func (s *system) own(blocks []float64) {
	for _, v := range blocks {
		s.square += v * v
		s.sum += v
	}
	s.blocks += float64(len(blocks))
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
	f := &normal{noise: n.noise[:1], open: n.open}
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
	g := mat.NewSymDense(k, nil)
	rhs := mat.NewVecDense(k, nil)
	for a := range k {
		left := s.rhs[a]
		for b := range k {
			left -= s.gram[a*k+b] * share
			if b >= a {
				g.SetSym(a, b, s.gram[a*k+b])
			}
		}
		g.SetSym(a, a, s.gram[a*k+a]+ridge*s.blocks*n.noise[a])
		rhs.SetVec(a, left)
	}
	var factor mat.Cholesky
	var x mat.VecDense
	if !factor.Factorize(g) || factor.SolveVecTo(&x, rhs) != nil {
		return nil, false
	}
	c = make([]float64, k)
	for a := range c {
		c[a] = share + x.AtVec(a)
	}
	return c, true
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

// squares is Σ (A - Σ c R)² over the blocks of the system.
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
