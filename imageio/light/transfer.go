package light

import (
	"context"
	"fmt"
	"iter"
	"math"

	"fallshadow/imageio"
)

// Transfer is the photon-transfer calibration of a camera: the variance of a pixel
// against its mean, var = (read/g)² + mean/g in counts², with g electrons per count.
// Errors are one standard deviation from the scatter that normal noise gives.
type Transfer struct {
	ElectronsPerCount, ElectronsPerCountErr float64
	ReadNoise, ReadNoiseErr                 float64 // rms electrons
	Pairs                                   int     // of successive shots
	Points                                  []TransferPoint
}

// TransferPoint is the mean variance at one level of light. N is the number of
// independent values in it.
type TransferPoint struct{ Mean, Variance, N float64 } // counts, counts², 1

// Variance returns the variance of a pixel at the level of a point, counts², by the straight
// line, and the standard deviation with which the mean over the point's values scatters
// about it.
func (t *Transfer) Variance(p TransferPoint) (v, err float64) {
	v = math.Pow(t.ReadNoise/t.ElectronsPerCount, 2) + p.Mean/t.ElectronsPerCount
	return v, v * math.Sqrt(2/p.N)
}

// PhotonTransfer measures gain and read noise from the light and dark frames of a night,
// in natural order; camera gives full scale and region, its gain and noise are not used.
//
// The light frames of successive shots are subtracted at equal power and passed through
// the kernel (1,-2,1)x(1,-2,1), which takes planes, fixed pattern and moving fringes
// coarser than about eight pixels out and multiplies white variance by 36 (1 + s²), s
// the ratio of powers; likewise the darks. Squares are averaged over tiles of 16x16
// pixels, values beyond five spreads left out, and gathered by level in eighths of an
// octave. A straight line, weighted by its own prediction, goes through the levels, the
// darks at zero. Shots without a dark of their own take the night's: those that come
// before them, each a Raw that holds nothing else; of these at least two are needed. The
// method is common practice (photon transfer). It fails with fewer than two usable shots,
// or where the light spans too little to give a slope.
func PhotonTransfer(ctx context.Context, camera Camera, raws iter.Seq[*imageio.Raw]) (*Transfer, error) {
	camera.ElectronsPerCount = 0
	g, err := gather(ctx, camera, raws)
	if err != nil {
		return nil, err
	}
	return g.transfer.fit()
}

const (
	transferSide   = 16
	transferLevels = 8   // an octave
	transferLowest = -16 // log2 counts times transferLevels of the first level
	transferBins   = 24 * transferLevels
	// kernelSquares is the sum of squares of (1,-2,1)x(1,-2,1).
	kernelSquares = 36
	// kernelOverlap is the sum of the squared correlations between kernel values, by
	// which neighbours count for less than independent ones: (1 + 2(16+1)/36)².
	kernelOverlap = (70.0 / 36) * (70.0 / 36)
)

// transferSums gathers squared differences by level. Points hold sums until the fit:
// Mean and Variance times N.
type transferSums struct {
	win         window
	fullScale   float64
	light, dark []float64 // of the shot before, counts
	mean        float64   // of the light before, above its dark
	lone        []float64 // the last of the night's darks
	pairs       int
	bins        [transferBins]TransferPoint
	darks       TransferPoint // of successive shots
	lones       TransferPoint // of the night's
}

func newTransferSums(w window, fullScale float64) *transferSums {
	return &transferSums{win: w, fullScale: fullScale}
}

// add takes in a shot that has a light and a dark frame, or one of the night's darks.
func (t *transferSums) add(raw *imageio.Raw) {
	l, d := raw.Frames[imageio.Light], raw.Frames[imageio.DarkOfLight]
	if d == nil {
		d = raw.Frames[imageio.Dark]
	}
	var dark []float64
	switch {
	case fits(d, t.win):
		dark = t.win.crop(d)
	case d == nil && l != nil:
		dark = t.lone
	}
	if dark == nil || !usableDark(dark, t.fullScale) {
		return
	}
	if l == nil {
		t.addLone(dark)
		return
	}
	if !fits(l, t.win) {
		return
	}
	light := t.win.crop(l)
	level, _, _ := clipped(dark)
	bright, _, _ := clipped(light)
	mean := bright - level
	if !(mean > 0) {
		return
	}
	if t.light != nil {
		t.pair(light, dark, mean/t.mean)
		t.pairs++
	}
	t.light, t.dark, t.mean = light, dark, mean
}

// addLone takes in the difference between this one of the night's darks and the one before.
func (t *transferSums) addLone(dark []float64) {
	if t.lone != nil {
		darks := make([]float64, len(dark))
		for i, v := range dark {
			darks[i] = v - t.lone[i]
		}
		for x, y := range t.tiles() {
			t.lones.take(0, 2, darks, t.win.width, x, y)
		}
	}
	t.lone = dark
}

// tiles yields the corners of the tiles.
func (t *transferSums) tiles() iter.Seq2[int, int] {
	return func(yield func(x, y int) bool) {
		for y := 1; y+transferSide < t.win.height; y += transferSide {
			for x := 1; x+transferSide < t.win.width; x += transferSide {
				if !yield(x, y) {
					return
				}
			}
		}
	}
}

