package fit

// roomPlate is the part of the fine level in a room with a margin for the blur, and the light
// that weighs the blur. The optics blur the light that atoms let through, I T, while the
// reference holds I blurred: what lets the reference through is blur(I T)/blur(I), which
// differs from blur(T) where light and cloud both change.
type roomPlate struct {
	plate
	owner   *problem // whom it was made for
	margin  int
	inner   int // columns inside the margin, in whole groups
	taps    []float64
	beam    []float64 // I over the plate, nil on a linear level
	inverse []float64 // 1/blur(I) inside the margin, inner columns a row
	rows    []float64 // of I smeared along them
}

// make fills the plate from a box of the level. Beyond the picture the light is that of the
// nearest pixel.
func (r *roomPlate) make(p *problem, in box, kernels *kernelSet) {
	l := p.fine
	r.owner = p
	r.taps = blurTaps(r.taps, p.blurOn(l)/float64(l.bin*l.bin))
	r.margin = len(r.taps) - 1
	r.inner = groups(in.x1 - in.x0)
	r.size(r.inner+2*r.margin, in.y1-in.y0+2*r.margin)
	x0, y0 := in.x0-r.margin, in.y0-r.margin
	r.x, r.y, r.bin = l.at(x0), l.at(y0), float64(l.bin)
	for j := range r.h {
		r.fillRow(l, in, j, min(max(y0+j, 0), l.h-1), x0)
	}
	if r.beam = r.beam[:0]; !l.linear {
		r.weigh(p, x0, y0, kernels)
	}
}

// fillRow fills row j of the plate from that of the level: counts in the box, light everywhere.
func (r *roomPlate) fillRow(l *level, in box, j, row, x0 int) {
	to, from := j*r.stride, row*l.plate.stride
	for i := range r.w {
		at := min(max(x0+i, 0), l.w-1)
		r.smooth[to+i] = l.plate.smooth[from+at]
		r.atoms[to+i], r.light[to+i], r.variance[to+i] = 0, 0, 1
	}
	if j < r.margin || j >= r.h-r.margin {
		return
	}
	a, b := to+r.margin, to+r.margin+in.x1-in.x0
	for i := in.x0; i < in.x1; i++ { // the level's own plate may have a hole here
		o := row*l.w + i
		r.atoms[a+i-in.x0], r.light[a+i-in.x0] = l.counts(o)
	}
	copy(r.variance[a:b], l.plate.variance[from+in.x0:])
}

// weigh fills in the light that weighs the blur.
func (r *roomPlate) weigh(p *problem, x0, y0 int, kernels *kernelSet) {
	l := p.fine
	l.setBeam(p.blur*p.blur, box{x0, y0, x0 + r.w, y0 + r.h})
	r.beam = growTo(r.beam, r.stride*r.h)
	for j := range r.h {
		row := min(max(y0+j, 0), l.h-1) * l.w
		for i := range r.stride {
			r.beam[j*r.stride+i] = l.beam[row+min(max(x0+min(i, r.w-1), 0), l.w-1)]
		}
	}
	r.rows = growTo(r.rows, r.inner*r.h)
	rows := r.rows
	for j := range r.h {
		kernels.smear(rows[j*r.inner:(j+1)*r.inner], r.beam, j*r.stride+r.margin, 1, r.taps)
	}
	r.inverse = growTo(r.inverse, r.inner*(r.h-2*r.margin))
	for j := range r.h - 2*r.margin {
		to := r.inverse[j*r.inner : (j+1)*r.inner]
		kernels.smear(to, rows, (j+r.margin)*r.inner, r.inner, r.taps)
		for i, v := range to {
			to[i] = 1 / v
		}
	}
}
