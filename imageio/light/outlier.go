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
	judge := func(x, y int) {
		if i := y*width + x; !bad[i] && standsOut(pix, base, width, x, y, readVar, holes, bad) {
			found = append(found, i)
		}
	}
	for y := range height {
		judge(0, y)
		if y == 0 || y == height-1 {
			for x := 1; x < width-1; x++ {
				judge(x, y)
			}
		} else {
			suspects(pix[(y-1)*width:(y+2)*width], width, readVar, holes, func(x int) { judge(x, y) })
		}
		judge(width-1, y)
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

// suspects visits the pixels inside the middle one of three rows that a cheap test does not
// let pass, as it does nearly all: an outlier differs by more than the noise part of the
// allowance from the lowest of its four next neighbours, or, a hole, from the highest. Before
// that, none does that differs from each by less than the noise of a level that no neighbour is
// below.
func suspects(rows []float64, width int, readVar float64, holes bool, visit func(x int)) {
	above, row, below := rows[:width], rows[width:2*width], rows[2*width:3*width]
	for x := 1; x < len(row)-1; x++ {
		v, left, right, up, down := row[x], row[x-1], row[x+1], above[x], below[x]
		most := math.Float64frombits(max(size(v-left), size(v-right), size(v-up), size(v-down)))
		if most*most <= spikeSigmas*spikeSigmas*(v-most+readVar) {
			continue
		}
		low, high := min(left, right, up, down), max(left, right, up, down)
		if beyond(v-low, low, readVar) || holes && beyond(high-v, v, readVar) {
			visit(x)
		}
	}
}

// size are the bits of |x|, which are in the order of numbers.
func size(x float64) uint64 { return math.Float64bits(x) &^ (1 << 63) }

// beyond compares a difference upwards with the noise part of the allowance at a level.
func beyond(d, level, readVar float64) bool {
	return d > 0 && d*d > spikeSigmas*spikeSigmas*(max(level, 0)+readVar)
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

// median orders its argument as far as it must and returns its middle, 0 for nothing.
func median(v []float64) float64 {
	if len(v) == 0 {
		return 0
	}
	high := nth(v, len(v)/2)
	if len(v)%2 == 1 {
		return high
	}
	return (slices.Max(v[:len(v)/2]) + high) / 2
}

// nth returns the value of rank k, from 0, and leaves no higher one before it and no lower
// one after it.
func nth(v []float64, k int) float64 {
	lo, hi := 0, len(v)-1
	for hi-lo > 12 {
		a, b, c := v[lo], v[(lo+hi)/2], v[hi]
		pivot := max(min(a, b), min(max(a, b), c))
		i, j := lo, hi
		for i <= j {
			for v[i] < pivot {
				i++
			}
			for v[j] > pivot {
				j--
			}
			if i <= j {
				v[i], v[j] = v[j], v[i]
				i++
				j--
			}
		}
		switch {
		case k <= j:
			hi = j
		case k >= i:
			lo = i
		default:
			return v[k]
		}
	}
	slices.Sort(v[lo : hi+1])
	return v[k]
}

// smooth returns the mean over three by three pixels, never below floor.
func smooth(pix []float64, width int, floor float64) []float64 {
	height := len(pix) / width
	out := make([]float64, len(pix))
	column := make([]float64, width)
	for y := range height {
		top, end := max(y-1, 0), min(y+1, height-1)
		copy(column, pix[top*width:])
		for v := top + 1; v <= end; v++ {
			for x, p := range pix[v*width : (v+1)*width] {
				column[x] += p
			}
		}
		rows := float64(end - top + 1)
		row, last := out[y*width:(y+1)*width], width-1
		row[0] = max((column[0]+column[1])/(2*rows), floor)
		for x := 1; x < last; x++ {
			row[x] = max((column[x-1]+column[x]+column[x+1])/(3*rows), floor)
		}
		row[last] = max((column[last-1]+column[last])/(2*rows), floor)
	}
	return out
}
