package light

import (
	"math"
	"slices"
)

// Limits of an outlier among its eight neighbours: spikeSigmas standard deviations and
// spikeShare of the neighbours' level. The share allows for the crests of fine fringes
// and bright rings round a dense cloud; a plane slope of any size needs no allowance,
// because half of the neighbours lie above it.
const (
	spikeSigmas = 7
	spikeShare  = 0.15
)

// outliers marks in bad the pixels of an image, electrons, that stand above the fourth
// highest of their neighbours (with holes also below the fourth lowest) by more than
// shot noise, read noise (variance readVar) and the share allow. Pixels already bad are
// neither judged nor asked. The fourth lets two by two struck pixels be seen. With base,
// smooth and positive, neighbours are compared as fractions of it.
func outliers(pix, base []float64, width int, readVar float64, holes bool, bad []bool) {
	var found []int
	height := len(pix) / width
	for y := range height {
		for x := range width {
			i := y*width + x
			if bad[i] {
				continue
			}
			inner := x > 0 && x < width-1 && y > 0 && y < height-1
			if inner && !suspect(pix[i], pix[i-1], pix[i+1], pix[i-width], pix[i+width], readVar, holes) {
				continue
			}
			if standsOut(pix, base, width, x, y, readVar, holes, bad) {
				found = append(found, i)
			}
		}
	}
	for _, i := range found {
		bad[i] = true
	}
}

// standsOut judges one pixel by the order of its neighbours; with fewer than three of
// them it is let pass.
func standsOut(pix, base []float64, width, x, y int, readVar float64, holes bool, bad []bool) bool {
	i, height := y*width+x, len(pix)/width
	var near [8]float64
	n := 0
	for v := max(y-1, 0); v <= min(y+1, height-1); v++ {
		for u := max(x-1, 0); u <= min(x+1, width-1); u++ {
			j := v*width + u
			if j == i || bad[j] {
				continue
			}
			near[n] = pix[j]
			if base != nil {
				near[n] *= base[i] / base[j]
			}
			n++
		}
	}
	if n < 3 {
		return false
	}
	slices.Sort(near[:n])
	high, low := near[n/2], near[(n-1)/2]
	return pix[i]-high > allowance(high, readVar) || holes && low-pix[i] > allowance(low, readVar)
}

// allowance is how far from a level of v electrons a pixel may lie. The two electrons²
// keep a level read as nothing from promising a count of nothing.
func allowance(v, readVar float64) float64 {
	v = max(v, 0)
	return spikeSigmas*math.Sqrt(v+readVar+2) + spikeShare*v
}

// suspect is a cheap test that nearly every pixel fails: an outlier differs by more than
// the noise part of the allowance from the lowest of its four next neighbours, or, a
// hole, from the highest.
func suspect(v, a, b, c, d, readVar float64, holes bool) bool {
	low, high := ordered(a, b)
	low2, high2 := ordered(c, d)
	if low2 < low {
		low = low2
	}
	if high2 > high {
		high = high2
	}
	return beyond(v-low, low, readVar) || holes && beyond(high-v, v, readVar)
}

func ordered(a, b float64) (low, high float64) {
	if a < b {
		return a, b
	}
	return b, a
}

// beyond compares a difference upwards with the noise part of the allowance at a level.
func beyond(d, level, readVar float64) bool {
	if level < 0 {
		level = 0
	}
	return d > 0 && d*d > spikeSigmas*spikeSigmas*(level+readVar)
}

// fill writes into each bad pixel the median of the good ones round it, taken from the
// smallest square of up to 15 pixels that holds three; 0 where there are none. A filled
// pixel stays bad; filling keeps sums over blocks and bins smooth.
func fill(pix []float64, width int, bad []bool) {
	height := len(pix) / width
	var near []float64
	for i, b := range bad {
		if !b {
			continue
		}
		x, y := i%width, i/width
		near = near[:0]
		for r := 1; r <= 7 && len(near) < 3; r++ {
			near = near[:0]
			for v := max(y-r, 0); v <= min(y+r, height-1); v++ {
				for u := max(x-r, 0); u <= min(x+r, width-1); u++ {
					if j := v*width + u; !bad[j] {
						near = append(near, pix[j])
					}
				}
			}
		}
		pix[i] = median(near)
	}
}

// median sorts its argument and returns its middle, 0 for nothing.
func median(v []float64) float64 {
	if len(v) == 0 {
		return 0
	}
	slices.Sort(v)
	return (v[(len(v)-1)/2] + v[len(v)/2]) / 2
}

// smooth returns the mean over three by three pixels, never below floor.
func smooth(pix []float64, width int, floor float64) []float64 {
	height := len(pix) / width
	out := make([]float64, len(pix))
	column := make([]float64, width)
	for y := range height {
		clear(column)
		top, end := max(y-1, 0), min(y+1, height-1)
		for v := top; v <= end; v++ {
			for x, p := range pix[v*width : (v+1)*width] {
				column[x] += p
			}
		}
		for x := range width {
			left, right := max(x-1, 0), min(x+1, width-1)
			sum := 0.0
			for _, p := range column[left : right+1] {
				sum += p
			}
			out[y*width+x] = max(sum/float64((end-top+1)*(right-left+1)), floor)
		}
	}
	return out
}
