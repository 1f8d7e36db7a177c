package light

import "math"

// madToSigma is the standard deviation of a normal law over its median absolute deviation.
const madToSigma = 1.4826

// middle returns the median of at most 4096 evenly spread finite values and 1.4826 times their
// median absolute deviation.
func middle(v []float64) (centre, spread float64) {
	step := max(len(v)/4096, 1)
	if step > 1 && step%2 == 0 {
		step++ // an odd step does not stay in one column of a picture of even width
	}
	some := make([]float64, 0, len(v)/step+1)
	for i := 0; i < len(v); i += step {
		if finite(v[i]) {
			some = append(some, v[i])
		}
	}
	centre = median(some)
	for i, x := range some {
		some[i] = math.Abs(x - centre)
	}
	return centre, madToSigma * median(some)
}

// clipped returns mean and variance of the values within six spreads (plus one count,
// for digitised values of little noise) of the middle, and how many they are.
func clipped(v []float64) (mean, variance float64, n int) {
	centre, spread := middle(v)
	limit := 6*spread + 1
	sum, squares := 0.0, 0.0
	for _, x := range v {
		if d := x - centre; math.Abs(d) <= limit {
			sum += d
			squares += d * d
			n++
		}
	}
	if n == 0 {
		return centre, 0, 0
	}
	m := sum / float64(n)
	return centre + m, squares/float64(n) - m*m, n
}

// finite reports whether x is neither infinite nor NaN.
func finite(x float64) bool { return x-x == 0 }
