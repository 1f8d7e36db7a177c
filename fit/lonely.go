package fit

import (
	"math"
	"sort"
)

// strike leaves out single pixels that stand alone: more than struck standard deviations from the
// median of their neighbours, none of which is half as far from it. A cloud of any size that
// a fit can measure covers neighbours, too.
func (l *level) strike() {
	shot, rest := 1+l.noise.LightShot, l.noise.Read*l.noise.Read+1e-9+l.noise.LightRead
	for j := 1; j+1 < l.h; j++ {
		atoms, light := l.atoms[j*l.w:(j+1)*l.w], l.light[j*l.w:(j+1)*l.w]
		smooth, count := l.smooth[j*l.w:(j+1)*l.w], l.count[j*l.w:(j+1)*l.w]
		before, v := atoms[0]-light[0], atoms[1]-light[1]
		for i := 1; i+1 < l.w; i++ {
			next, lit := atoms[i+1]-light[i+1], smooth[i]
			if lit < 0 {
				lit = 0
			}
			most := struck * struck * (lit*shot + rest)
			// Most pixels are like those beside them: no median for them.
			a, b := v-before, v-next
			if a*a >= most && b*b >= most && count[i] > 0 && l.alone(j*l.w+i, math.Sqrt(most)) {
				count[i] = 0
			}
			before, v = v, next
		}
	}
}

const struck = 8

// alone says whether the median of the neighbours of pixel o is farther than most from it.
func (l *level) alone(o int, most float64) bool {
	r := func(o int) float64 { return l.atoms[o] - l.light[o] }
	near := [8]float64{r(o - l.w - 1), r(o - l.w), r(o - l.w + 1), r(o - 1), r(o + 1), r(o + l.w - 1), r(o + l.w), r(o + l.w + 1)}
	sort.Float64s(near[:])
	median := 0.5 * (near[3] + near[4])
	far := math.Max(near[7]-median, median-near[0])
	d := math.Abs(r(o) - median)
	return d > most && far < 0.5*d
}
