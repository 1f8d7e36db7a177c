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
