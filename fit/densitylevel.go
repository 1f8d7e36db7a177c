package fit

import (
	"fmt"
	"math"
)

// densityBlock is the number of pixels to whose sums the background beyond the cloud is
// known in closed form.
const densityBlock = 32

// densitySums are the sums over pixels of the weight w times 1, i, i² and times the data d
// times 1, i, d, with i the column; two more fill a vector register.
type densitySums [8]float64

func (s *densitySums) add(t *densitySums) {
	for k := range s {
		s[k] += t[k]
	}
}

func (s *densitySums) less(t *densitySums) (u densitySums) {
	for k := range s {
		u[k] = s[k] - t[k]
	}
	return u
}

// densityLevel is a density image at one resolution: data d and weights w = 1/σ², with rows
// padded to whole blocks by weight 0, and running sums along each row.
type densityLevel struct {
	w, h, stride int
	bin          int // full pixels along an edge of a pixel of this level
	fullW, fullH int
	data, weight []float64
	padded       []float64
	running      []densitySums // stride/densityBlock+1 a row: over the blocks before
	light        [6]float64    // sums of w times 1, X, Y, XX, XY, YY for X, Y as in the background
}

func (l *densityLevel) size(w, h, bin, fullW, fullH int) {
	l.w, l.h, l.bin, l.fullW, l.fullH = w, h, bin, fullW, fullH
	l.stride = (w + densityBlock - 1) / densityBlock * densityBlock
	l.weight = growTo(l.weight, l.stride*h)
	l.running = growTo(l.running, (l.stride/densityBlock+1)*h)
}

// growTo returns a slice of length n that reuses the memory of s and whatever it holds.
func growTo[T any](s []T, n int) []T {
	if cap(s) < n {
		return make([]T, n)
	}
	return s[:n]
}

// at is the position of column or row i in full pixels.
func (l *densityLevel) at(i int) float64 { return float64(l.bin*i) + 0.5*float64(l.bin-1) }

// columnX and rowY are the coordinates of the background's slopes: -½ to ½ over the image.
func (l *densityLevel) columnX(i int) float64 {
	return (l.at(i) - 0.5*float64(l.fullW-1)) / float64(l.fullW)
}

func (l *densityLevel) rowY(j int) float64 {
	return (l.at(j) - 0.5*float64(l.fullH-1)) / float64(l.fullH)
}

// read makes l the full image. Where rows need no padding it uses img.Density itself.
func (l *densityLevel) read(img *DensityImage, k *kernelSet) {
	l.size(img.Width, img.Height, 1, img.Width, img.Height)
	l.data = img.Density
	if l.stride != l.w {
		l.padded = growTo(l.padded, l.stride*l.h)
		l.data = l.padded
	}
	for j := range l.h {
		o, n := j*l.w, l.w&^(kernelLanes-1)
		sigma, w := img.Sigma[o:o+l.w], l.weight[j*l.stride:(j+1)*l.stride]
		if n > 0 {
			k.weigh(w[:n], sigma[:n])
		}
		scalarWeigh(w[n:l.w], sigma[n:])
		if l.stride != l.w {
			d := l.padded[j*l.stride : (j+1)*l.stride]
			copy(d, img.Density[o:o+l.w])
			clear(d[l.w:])
			clear(w[l.w:])
		}
		l.sum(j, k)
	}
}

// halve makes l the image f at half the resolution: weighted means of 2×2 pixels.
func (l *densityLevel) halve(f *densityLevel, k *kernelSet) {
	l.size((f.w+1)/2, (f.h+1)/2, 2*f.bin, f.fullW, f.fullH)
	l.padded = growTo(l.padded, l.stride*l.h+f.stride)
	l.data = l.padded[:l.stride*l.h]
	none := l.padded[l.stride*l.h:] // stands for the row below an odd last one
	clear(none)
	n := min(l.stride, f.stride/2)
	for j := range l.h {
		w, d := l.weight[j*l.stride:(j+1)*l.stride], l.data[j*l.stride:(j+1)*l.stride]
		o := 2 * j * f.stride
		w0, d0, w1, d1 := f.weight[o:o+f.stride], f.data[o:o+f.stride], none, none
		if 2*j+1 < f.h {
			o += f.stride
			w1, d1 = f.weight[o:o+f.stride], f.data[o:o+f.stride]
		}
		k.halve(w[:n], d[:n], w0, d0, w1, d1)
		clear(w[n:])
		clear(d[n:])
		l.sum(j, k)
	}
}

// sum fills the running sums of row j and adds it to the background's block of the normal
// matrix.
func (l *densityLevel) sum(j int, k *kernelSet) {
	if j == 0 {
		l.light = [6]float64{}
	}
	n := l.stride/densityBlock + 1
	run := l.running[j*n : (j+1)*n]
	run[0] = densitySums{}
	k.blocks(run, l.weight[j*l.stride:(j+1)*l.stride], l.data[j*l.stride:(j+1)*l.stride])
	s := &run[n-1]
	x0, dx, y := l.columnX(0), float64(l.bin)/float64(l.fullW), l.rowY(j)
	m1 := x0*s[0] + dx*s[1]
	for i, v := range [6]float64{s[0], m1, y * s[0], x0*x0*s[0] + 2*x0*dx*s[1] + dx*dx*s[2], y * m1, y * y * s[0]} {
		l.light[i] += v
	}
}

// check says where a density or its error is not a number, or an error is 0.
func (l *densityLevel) check() error {
	n := l.stride/densityBlock + 1
	for j := range l.h {
		s := &l.running[(j+1)*n-1]
		if sum := s[0] + s[2] + s[5]; !(sum <= math.MaxFloat64) {
			return fmt.Errorf("density image has a density that is not a number, or an error that is 0 or not a number, in row %d", j)
		}
	}
	return nil
}
