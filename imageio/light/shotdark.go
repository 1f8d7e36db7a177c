package light

import (
	"math"

	"fallshadow/imageio"
)

// dark is what is subtracted from one frame: the pattern of the night or of the shot's
// own dark frame at a level, counts.
type dark struct {
	pattern  []float64
	level    float64
	bad      []bool  // struck pixels of an own dark
	variance float64 // per pixel, electrons²
	own      bool    // the shot's own pixels are subtracted
	odd      bool    // the night has a master that this dark does not look like
}

// darkFrame is the frame taken as the dark of another, nil where there is none. The light
// frame of a four-frame shot has its own.
func darkFrame(raw *imageio.Raw, role imageio.Role) *imageio.Frame {
	f := raw.Frames[imageio.Dark]
	if other := raw.Frames[imageio.DarkOfLight]; other != nil && (role == imageio.Light || f == nil) {
		f = other
	}
	return f
}

// darkFrom makes the dark of a dark frame, or the night's for nil. A single dark, saved
// with every shot, is the night's and common to all light frames.
func (n *Night) darkFrom(f *imageio.Frame) (dark, error) {
	if f == nil {
		if n.Darks == 0 {
			return dark{}, refuse(NoDark, "")
		}
		return dark{pattern: n.pattern, level: n.Offset, variance: n.DarkVariance}, nil
	}
	if !fits(f, n.win) {
		return dark{}, refuse(WrongSize, "dark: %dx%d instead of %dx%d pixels", f.Width, f.Height, n.win.frame.X, n.win.frame.Y)
	}
	pix := n.win.crop(f)
	if !usableDark(pix, n.Camera.FullScale) {
		return dark{}, refuse(Blank, "dark, or saturated over more than a hundredth")
	}
	if n.Darks == 0 || n.Darks > 1 && n.Darks < mastered {
		return n.ownDark(pix), nil
	}
	for i := range pix {
		pix[i] -= n.pattern[i]
	}
	level, _, _ := clipped(pix)
	if n.agrees(pix, level) {
		return dark{pattern: n.pattern, level: level, variance: n.DarkVariance}, nil
	}
	d := n.ownDark(n.win.crop(f))
	d.odd = true
	return d, nil
}

// ownDark makes the dark of a shot's own frame, its struck pixels marked.
func (n *Night) ownDark(pix []float64) dark {
	d := dark{pattern: pix, variance: n.DarkNoise * n.DarkNoise, own: true, bad: append([]bool(nil), n.bad...)}
	level, _, _ := clipped(pix)
	above := make([]float64, len(pix))
	for i, v := range pix {
		above[i] = (v - level) * n.Camera.ElectronsPerCount
		d.bad[i] = d.bad[i] || !finite(v)
	}
	fill(above, n.win.width, d.bad)
	outliers(above, nil, n.win.width, n.readVar(), true, d.bad)
	return d
}

// agrees reports whether a dark less the master, counts, is white noise of the night's
// darks about its level: the mean square over 8x8 blocks against what it should
// be, with half of that and five standard deviations of it allowed.
func (n *Night) agrees(residual []float64, level float64) bool {
	const side = 8
	w, h := n.win.width/side, n.win.height/side
	if w*h < 4 {
		return true
	}
	_, spread := middle(residual)
	limit := 6*spread + 1
	sum := 0.0
	means := make([]float64, w)
	for y := range h * side {
		for x, v := range residual[y*n.win.width : y*n.win.width+w*side] {
			if v -= level; math.Abs(v) <= limit {
				means[x/side] += v / (side * side)
			}
		}
		if y%side == side-1 {
			for b, m := range means {
				sum += m * m
				means[b] = 0
			}
		}
	}
	perCount := n.Camera.ElectronsPerCount
	expected := (n.DarkNoise*n.DarkNoise + n.DarkVariance) / (perCount * perCount) / (side * side) * float64(w*h)
	return sum <= expected*(1.5+5*math.Sqrt(2/float64(w*h)))
}
