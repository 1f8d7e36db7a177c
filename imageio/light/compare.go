package light

import (
	"math"
	"slices"
)

// compare holds the two cleaned frames of a shot against each other, in means over 8x8
// blocks: it refuses an empty probe, an atoms frame without light and exchanged frames,
// and returns the ratio of the atoms frame to the light frame along the border.
func (n *Night) compare(a, l *litFrame) (scale float64, notes []string, err error) {
	p := n.pairBlocks(a, l)
	bright := quantile(p.light, 0.9)
	if floor := max(5*p.noise, 0.5); bright < floor {
		return 0, nil, refuse(EmptyProbe, "%.2g electrons a pixel in its bright part", bright)
	}
	if lit := quantile(p.atoms, 0.9); lit < 0.05*bright {
		return 0, nil, refuse(Unlit, "%.2g electrons a pixel against %.2g", lit, bright)
	}
	scale = p.borderRatio()
	if risen, fallen, blocks := p.contrast(scale); blocks >= 2 && risen > 5*fallen {
		return 0, nil, refuse(Exchanged, "%d blocks of 8x8 pixels brighter with atoms than without", blocks)
	}
	switch {
	case scale > 1.25:
		notes = append(notes, Brighter)
	case scale < 0.75:
		notes = append(notes, Power)
	}
	return scale, notes, nil
}

// pair is the two frames in block means, electrons a pixel.
type pair struct {
	atoms, light []float64
	border       []bool
	noise        float64 // read noise of a block mean, rms electrons
	pixels       float64 // in a block
}

func (n *Night) pairBlocks(a, l *litFrame) *pair {
	side := min(8, n.win.width, n.win.height)
	w, h := n.win.width/side, n.win.height/side
	p := &pair{
		atoms: blockMeans(a.pix, n.win.width, side), light: blockMeans(l.pix, n.win.width, side),
		border: make([]bool, w*h), noise: n.Camera.ReadNoise / float64(side), pixels: float64(side * side),
	}
	for i := range p.border {
		x, y := i%w, i/w
		p.border[i] = min(x, w-1-x)*8 < w || min(y, h-1-y)*8 < h
	}
	return p
}

// blockMeans averages whole blocks of side x side pixels, row by row.
func blockMeans(pix []float64, width, side int) []float64 {
	w, h := width/side, len(pix)/width/side
	out := make([]float64, w*h)
	for y := range h * side {
		row := pix[y*width:]
		for b := range w {
			sum := 0.0
			for _, v := range row[b*side : (b+1)*side] {
				sum += v
			}
			out[y/side*w+b] += sum
		}
	}
	for i := range out {
		out[i] /= float64(side * side)
	}
	return out
}

func quantile(v []float64, q float64) float64 {
	s := slices.Sorted(slices.Values(v))
	return s[int(q*float64(len(s)-1))]
}

// borderRatio is the atoms frame over the light frame, summed over those blocks of the
// border that lie within five standard deviations and a tenth of the median ratio; 1
// where the border holds too little light to tell one percent.
func (p *pair) borderRatio() float64 {
	var ratios []float64
	for i, b := range p.border {
		if b && p.light[i] > 3*p.noise {
			ratios = append(ratios, p.atoms[i]/p.light[i])
		}
	}
	typical := median(ratios)
	atoms, light := 0.0, 0.0
	for i, b := range p.border {
		if !b {
			continue
		}
		a, l := p.atoms[i], p.light[i]
		sigma := math.Sqrt((max(a, 0)+typical*typical*max(l, 0))/p.pixels + (1+typical*typical)*p.noise*p.noise)
		if math.Abs(a-typical*l) <= 5*sigma+0.1*math.Abs(typical*l) {
			atoms += a * p.pixels
			light += l * p.pixels
		}
	}
	if !(atoms > 0) || light < 1e4 {
		return 1
	}
	return atoms / light
}

// contrast sums the relative difference of the frames over the blocks where the atoms
// frame lies beyond noise and fringes above (risen, and how many blocks) and below
// (fallen) the scaled light frame. Atoms make it fall; where it only rises the frames
// are exchanged.
func (p *pair) contrast(scale float64) (risen, fallen float64, blocks int) {
	limit := max(4*p.fringes(scale), 0.1)
	for i := range p.atoms {
		switch d, sigma := p.difference(i, scale); {
		case d > max(limit, 6*sigma):
			risen += d
			blocks++
		case d < -max(limit, 6*sigma):
			fallen -= d
		}
	}
	return risen, fallen, blocks
}

// difference is that between the frames in block i over the larger of the two, and its
// noise.
func (p *pair) difference(i int, scale float64) (d, sigma float64) {
	a, l := p.atoms[i], scale*p.light[i]
	sigma = math.Sqrt((max(a, 0)+scale*max(l, 0))/p.pixels + (1+scale*scale)*p.noise*p.noise)
	level := max(a, l, sigma)
	return (a - l) / level, sigma / level
}

// fringes is the spread of the difference over those blocks of the border that are bright
// enough to show more than noise.
func (p *pair) fringes(scale float64) float64 {
	var edge []float64
	for i, b := range p.border {
		if d, sigma := p.difference(i, scale); b && sigma < 0.05 {
			edge = append(edge, math.Abs(d))
		}
	}
	return madToSigma * median(edge)
}
