package synth

import "math"

// blurReach is where the gaussian is cut, in rms: beyond lie 6e-7 of the light.
const blurReach = 5

// spread returns the part of the light of a point source, blurred by a gaussian of the
// given rms, that a pixel collects, for sources at the centres of the cells around it, q
// to the pixel: a window of q cells and a margin on either side. The weights of all
// pixels for one source add up to one, so that light is neither made nor lost.
func spread(q int, rms float64) []float64 {
	margin := int(math.Ceil(blurReach * rms * float64(q)))
	taps := make([]float64, q+2*margin)
	sum := 0.0
	for i := range taps {
		d := cellAt(i-margin, q)
		taps[i] = caught(d, rms)
		sum += taps[i]
	}
	for i := range taps {
		taps[i] /= sum
	}
	return taps
}

// caught returns the part of a gaussian line source at distance d from the pixel's
// centre that falls within ±1/2.
func caught(d, rms float64) float64 {
	if rms == 0 {
		if math.Abs(d) < 0.5 {
			return 1
		}
		return 0
	}
	w := rms * math.Sqrt2
	return (math.Erf((0.5-d)/w) + math.Erf((0.5+d)/w)) / 2
}

// gather collects a row of cells into pixels; dst gets (len(row) − len(taps))/q + 1 values.
func gather(dst, row, taps []float64, q int) []float64 {
	for i := range dst {
		sum := 0.0
		for k, t := range taps {
			sum += t * row[i*q+k]
		}
		dst[i] = sum
	}
	return dst
}

// stack collects gathered lines into rows of pixels.
func stack(lines [][]float64, height int, taps []float64, q int) []float64 {
	width := len(lines[0])
	out := make([]float64, width*height)
	for j := range height {
		row := out[j*width : (j+1)*width]
		for k, t := range taps {
			for i, v := range lines[j*q+k] {
				row[i] += t * v
			}
		}
	}
	return out
}
