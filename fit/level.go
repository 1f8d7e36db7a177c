package fit

import (
	"math"
	"sort"

	"gonum.org/v1/gonum/stat"
)

// level is a picture at one binning: sums of bin×bin pixels, and what the noise of those
// sums is. Coordinates stay those of the full picture: the centre of bin i is at
// bin·i + (bin−1)/2. A linear level holds a density, not counts.
type level struct {
	w, h, bin int
	linear    bool
	atoms     []float64 // Σ electrons, or mean density where linear
	light     []float64 // Σ reference
	smooth    []float64 // the reference smoothed: where noise must not steer weights
	beam      []float64 // the light before the optics blurred it, in no unit: weights of the blur
	count     []float64 // good pixels in the bin; 0 leaves it out
	plate     *plate    // the same for the kernels, with the variance of atoms
	noise     Noise
	sigma     float64 // of one pixel of a linear level
	saturate  float64 // 1/(electrons per Isat and pixel), 0 for a weak probe
	fullW     int
	fullH     int
}

func (l *level) at(i int) float64 { return float64(l.bin*i) + 0.5*float64(l.bin-1) }

// fullLevel views the picture without copying its counts.
func fullLevel(pic *Picture, o *Optics) *level {
	n := pic.Width * pic.Height
	l := &level{
		w: pic.Width, h: pic.Height, bin: 1, fullW: pic.Width, fullH: pic.Height,
		atoms: pic.Atoms, light: pic.Light, noise: pic.Noise,
		count: make([]float64, n),
	}
	for i, g := range pic.Good {
		if g {
			l.count[i] = 1
		}
	}
	if pic.Density != nil {
		l.linear, l.atoms, l.sigma = true, pic.Density, pic.DensitySigma
		l.cast()
		return l
	}
	if !l.noise.DarkIsShared {
		l.noise.Read = math.Sqrt(l.noise.Read*l.noise.Read + l.noise.Dark)
		l.noise.LightRead += l.noise.Dark
		l.noise.Dark = 0
	}
	l.saturate = o.perElectron()
	l.smooth = smoothed(l.light, l.count, l.w, l.h, smoothing(l.light))
	l.strike()
	l.cast()
	return l
}

// perElectron is I/Isat of the light that atoms can absorb for one electron of a pixel.
func (o *Optics) perElectron() float64 { return (1 - o.Stray) / o.Saturation }

// halved bins a level by two.
func (l *level) halved() *level {
	w, h := l.w/2, l.h/2
	m := &level{
		w: w, h: h, bin: 2 * l.bin, linear: l.linear, noise: l.noise, sigma: l.sigma, saturate: l.saturate,
		fullW: l.fullW, fullH: l.fullH,
		atoms: make([]float64, w*h), count: make([]float64, w*h),
	}
	if !l.linear {
		m.light, m.smooth = make([]float64, w*h), make([]float64, w*h)
	}
	for j := range h {
		for i := range w {
			m.gather(l, j*w+i, [4]int{2*j*l.w + 2*i, 2*j*l.w + 2*i + 1, (2*j+1)*l.w + 2*i, (2*j+1)*l.w + 2*i + 1})
		}
	}
	m.cast()
	return m
}

// strike leaves out single pixels that stand alone: more than struck standard deviations from the
// median of their neighbours, none of which is half as far from it. A cloud of any size that
// a fit can measure covers neighbours, too.
func (l *level) strike() {
	for j := 1; j+1 < l.h; j++ {
		for i := 1; i+1 < l.w; i++ {
			if o := j*l.w + i; l.count[o] > 0 && l.alone(o) {
				l.count[o] = 0
			}
		}
	}
}

const struck = 8

func (l *level) alone(o int) bool {
	sigma := math.Sqrt(math.Max(l.smooth[o], 0)*(1+l.noise.LightShot) + l.readVariance(o) + l.noise.LightRead)
	r := func(o int) float64 { return l.atoms[o] - l.light[o] }
	v := r(o)
	// Most pixels are like those beside them: no median for them.
	if math.Abs(v-r(o-1)) < struck*sigma || math.Abs(v-r(o+1)) < struck*sigma {
		return false
	}
	near := [8]float64{r(o - l.w - 1), r(o - l.w), r(o - l.w + 1), r(o - 1), r(o + 1), r(o + l.w - 1), r(o + l.w), r(o + l.w + 1)}
	sort.Float64s(near[:])
	median := 0.5 * (near[3] + near[4])
	far := math.Max(near[7]-median, median-near[0])
	return math.Abs(v-median) > struck*sigma && far < 0.5*math.Abs(v-median)
}

