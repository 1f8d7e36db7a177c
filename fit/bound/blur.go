package bound

import "math"

// gaussianTaps returns the weights k_0 ... k_n of a symmetric kernel on the grid with the
// variance v in px²: samples of a gaussian, or below 0.4 px², where samples would miss the
// variance by more than one percent, the three taps that have it.
func gaussianTaps(v float64) []float64 {
	if v < 0.4 {
		return []float64{1 - v, v / 2}
	}
	taps := make([]float64, 2+int(6*math.Sqrt(v)))
	sum := 0.0
	for i := range taps {
		taps[i] = math.Exp(-float64(i*i) / (2 * v))
		sum += 2 * taps[i]
	}
	sum -= taps[0]
	for i := range taps {
		taps[i] /= sum
	}
	return taps
}

// convolve applies the kernel along rows and columns of a w×h picture in place; beyond the
// edge the picture goes on as it ends. scratch has the size of the picture.
func convolve(img, scratch []float64, w, h int, taps []float64) {
	for j := range h {
		smooth(scratch[j*w:], img[j*w:], w, 1, taps)
	}
	for i := range w {
		smooth(img[i:], scratch[i:], h, w, taps)
	}
}

// smooth convolves n values that lie stride apart.
func smooth(dst, src []float64, n, stride int, taps []float64) {
	for i := range n {
		sum := taps[0] * src[i*stride]
		for k := 1; k < len(taps); k++ {
			sum += taps[k] * (src[max(i-k, 0)*stride] + src[min(i+k, n-1)*stride])
		}
		dst[i*stride] = sum
	}
}
