package fit

import (
	"math"
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
	lit       box       // where beam is known
	count     []float64 // good pixels in the bin; 0 leaves it out
	plate     *plate    // the same for the kernels, with the variance of atoms
	noise     Noise
	sigma     float64 // of one pixel of a linear level
	saturate  float64 // 1/(electrons per Isat and pixel), 0 for a weak probe
	fullW     int
	fullH     int
	own       *levelMemory
}

func (l *level) at(i int) float64 { return float64(l.bin*i) + 0.5*float64(l.bin-1) }

// view makes l the full picture without copying its counts.
func (l *level) view(pic *Picture, o *Optics) {
	n := pic.Width * pic.Height
	l.begin(pic.Width, pic.Height, 1)
	l.fullW, l.fullH, l.noise = l.w, l.h, pic.Noise
	l.atoms, l.light = pic.Atoms, pic.Light
	l.own.count = growTo(l.own.count, n)
	l.count = l.own.count
	for i, g := range pic.Good {
		l.count[i] = 0
		if g {
			l.count[i] = 1
		}
	}
	if pic.Density != nil {
		l.linear, l.atoms, l.sigma = true, pic.Density, pic.DensitySigma
		l.cast()
		return
	}
	if !l.noise.DarkIsShared {
		l.noise.Read = math.Sqrt(l.noise.Read*l.noise.Read + l.noise.Dark)
		l.noise.LightRead += l.noise.Dark
		l.noise.Dark = 0
	}
	l.saturate = o.perElectron()
	l.own.smooth = growTo(l.own.smooth, n)
	l.smooth = l.own.smooth
	l.smoothLight(smoothing(l.light))
	l.strike()
	l.cast()
}

// levelMemory are the arrays of a level, kept from picture to picture.
type levelMemory struct {
	atoms, light, smooth, count, beam []float64
	plate                             plate
	sheets                            [2]sheet
}

// begin empties l but for its memory.
func (l *level) begin(w, h, bin int) {
	*l = level{w: w, h: h, bin: bin, own: l.own}
	if l.own == nil {
		l.own = new(levelMemory)
	}
	l.plate = &l.own.plate
}

// perElectron is I/Isat of the light that atoms can absorb for one electron of a pixel.
func (o *Optics) perElectron() float64 { return (1 - o.Stray) / o.Saturation }

// halve makes m the level l binned by two.
func (m *level) halve(l *level) {
	m.begin(l.w/2, l.h/2, 2*l.bin)
	m.linear, m.noise, m.sigma, m.saturate, m.fullW, m.fullH = l.linear, l.noise, l.sigma, l.saturate, l.fullW, l.fullH
	o, n := m.own, m.w*m.h
	o.atoms, o.count = growTo(o.atoms, n), growTo(o.count, n)
	m.atoms, m.count = o.atoms, o.count
	if !l.linear {
		o.light, o.smooth = growTo(o.light, n), growTo(o.smooth, n)
		m.light, m.smooth = o.light, o.smooth
	}
	for j := range m.h {
		m.gatherRow(l, j)
	}
	m.cast()
}

// gatherRow adds up the bins of row j, four of the finer level each.
func (m *level) gatherRow(l *level, j int) {
	whole := float64(l.bin * l.bin)
	o, a, b := j*m.w, 2*j*l.w, (2*j+1)*l.w
	ca, cb := l.count[a:a+2*m.w], l.count[b:b+2*m.w]
	for i := range m.w {
		k := 2 * i
		if l.linear || ca[k] != whole || ca[k+1] != whole || cb[k] != whole || cb[k+1] != whole {
			m.gather(l, o+i, [4]int{a + k, a + k + 1, b + k, b + k + 1})
			continue
		}
		m.count[o+i] = 4 * whole
		m.atoms[o+i] = l.atoms[a+k] + l.atoms[a+k+1] + l.atoms[b+k] + l.atoms[b+k+1]
		m.light[o+i] = l.light[a+k] + l.light[a+k+1] + l.light[b+k] + l.light[b+k+1]
		m.smooth[o+i] = l.smooth[a+k] + l.smooth[a+k+1] + l.smooth[b+k] + l.smooth[b+k+1]
	}
}

// gather adds four bins of the finer level into bin o. Where a good pixel is missing the
// others stand for the bin's place; a bin with less than half of its pixels is left out,
// since its centre would be wrong.
func (m *level) gather(l *level, o int, from [4]int) {
	m.count[o], m.atoms[o] = 0, 0
	if !l.linear {
		m.light[o], m.smooth[o] = 0, 0
	}
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

// variances returns of bin o the variance of the reference and of the dark.
func (l *level) variances(o int) (light, dark float64) {
	n := l.count[o]
	return l.noise.LightShot*l.smooth[o] + n*l.noise.LightRead, n * l.noise.Dark
}

// readVariance returns the variance of the atoms frame in bin o beside its shot noise.
func (l *level) readVariance(o int) float64 {
	return l.count[o] * (l.noise.Read*l.noise.Read + 1e-9)
}
