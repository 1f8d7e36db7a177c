package fit

import "math"

// plate is what the kernels read of a rectangle of bins: rows padded to whole groups. Every
// bin is brought to the sums of one without bad pixels, counts times the root of the share of
// its pixels that are good: so sums of squares weigh it rightly, and a bin to be left out is
// one without counts. On a linear level atoms hold the density and light its weight.
type plate struct {
	w, h, stride int
	x, y, bin    float64 // centre of the first bin, and the distance to the next, px
	atoms, light []float64
	smooth       []float64
	variance     []float64 // of atoms, frozen within a minimisation
	hole         box       // bins that are left out
}

// size makes room for w×h bins; the padding has no counts.
func (p *plate) size(w, h int) {
	p.w, p.h, p.stride = w, h, groups(w)
	n := p.stride * h
	p.atoms, p.light = growTo(p.atoms, n), growTo(p.light, n)
	p.smooth, p.variance = growTo(p.smooth, n), growTo(p.variance, n)
	if p.stride > w {
		for j := range h {
			for o := j*p.stride + w; o < (j+1)*p.stride; o++ {
				p.atoms[o], p.light[o], p.smooth[o], p.variance[o] = 0, 0, 0, 1
			}
		}
	}
}

// cast fills the plate of a level from its bins.
func (l *level) cast() {
	p := l.plate
	p.size(l.w, l.h)
	p.x, p.y, p.bin, p.hole = l.at(0), l.at(0), float64(l.bin), box{}
	for i := range p.variance { // nothing is left of the picture before
		p.variance[i] = 1
	}
	for j := range l.h {
		l.castRow(j, 0, l.w)
		if !l.linear {
			l.castLight(j)
		}
	}
}

func (l *level) castLight(j int) {
	row := l.plate.smooth[j*l.plate.stride:]
	whole := float64(l.bin * l.bin)
	smooth := l.smooth[j*l.w : (j+1)*l.w]
	for i, c := range l.count[j*l.w : (j+1)*l.w] {
		if row[i] = smooth[i]; row[i] < 0 {
			row[i] = 0
		}
		if c != whole {
			row[i] *= l.full(j*l.w + i)
		}
	}
}

// share is the part of the pixels of bin o that is good, 1 for none.
func (l *level) share(o int) float64 {
	if c := l.count[o]; c > 0 {
		return c / float64(l.bin*l.bin)
	}
	return 1
}

// full is how many times the pixels of bin o would be good if none were bad.
func (l *level) full(o int) float64 {
	n := float64(l.bin * l.bin)
	if c := l.count[o]; c > 0 && c != n {
		return n / c
	}
	return 1
}

// counts are those of bin o as a plate holds them.
func (l *level) counts(o int) (atoms, light float64) {
	c := l.count[o]
	switch {
	case c == 0:
		return 0, 0
	case l.linear:
		return l.atoms[o], c / (l.sigma * l.sigma)
	}
	f := l.full(o)
	if f != 1 {
		f = math.Sqrt(f)
	}
	return l.atoms[o] * f, l.light[o] * f
}

// castRow fills in the counts of columns [a,b) of row j.
func (l *level) castRow(j, a, b int) {
	p, whole := l.plate, float64(l.bin*l.bin)
	o, to := j*l.w, j*p.stride
	if !l.linear {
		copy(p.atoms[to+a:to+b], l.atoms[o+a:o+b])
		copy(p.light[to+a:to+b], l.light[o+a:o+b])
	}
	for i, c := range l.count[o+a : o+b] {
		if c != whole || l.linear {
			p.atoms[to+a+i], p.light[to+a+i] = l.counts(o + a + i)
		}
	}
}

// punch leaves out the bins of a box, and takes those of the last one in again.
func (l *level) punch(b box) {
	p := l.plate
	if p.hole == b {
		return
	}
	for j := p.hole.y0; j < p.hole.y1; j++ {
		l.castRow(j, p.hole.x0, p.hole.x1)
	}
	for j := b.y0; j < b.y1; j++ {
		clear(p.atoms[j*p.stride+b.x0 : j*p.stride+b.x1])
		clear(p.light[j*p.stride+b.x0 : j*p.stride+b.x1])
	}
	p.hole = b
}

// without returns the level with bins left out.
func (l *level) without(skip []bool) *level {
	m := *l
	m.count = append([]float64(nil), l.count...)
	for o, s := range skip {
		if s {
			m.count[o] = 0
		}
	}
	m.own, m.lit = new(levelMemory), box{}
	m.plate = &m.own.plate
	m.cast()
	copy(m.plate.variance, l.plate.variance)
	return &m
}

// row is the position of row j in the picture.
func (p *plate) row(j int) float64 { return p.y + float64(j)*p.bin }