// pair takes in the difference between this shot and power times the one before. The
// darks are not subtracted from the lights: they would only add noise, and the kernel
// takes their level out.
func (t *transferSums) pair(light, dark []float64, power float64) {
	lights, darks := make([]float64, len(light)), make([]float64, len(light))
	for i, v := range light {
		lights[i] = v - power*t.light[i]
		darks[i] = dark[i] - t.dark[i]
		if t.fullScale > 0 && max(v, t.light[i]) >= t.fullScale {
			lights[i] = math.NaN()
		}
	}
	both := 1 + power*power
	width := t.win.width
	for x, y := range t.tiles() {
		now, before := tileMean(light, dark, width, x, y), tileMean(t.light, t.dark, width, x, y)
		t.level((now+power*power*before)/both).take((now+power*power*before)/both, both, lights, width, x, y)
		if &dark[0] != &t.dark[0] {
			t.darks.take(0, 2, darks, width, x, y)
		}
	}
}

// level is the bin of a mean of so many counts.
func (t *transferSums) level(mean float64) *TransferPoint {
	i := 0
	if mean > 0 {
		i = int(math.Floor(transferLevels*math.Log2(mean))) - transferLowest
	}
	return &t.bins[max(0, min(i, transferBins-1))]
}

func tileMean(light, dark []float64, width, x, y int) float64 {
	sum := 0.0
	for v := y; v < y+transferSide; v++ {
		for i := v*width + x; i < v*width+x+transferSide; i++ {
			sum += light[i] - dark[i]
		}
	}
	return sum / (transferSide * transferSide)
}

// take adds the kernel values of one tile of a difference whose white variance is scale
// times that of one frame. A tile with a value that is not finite is left out.
func (p *TransferPoint) take(mean, scale float64, d []float64, width, x, y int) {
	values := make([]float64, 0, transferSide*transferSide)
	for v := y; v < y+transferSide; v++ {
		for i := v*width + x; i < v*width+x+transferSide; i++ {
			values = append(values, second(d, i-width)-2*second(d, i)+second(d, i+width))
		}
	}
	_, spread := middle(values)
	if !finite(spread) {
		return
	}
	sum, n := 0.0, 0
	for _, v := range values {
		if !finite(v) {
			return
		}
		if math.Abs(v) <= 5*spread {
			sum += v * v
			n++
		}
	}
	weight := float64(n) / kernelOverlap
	p.N += weight
	p.Mean += weight * mean
	if n > 0 {
		p.Variance += weight * sum / float64(n) / (kernelSquares * scale)
	}
}

func second(d []float64, i int) float64 { return d[i-1] - 2*d[i] + d[i+1] }

// fit draws the straight line.
func (t *transferSums) fit() (*Transfer, error) {
	darks := t.darks
	if darks.N == 0 {
		darks = t.lones
	}
	if t.pairs == 0 || darks.N == 0 {
		return nil, fmt.Errorf("photon transfer needs two shots with light frames and two dark frames, theirs or the night's: there are fewer")
	}
	var points []TransferPoint
	for _, p := range append([]TransferPoint{darks}, t.bins[:]...) {
		if p.N > 0 {
			points = append(points, TransferPoint{p.Mean / p.N, p.Variance / p.N, p.N})
		}
	}
	if len(points) < 2 {
		return nil, fmt.Errorf("photon transfer has no usable tile of %d pixels: the frames are too small or saturated", transferSide)
	}
	l := weightedLine(points)
	if !(l.slope > 3*math.Sqrt(l.slopeVar)) || !(l.offset > 0) {
		return nil, fmt.Errorf("photon transfer finds no rise of the variance with light: check that the light frames hold light")
	}
	g := 1 / l.slope
	read := g * math.Sqrt(l.offset)
	relative := l.offsetVar/(4*l.offset*l.offset) + l.slopeVar*g*g - l.covariance*g/l.offset
	return &Transfer{
		ElectronsPerCount: g, ElectronsPerCountErr: g * g * math.Sqrt(l.slopeVar),
		ReadNoise: read, ReadNoiseErr: read * math.Sqrt(max(relative, 0)),
		Pairs: t.pairs, Points: points,
	}, nil
}

// line is variance = offset + slope mean with its covariance.
type line struct{ offset, slope, offsetVar, slopeVar, covariance float64 }

// weightedLine fits the points with the variance 2v²/N of a variance v, v from the line
// itself, so that points that came out low do not count for more.
func weightedLine(points []TransferPoint) line {
	var l line
	for turn := range 20 {
		var s, sx, sxx, sy, sxy float64
		for _, p := range points {
			v := p.Variance
			if turn > 0 {
				v = max(l.offset+l.slope*p.Mean, 1e-3*p.Variance)
			}
			w := p.N / (2 * v * v)
			s += w
			sx += w * p.Mean
			sxx += w * p.Mean * p.Mean
			sy += w * p.Variance
			sxy += w * p.Mean * p.Variance
		}
		det := s*sxx - sx*sx
		l = line{(sxx*sy - sx*sxy) / det, (s*sxy - sx*sy) / det, sxx / det, s / det, -sx / det}
	}
	return l
}
