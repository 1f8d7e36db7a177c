package fit

import "math"

// render fills outside with κ = k T, the part of the reference that the model lets through to
// each bin of the level outside the room, and inside with that of each bin of the fine level in
// it, blurred; on linear levels with the density and its background. Both may be one slice where
// both levels are one.
func (p *problem) render(q *params, outside, inside []float64) {
	geo := p.geometry(q, p.blurOn(p.level))
	in := p.room.bounds(p.level)
	for j := range p.level.h {
		a, b := in.gap(j, p.level.w)
		p.renderRow(&geo, outside, j, 0, a)
		p.renderRow(&geo, outside, j, b, p.level.w)
	}
	if in.empty() {
		return
	}
	in = p.inside(in)
	l := p.fine
	pad, w := p.blurred(q, in, false)
	for j := in.y0; j < in.y1; j++ {
		for i := in.x0; i < in.x1; i++ {
			t := p.buf.region.images[imageT][(j-in.y0+pad)*w+i-in.x0+pad]
			if l.linear {
				inside[j*l.w+i] = t + geo.plane(l.at(i), l.at(j))
			} else {
				inside[j*l.w+i] = t * geo.scale(l.at(i), l.at(j))
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
			if p.tmpl.excess != nil {
				d *= geo.excess(p.tmpl.excess, dx, dy)
			}
		}
		if l.linear {
			dst[o] = d + geo.plane(l.at(i), y)
			continue
		}
		t, _, _ := walk.transmit(&p.law, d, k*l.probe[o])
		dst[o] = t * k
	}
}

// freeze sets the variance of the atoms frame from the model, where the problem looks: the counts
// it expects plus read noise. outside and inside are scratch of the levels' sizes.
func (p *problem) freeze(q *params, outside, inside []float64) {
	if p.level.linear {
		return
	}
	p.render(q, outside, inside)
	in := p.room.bounds(p.level)
	for j := range p.level.h {
		a, b := in.gap(j, p.level.w)
		p.level.freezeRow(outside, j, 0, a)
		p.level.freezeRow(outside, j, b, p.level.w)
	}
	in = p.inside(in)
	for j := in.y0; j < in.y1; j++ {
		p.fine.freezeRow(inside, j, in.x0, in.x1)
	}
}

func (l *level) freezeRow(kappa []float64, j, i0, i1 int) {
	for o := j*l.w + i0; o < j*l.w+i1; o++ {
		l.varAtoms[o] = math.Max(0, kappa[o]*l.smooth[o]) + l.readVariance(o)
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
