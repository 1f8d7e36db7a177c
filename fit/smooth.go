package fit

import "gonum.org/v1/gonum/stat"

// smoothing is the half-width of the box that takes the noise out of the light: two pixels where
// counts are few, one where fringes of some pixels are worth more than the noise.
func smoothing(light []float64) int {
	const many = 200
	if stat.Mean(light, nil) > many {
		return 1
	}
	return 2
}

// smoothLight fills in the box mean of half-width r over the good pixels of the light; a
// pixel with no good neighbour keeps its value.
func (l *level) smoothLight(r int) {
	sum, number := &l.own.sheets[0], &l.own.sheets[1]
	sum.size(l.w, l.h)
	number.size(l.w, l.h)
	for j := range l.h {
		a, b := sum.row(j)[sheetMargin:], number.row(j)[sheetMargin:]
		light := l.light[j*l.w : (j+1)*l.w]
		for i, c := range l.count[j*l.w : (j+1)*l.w] {
			a[i], b[i] = c*light[i], c
		}
	}
	sum.empty()
	number.empty()
	ones := []float64{1, 1, 1}[:r+1]
	k, n := bestKernels(), groups(l.w)
	s, c, scratch := make([]float64, n), make([]float64, n), make([]float64, sum.stride+kernelLanes)
	for j := range l.h {
		sum.smear(k, s, j, ones, scratch)
		number.smear(k, c, j, ones, scratch)
		dst := l.smooth[j*l.w : (j+1)*l.w]
		copy(dst, l.light[j*l.w:])
		for i := range dst {
			if c[i] > 0 {
				dst[i] = s[i] / c[i]
			}
		}
	}
}

// setBeam estimates the light before the optics blurred it by a variance of v px²: the reference
// smoothed a little against its noise, sharpened by −v/2 of its curvature, and never below a
// fifth of its surroundings.
func (l *level) setBeam(v float64) {
	half := 0.5 * v / float64(l.bin*l.bin)
	mean, soft := &l.own.sheets[0], &l.own.sheets[1]
	mean.size(l.w, l.h)
	soft.size(l.w, l.h)
	for j := range l.h {
		row, smooth := mean.row(j)[sheetMargin:], l.smooth[j*l.w:]
		light := l.light[j*l.w:]
		for i, c := range l.count[j*l.w : (j+1)*l.w] {
			if row[i] = smooth[i]; c > 0 {
				row[i] = light[i] / c
			}
		}
	}
	mean.extend()
	k, n := bestKernels(), groups(l.w)
	scratch := make([]float64, mean.stride+kernelLanes)
	for j := range l.h {
		mean.smear(k, soft.row(j)[sheetMargin:sheetMargin+n], j, []float64{0.5, 0.25}, scratch)
	}
	soft.extend()
	l.own.beam = growTo(l.own.beam, l.w*l.h)
	l.beam = l.own.beam
	for j := range l.h {
		up, row, down := soft.row(j - 1)[1:], soft.row(j)[1:], soft.row(j + 1)[1:]
		dst, smooth, count := l.beam[j*l.w:(j+1)*l.w], l.smooth[j*l.w:], l.count[j*l.w:]
		for i := range dst {
			m := row[i+1]
			curve := up[i+1] + down[i+1] + row[i] + row[i+2] - 4*m
			least := max(0.2*smooth[i]/max(count[i], 1), 1e-6)
			dst[i] = max(m-half*curve, least)
		}
	}
}
