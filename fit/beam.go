package fit

// beamAhead is how many bins beyond the box that is asked for the beam is estimated: the next
// room is seldom quite the same.
const beamAhead = 8

// setBeam estimates, in the bins of a box, the light before the optics blurred it by a variance
// of v px²: the reference smoothed a little against its noise, sharpened by −v/2 of its curvature,
// and never below a fifth of its surroundings.
func (l *level) setBeam(v float64, b box) {
	b = l.clip(b, 0)
	if b.x0 >= l.lit.x0 && b.x1 <= l.lit.x1 && b.y0 >= l.lit.y0 && b.y1 <= l.lit.y1 {
		return
	}
	b = l.clip(b, beamAhead)
	l.lit = b
	l.own.beam = growTo(l.own.beam, l.w*l.h)
	l.beam = l.own.beam
	in := l.clip(b, sheetMargin)
	soft := l.softLight(in)
	half := 0.5 * v / float64(l.bin*l.bin)
	for j := b.y0; j < b.y1; j++ {
		from := sheetMargin - 1 + b.x0 - in.x0
		up, row, down := soft.row(j - 1 - in.y0)[from:], soft.row(j - in.y0)[from:], soft.row(j + 1 - in.y0)[from:]
		o := j*l.w + b.x0
		dst, smooth, count := l.beam[o:o+b.x1-b.x0], l.smooth[o:], l.count[o:]
		for i := range dst {
			m := row[i+1]
			curve := up[i+1] + down[i+1] + row[i] + row[i+2] - 4*m
			least := max(0.2*smooth[i]/max(count[i], 1), 1e-6)
			dst[i] = max(m-half*curve, least)
		}
	}
}

// clip is a box grown by n bins on each side, inside the level.
func (l *level) clip(b box, n int) box {
	return box{max(b.x0-n, 0), max(b.y0-n, 0), min(b.x1+n, l.w), min(b.y1+n, l.h)}
}

// softLight is the mean light a pixel in a box, every bin (1, 2, 1)/4 of its neighbours along
// columns and rows.
func (l *level) softLight(in box) *sheet {
	mean, soft := &l.own.sheets[0], &l.own.sheets[1]
	w, h := in.x1-in.x0, in.y1-in.y0
	mean.size(w, h)
	soft.size(w, h)
	for j := range h {
		o := (in.y0+j)*l.w + in.x0
		row, smooth, light := mean.row(j)[sheetMargin:], l.smooth[o:o+w], l.light[o:o+w]
		for i, c := range l.count[o : o+w] {
			if row[i] = smooth[i]; c > 0 {
				row[i] = light[i] / c
			}
		}
	}
	mean.extend()
	k, n := bestKernels(), groups(w)
	scratch := make([]float64, mean.stride+kernelLanes)
	for j := range h {
		mean.smear(k, soft.row(j)[sheetMargin:sheetMargin+n], j, []float64{0.5, 0.25}, scratch)
	}
	soft.extend()
	return soft
}