// setBeam estimates the light before the optics blurred it by a variance of v px²: the reference
// smoothed a little against its noise, sharpened by −v/2 of its curvature, and never below a
// fifth of its surroundings.
func (l *level) setBeam(v float64) {
	v /= float64(l.bin * l.bin)
	mean := make([]float64, len(l.light))
	for o, c := range l.count {
		if mean[o] = l.smooth[o]; c > 0 {
			mean[o] = l.light[o] / c
		}
	}
	thirds(mean, l.w, l.h)
	l.beam = make([]float64, len(mean))
	for j := range l.h {
		up, down := max(j-1, 0)*l.w, min(j+1, l.h-1)*l.w
		for i := range l.w {
			o := j*l.w + i
			curve := mean[up+i] + mean[down+i] + mean[j*l.w+max(i-1, 0)] + mean[j*l.w+min(i+1, l.w-1)] - 4*mean[o]
			least := math.Max(0.2*l.smooth[o]/math.Max(l.count[o], 1), 1e-6)
			l.beam[o] = math.Max(mean[o]-0.5*v*curve, least)
		}
	}
}

// thirds replaces every value by (1, 2, 1)/4 of its neighbours along rows and columns.
func thirds(v []float64, w, h int) {
	for j := range h {
		row := v[j*w : (j+1)*w]
		before := row[0]
		for i, x := range row {
			row[i] = 0.25*before + 0.5*x + 0.25*row[min(i+1, w-1)]
			before = x
		}
	}
	before := append([]float64(nil), v[:w]...)
	for j := range h {
		row, next := v[j*w:(j+1)*w], v[min(j+1, h-1)*w:]
		for i, x := range row {
			row[i] = 0.25*before[i] + 0.5*x + 0.25*next[i]
			before[i] = x
		}
	}
}

// gather adds four bins of the finer level into bin o. Where a good pixel is missing the
// others stand for the bin's place; a bin with less than half of its pixels is left out,
// since its centre would be wrong.
func (m *level) gather(l *level, o int, from [4]int) {
	for _, i := range from {
		c := l.count[i]
		if c == 0 {
			continue
		}
		m.count[o] += c
		if l.linear {
			m.atoms[o] += c * l.atoms[i]
			continue
		}
		m.atoms[o] += l.atoms[i]
		m.light[o] += l.light[i]
		m.smooth[o] += l.smooth[i]
	}
	if m.count[o] < 0.5*float64(m.bin*m.bin) {
		m.count[o] = 0
	} else if l.linear {
		m.atoms[o] /= m.count[o]
	}
}

// smoothing is the half-width of the box that takes the noise out of the light: two pixels where
// counts are few, one where fringes of some pixels are worth more than the noise.
func smoothing(light []float64) int {
	const many = 200
	if stat.Mean(light, nil) > many {
		return 1
	}
	return 2
}

// smoothed returns the box mean of half-width r over good pixels, scaled to each pixel's
// own count; a pixel with no good neighbour keeps its value.
func smoothed(v, count []float64, w, h, r int) []float64 {
	sum, num := make([]float64, w*h), make([]float64, w*h)
	for j := range h {
		row := j * w
		s, n := 0.0, 0.0
		for i := -r; i < w; i++ {
			if k := i + r; k < w && count[row+k] > 0 {
				s += v[row+k]
				n += count[row+k]
			}
			if k := i - r - 1; k >= 0 && count[row+k] > 0 {
				s -= v[row+k]
				n -= count[row+k]
			}
			if i >= 0 {
				sum[row+i], num[row+i] = s, n
			}
		}
	}
	out := make([]float64, w*h)
	cs, cn := make([]float64, w), make([]float64, w)
	for j := -r; j < h; j++ {
		addRow(cs, cn, sum, num, w, h, j+r, 1)
		addRow(cs, cn, sum, num, w, h, j-r-1, -1)
		if j < 0 {
			continue
		}
		for i := range w {
			o := j*w + i
			out[o] = v[o]
			if cn[i] > 0.5 {
				out[o] = cs[i] / cn[i] * math.Max(count[o], 1)
			}
		}
	}
	return out
}

func addRow(cs, cn, sum, num []float64, w, h, j int, sign float64) {
	if j < 0 || j >= h {
		return
	}
	for i := range w {
		cs[i] += sign * sum[j*w+i]
		cn[i] += sign * num[j*w+i]
	}
}

// variances returns of bin o the variance of the reference and of the dark.
func (l *level) variances(o int) (light, dark float64) {
	n := l.count[o]
	return l.noise.LightShot*l.smooth[o] + n*l.noise.LightRead, n * l.noise.Dark
}

// readVariance returns the variance of the atoms frame in bin o beside its shot noise.
func (l *level) readVariance(o int) float64 {
	return l.count[o] * (l.noise.Read*l.noise.Read + 1e-9)
}
