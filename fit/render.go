package fit

import "math"

// render fills dst with κ = k T, the part of the reference that the model lets through to
// each bin of the level, blurred inside the room; or on a linear level with the density and
// its background.
func (p *problem) render(q *params, dst []float64) {
	geo := p.geometry(q, p.blur2)
	in := p.room.bounds(p.level)
	l := p.level
	for j := range l.h {
		if j < in.y0 || j >= in.y1 {
			p.renderRow(&geo, dst, j, 0, l.w)
			continue
		}
		p.renderRow(&geo, dst, j, 0, in.x0)
		p.renderRow(&geo, dst, j, in.x1, l.w)
	}
	if in.x1 <= in.x0 {
		return
	}
	b := &p.buf.region
	bin := float64(l.bin)
	b.taps = blurTaps(b.taps, p.blur2/(bin*bin))
	pad := len(b.taps) - 1
	w, h := in.x1-in.x0+2*pad, in.y1-in.y0+2*pad
	b.size(w*h, max(w, h))
	sharp := p.geometry(q, 0)
	p.paint(q, &sharp, in.x0-pad, in.y0-pad, w, h, false)
	if pad > 0 {
		b.blur(b.images[imageT], w, h)
	}
	for j := in.y0; j < in.y1; j++ {
		for i := in.x0; i < in.x1; i++ {
			t := b.images[imageT][(j-in.y0+pad)*w+i-in.x0+pad]
			if l.linear {
				dst[j*l.w+i] = t + geo.plane(l.at(i), l.at(j))
			} else {
				dst[j*l.w+i] = t * geo.scale(l.at(i), l.at(j))
			}
		}
	}
}

// renderRow fills the pixels [i0,i1) of row j, outside the room.
func (p *problem) renderRow(geo *geometry, dst []float64, j, i0, i1 int) {
	l := p.level
	y := l.at(j)
	dy := y - geo.y0
	k, kStep := geo.scale(l.at(i0), y), math.Exp(geo.light[1]*float64(l.bin)*geo.iw)
	var walk walk
	for i := i0; i < i1; i, k = i+1, k*kStep {
		o := j*l.w + i
		dx := l.at(i) - geo.x0
		tau := dx*(0.5*geo.axx*dx+geo.axy*dy) + 0.5*geo.ayy*dy*dy + geo.alpha
		d := 0.0
		if tau < farTau+geo.alpha {
			g, _ := boseFast(tau)
			d = geo.ampGrown * g * geo.norm
		}
		if l.linear {
			dst[o] = d + geo.plane(l.at(i), y)
			continue
		}
		t, _, _ := walk.transmit(&p.law, d, k*l.probe[o])
		dst[o] = t * k
	}
}

// freeze sets the variance of the atoms frame from the model: the counts it expects plus
// read noise. dst is scratch of the level's size.
func (p *problem) freeze(q *params, dst []float64) {
	l := p.level
	if l.linear {
		return
	}
	p.render(q, dst)
	for o, k := range dst[:l.w*l.h] {
		l.varAtoms[o] = math.Max(0, k*l.smooth[o]) + l.readVariance(o)
	}
}

// freezeData sets the variance from the counts themselves, for a first guess only.
func (l *level) freezeData() {
	if l.linear {
		return
	}
	for o, a := range l.atoms {
		l.varAtoms[o] = math.Max(a, 0.05*l.smooth[o]) + l.readVariance(o)
	}
}

// residuals fills dst with the residual of each bin in standard deviations, NaN where it does
// not count, from the κ in kappa.
func (p *problem) residuals(kappa, dst []float64) {
	l := p.level
	for o, k := range kappa[:l.w*l.h] {
		switch {
		case l.count[o] == 0:
			dst[o] = math.NaN()
		case l.linear:
			dst[o] = (l.atoms[o] - k) * math.Sqrt(l.count[o]) / l.sigma
		default:
			r, iv, _ := l.slope(o, k)
			dst[o] = r * math.Sqrt(iv)
		}
	}
}
