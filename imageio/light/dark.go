package light

import (
	"math"
	"slices"

	"fallshadow/imageio"
)

// darkSums gathers dark frames pixel by pixel, each less its own level.
type darkSums struct {
	win           window
	fullScale     float64
	n             int
	sum, squares  []float64
	lowest        []float32
	highest       []float32
	firstLevel    float64
	levels        float64 // sum over frames of the level less the first
	levelsSquared float64
	before        []float32 // the last dark less its level
	pairs         []float64 // variances of the differences of successive darks
}

func newDarkSums(w window, fullScale float64) *darkSums {
	return &darkSums{win: w, fullScale: fullScale}
}

// add takes a dark frame in, unless it is blank, saturated or not finite over more than
// one pixel in a hundred, or the one before once more (a lab may save one dark with
// every shot).
func (d *darkSums) add(f *imageio.Frame) {
	pix := d.win.crop(f)
	if !usableDark(pix, d.fullScale) {
		return
	}
	level, _, _ := clipped(pix)
	for i, v := range pix {
		if pix[i] = v - level; !finite(v) {
			pix[i] = 0
		}
	}
	if d.n == 0 {
		d.open(pix, level)
	} else if !d.compare(pix) {
		return
	}
	for i, v := range pix {
		w := float32(v)
		d.sum[i] += v
		d.squares[i] += v * v
		d.before[i] = w
		if w < d.lowest[i] {
			d.lowest[i] = w
		}
		if w > d.highest[i] {
			d.highest[i] = w
		}
	}
	d.levels += level - d.firstLevel
	d.levelsSquared += (level - d.firstLevel) * (level - d.firstLevel)
	d.n++
}

// open makes room at the first dark.
func (d *darkSums) open(pix []float64, level float64) {
	d.firstLevel = level
	d.sum, d.squares = make([]float64, len(pix)), make([]float64, len(pix))
	d.lowest, d.highest = make([]float32, len(pix)), make([]float32, len(pix))
	d.before = make([]float32, len(pix))
	for i, v := range pix {
		d.lowest[i], d.highest[i] = float32(v), float32(v)
	}
}

// compare notes the variance of the difference to the dark before, and reports whether
// there is a difference at all.
func (d *darkSums) compare(pix []float64) bool {
	difference := make([]float64, len(pix))
	differs := false
	for i, v := range pix {
		difference[i] = v - float64(d.before[i])
		differs = differs || float32(v) != d.before[i]
	}
	if differs {
		_, variance, _ := clipped(difference)
		d.pairs = append(d.pairs, variance)
	}
	return differs
}

func usableDark(pix []float64, fullScale float64) bool {
	if fullScale == 0 {
		fullScale = math.Inf(1)
	}
	wrong, low, high := 0, math.Inf(1), math.Inf(-1)
	for _, v := range pix {
		if !(v < fullScale) {
			wrong++
			continue
		}
		if v < low {
			low = v
		}
		if v > high {
			high = v
		}
	}
	return wrong*100 <= len(pix) && high > low
}

// level returns mean and standard deviation over the frames of their levels, counts.
func (d *darkSums) level() (mean, spread float64) {
	if d.n == 0 {
		return 0, 0
	}
	m := d.levels / float64(d.n)
	return d.firstLevel + m, math.Sqrt(max(d.levelsSquared/float64(d.n)-m*m, 0))
}

// noise is the rms of a pixel of one dark in counts, from the median over differences of
// successive ones.
func (d *darkSums) noise() (float64, bool) {
	if len(d.pairs) == 0 {
		return 0, false
	}
	return math.Sqrt(median(slices.Clone(d.pairs)) / 2), true
}

// master returns the mean excess of each pixel over the level, and the pixels that are
// hot (beyond six spreads of the pattern from the median of their neighbourhood) or
// restless (a variance over the night that chance gives one good pixel in a billion).
func (d *darkSums) master() (pattern []float64, bad []bool) {
	bad = make([]bool, d.win.size())
	if d.n == 0 {
		return make([]float64, d.win.size()), bad
	}
	pattern = make([]float64, len(d.sum))
	for i, s := range d.sum {
		if d.n < mastered {
			pattern[i] = s / float64(d.n)
		} else {
			pattern[i] = (s - float64(d.lowest[i]) - float64(d.highest[i])) / float64(d.n-2)
		}
	}
	d.hot(pattern, bad)
	d.restless(bad)
	return pattern, bad
}

// hot marks what stands out of the pattern. The spread of the pattern holds its own
// structure, so that a camera with uneven columns loses none of them.
func (d *darkSums) hot(pattern []float64, bad []bool) {
	flat := make([]float64, len(pattern))
	for i := range flat {
		flat[i] = pattern[i] - ringMedian(pattern, d.win.width, i)
	}
	_, spread := middle(flat)
	read, _ := d.noise()
	limit := max(6*spread, read) + 1
	for i, v := range flat {
		bad[i] = bad[i] || math.Abs(v) > limit
	}
}

// ringMedian is the median of the sixteen pixels two steps away from pixel i, as far as
// they are in the picture: a cluster of hot pixels does not hide itself.
func ringMedian(pix []float64, width, i int) float64 {
	x, y, height := i%width, i/width, len(pix)/width
	near := make([]float64, 0, 16)
	for v := max(y-2, 0); v <= min(y+2, height-1); v++ {
		for u := max(x-2, 0); u <= min(x+2, width-1); u++ {
			if max(abs(u-x), abs(v-y)) == 2 {
				near = append(near, pix[v*width+u])
			}
		}
	}
	return median(near)
}

func abs(i int) int { return max(i, -i) }

// restlessFrom is the least number of darks from which a variance tells anything.
const restlessFrom = 6

// restless marks pixels that flicker. Lowest and highest are left out, so that one
// strike in one dark does not cost the pixel; what is left is measured by the median
// over the picture. The limit is the Wilson-Hilferty form of the chi-squared quantile at
// six standard deviations, for the degrees of freedom that are left.
func (d *darkSums) restless(bad []bool) {
	if d.n < restlessFrom {
		return
	}
	left := float64(d.n - 2)
	variances := make([]float64, len(d.sum))
	for i, s := range d.sum {
		a, b := float64(d.lowest[i]), float64(d.highest[i])
		s -= a + b
		variances[i] = max(d.squares[i]-a*a-b*b-s*s/left, 0)
	}
	typical, _ := middle(variances)
	if typical == 0 {
		return
	}
	q := 2 / (9 * (left - 1))
	limit := typical * math.Pow(1-q+6*math.Sqrt(q), 3) / math.Pow(1-q, 3)
	for i, v := range variances {
		bad[i] = bad[i] || v > limit
	}
}
