package fit

import "math"

// flatten takes off the plane through the medians of the outer eighths of a map on its four sides:
// far from a small cloud the light frame need not have the slope of the atoms frame.
func flatten(v []float64, w, h int) {
	bx, by := max(1, w/8), max(1, h/8)
	side := func(x0, x1, y0, y1 int) float64 {
		var list []float64
		for j := y0; j < y1; j++ {
			list = append(list, v[j*w+x0:j*w+x1]...)
		}
		return medianOf(list)
	}
	left, right := side(0, bx, 0, h), side(w-bx, w, 0, h)
	up, down := side(0, w, 0, by), side(0, w, h-by, h)
	tx, ty := (right-left)/float64(max(w-bx, 1)), (down-up)/float64(max(h-by, 1))
	base := (left + right + up + down) / 4
	for j := range h {
		for i := range w {
			v[j*w+i] -= base + tx*(float64(i)-float64(w-1)/2) + ty*(float64(j)-float64(h-1)/2)
		}
	}
}

// tileSpread is a robust standard deviation of a bin as the sums over tiles of 2r+1 bins show it:
// above that of white noise where fringes or the beam stand in the picture.
func tileSpread(sum []float64, r, w, h int) float64 {
	side := 2*r + 1
	var list []float64
	for y := 0; y+side <= h; y += side {
		for x := 0; x+side <= w; x += side {
			s := sum[(y+side)*(w+1)+x+side] - sum[y*(w+1)+x+side] - sum[(y+side)*(w+1)+x] + sum[y*(w+1)+x]
			list = append(list, math.Abs(s))
		}
	}
	if len(list) < 9 {
		return math.Inf(1) // too few to say that one of them stands out
	}
	return medianOf(list) / 0.6745 / float64(side)
}
