package simulate

import (
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
)

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

// cubic is the Lagrange cubic through p at −1, 0, 1, 2.
func cubic(p0, p1, p2, p3, f float64) float64 {
	return -f*(f-1)*(f-2)/6*p0 + (f+1)*(f-1)*(f-2)/2*p1 - (f+1)*f*(f-2)/2*p2 + (f+1)*f*(f-1)/6*p3
}
