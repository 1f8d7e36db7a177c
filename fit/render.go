package fit

import "math"

// render fills outside with κ = k T, the part of the reference that the model lets through to
// each bin of the level outside the room, and inside with that of each bin of the fine level in
// it, blurred; on linear levels with the density and its background. Both may be one slice where
// both levels are one.
func (p *problem) render(q *params, outside, inside []float64) {
	geo := p.geometry(q, p.blurOn(p.level))
	in := p.room.bounds(p.level)
	f := &p.buf.forward
	f.set(p, p.level, p.level.plate, &geo)
	for j := range p.level.h {
		a, b := in.gap(j, p.level.w)
		f.line(j)
		f.render(outside[j*p.level.w:(j+1)*p.level.w], j, 0, a)
		f.render(outside[j*p.level.w:(j+1)*p.level.w], j, b, p.level.w)
	}
	if in.empty() {
		return
	}
	in = p.inside(in)
	r := &p.buf.region
	r.begin(p, in, false)
	r.paint(p, q, false)
	for j := in.y0; j < in.y1; j++ {
		row := j - in.y0
		r.transmission(row)
		r.forward.line(row + r.plate.margin)
		r.forward.scale(inside[j*p.fine.w+in.x0:j*p.fine.w+in.x1], r.plate.margin)
	}
}

// render fills columns [a,b) of dst with κ of row j.
func (f *forward) render(dst []float64, j, a, b int) {
	if a >= b {
		return
	}
	from, to := a&^(kernelLanes-1), groups(b)
	x0, x1 := f.cloud()
	x0, x1 = min(max(x0, from), to), min(max(x1, from), to)
	still := 1.0
	if f.linear {
		still = 0
	}
	for i := range f.t[from:to] {
		f.t[from+i] = still
	}
	if x0 < x1 {
		f.fill(x0, x1)
		f.carry(j, x0, x1)
	}
	f.scale(dst[a:b], a)
}

// scale fills dst with κ from the transmission from column a on.
func (f *forward) scale(dst []float64, a int) {
	plane := f.plane + float64(a)*f.tilt
	if f.linear {
		for i := range dst {
			dst[i] = f.t[a+i] + plane + float64(i)*f.tilt
		}
		return
	}
	k := math.Exp(plane)
	for i, t := range f.t[a : a+len(dst)] {
		dst[i] = t * k
		k *= f.growth
	}
}

// freeze sets the variance of the atoms frame from the model, where the problem looks: the counts
// it expects plus read noise; that of a linear level is given. outside and inside are scratch of the levels' sizes.
func (p *problem) freeze(q *params, outside, inside []float64) {
	p.render(q, outside, inside)
	p.buf.region.plate.owner = nil
	if p.level.linear {
		return
	}
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
	p, read := l.plate, l.readNoise()
	dst, smooth := p.variance[j*p.stride+i0:j*p.stride+i1], p.smooth[j*p.stride+i0:]
	for i, k := range kappa[j*l.w+i0 : j*l.w+i1] {
		dst[i] = max(0, k*smooth[i]) + read
	}
}

// readNoise is the variance of the atoms frame in a full bin beside its shot noise.
func (l *level) readNoise() float64 {
	return float64(l.bin*l.bin) * (l.noise.Read*l.noise.Read + 1e-9)
}

// freezeData sets the variance from the counts themselves, for a first guess only.
func (l *level) freezeData() {
	if l.linear {
		return
	}
	p, read := l.plate, l.readNoise()
	for j := range l.h {
		for i := range l.w {
			o, to := j*l.w+i, j*p.stride+i
			p.variance[to] = math.Max(l.atoms[o]*l.full(o), 0.05*p.smooth[to]) + read
		}
	}
}

// residuals fills dst with the residual of each bin in standard deviations, NaN where it does
// not count, from the κ in kappa.
func (p *problem) residuals(kappa, dst []float64) {
	l := p.level
	for j := range l.h {
		from, to := j*l.w, (j+1)*l.w
		if l.linear {
			for o := from; o < to; o++ {
				dst[o] = (l.atoms[o] - kappa[o]) * math.Sqrt(l.count[o]) / l.sigma
			}
		} else {
			l.residualRow(kappa[from:to], dst[from:to], j)
		}
		for i, c := range l.count[from:to] {
			if c == 0 {
				dst[from+i] = math.NaN()
			}
		}
	}
}

// residualRow fills in row j: (A − κ L)/√V in standard deviations. Its square is the fit to both
// frames with the true light profiled out: V = v_A + κ² v_L + (1−κ)² v_D with v_A frozen.
func (l *level) residualRow(kappa, dst []float64, j int) {
	p := l.plate
	pixels := float64(l.bin * l.bin)
	shot, read, dark := l.noise.LightShot, pixels*l.noise.LightRead, pixels*l.noise.Dark
	from := j * p.stride
	variance, smooth := p.variance[from:from+l.w], p.smooth[from:from+l.w]
	for i, k := range kappa {
		o := j*l.w + i
		v := variance[i] + k*k*(shot*smooth[i]+read) + (1-k)*(1-k)*dark
		dst[i] = (l.atoms[o] - k*l.light[o]) / math.Sqrt(v*l.share(o))
	}
}
