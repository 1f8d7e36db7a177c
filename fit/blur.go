package fit

import "math"

// blurTaps returns the taps 0..r of a symmetric kernel of variance v (in pixels of its grid):
// samples of a gaussian, or for a narrow one five taps with its second and fourth moment.
func blurTaps(dst []float64, v float64) []float64 {
	if v == 0 {
		return append(dst[:0], 1)
	}
	if v < 0.5 {
		w2 := (3*v*v - v) / 24
		w1 := (v - 8*w2) / 2
		return append(dst[:0], 1-2*w1-2*w2, w1, w2)
	}
	r := int(math.Ceil(4.5 * math.Sqrt(v)))
	dst = dst[:0]
	sum := 0.0
	for i := range r + 1 {
		w := math.Exp(-float64(i*i) / (2 * v))
		dst = append(dst, w)
		sum += w
		if i > 0 {
			sum += w
		}
	}
	for i := range dst {
		dst[i] /= sum
	}
	return dst
}
