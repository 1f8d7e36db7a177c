package light

import (
	"math"

	"fallshadow/imageio"
)

// litFrame is an atoms or a light frame above its dark, electrons, inside the window.
type litFrame struct {
	pix       []float64
	bad       []bool
	saturated int
	dark      dark
}

// lit makes a litFrame of the light frame of a shot.
func (n *Night) lit(raw *imageio.Raw) (*litFrame, error) {
	l, err := n.counts(raw, imageio.Light)
	if err != nil {
		return nil, err
	}
	d, err := n.darkFrom(darkFrame(raw, imageio.Light))
	if err != nil {
		return nil, err
	}
	n.subtract(l, d)
	return l, nil
}

// litPair makes those of both frames; a dark that serves both is looked at once.
func (n *Night) litPair(raw *imageio.Raw) (a, l *litFrame, err error) {
	if a, err = n.counts(raw, imageio.Atoms); err != nil {
		return nil, nil, err
	}
	if l, err = n.lit(raw); err != nil {
		return nil, nil, err
	}
	d := l.dark
	if f := darkFrame(raw, imageio.Atoms); f != darkFrame(raw, imageio.Light) {
		if d, err = n.darkFrom(f); err != nil {
			return nil, nil, err
		}
	}
	n.subtract(a, d)
	return a, l, nil
}

// counts crops a frame and marks what its counts alone tell to be bad.
func (n *Night) counts(raw *imageio.Raw, role imageio.Role) (*litFrame, error) {
	f, missing, name := raw.Frames[role], NoLight, "light"
	if role == imageio.Atoms {
		missing, name = NoAtoms, "atoms"
	}
	if f == nil {
		return nil, refuse(missing, "")
	}
	if !fits(f, n.win) {
		return nil, refuse(WrongSize, "%s: %dx%d instead of %dx%d pixels", name, f.Width, f.Height, n.win.frame.X, n.win.frame.Y)
	}
	l := &litFrame{pix: n.win.crop(f), bad: append([]bool(nil), n.bad...)}
	full, err := l.judge(n.Camera.FullScale, name)
	if err == nil && n.Camera.ElectronsPerCount > 0 && l.saturated*1000 > len(l.pix) {
		err = l.shun(full, n, name)
	}
	if err != nil {
		return nil, err
	}
	return l, nil
}

// headroom is how many standard deviations a mean must stand below full scale for noise not to be
// clipped.
const headroom = 4

// shun marks the pixels whose neighbours' mean is within its noise of full scale: those that
// fluctuated down are left there, and their mean is too low. A pixel has no say in its own case,
// or those that fluctuated up would be shunned. It refuses a frame that is so in more than half.
func (l *litFrame) shun(full float64, n *Night, name string) error {
	g, read := n.Camera.ElectronsPerCount, n.Camera.ReadNoise
	near, width, height := 0, n.win.width, len(l.pix)/n.win.width
	for i, mean := range smooth(l.pix, width, 0) {
		pixels := float64(across(i%width, width) * across(i/width, height))
		v := max((mean*pixels-l.pix[i])/(pixels-1), 0)
		if v+headroom*math.Sqrt(v/g+read*read/(g*g)) >= full {
			l.bad[i] = true
			near++
		}
	}
	if near*2 > len(l.pix) {
		return refuse(Saturated, "%s: %.0f %% of the pixels are within their noise of %g counts", name, 100*float64(near)/float64(len(l.pix)), full)
	}
	return nil
}

// subtract turns counts into electrons above a dark.
func (n *Night) subtract(l *litFrame, d dark) {
	l.dark = d
	perCount := n.Camera.ElectronsPerCount
	pattern, bad := d.pattern[:len(l.pix)], l.bad[:len(l.pix)]
	for i, v := range l.pix {
		v = (v - (pattern[i] + d.level)) * perCount
		l.pix[i] = v
		bad[i] = bad[i] || !finite(v)
	}
	for i, b := range d.bad {
		bad[i] = bad[i] || b
	}
	fill(l.pix, n.win.width, l.bad)
}

// across is how many of n places are at most one from place i.
func across(i, n int) int { return min(i+1, n-1) - max(i-1, 0) + 1 }

// judge counts saturated pixels and refuses frames that are blank or mostly saturated; it returns the
// full scale, 0 where there is none. Without a full scale the highest value counts as one where a thousandth of all pixels
// have it.
func (l *litFrame) judge(fullScale float64, name string) (float64, error) {
	low, high, at := extremes(l.pix)
	if full := fullScale; high == low && high > 0 && (full > 0 && high >= full || full == 0 && isFullScale(high)) {
		return 0, refuse(Saturated, "%s: every pixel at %g counts", name, high)
	}
	if !(high > low) {
		return 0, refuse(Blank, "%s: all %g counts", name, l.pix[0])
	}
	if fullScale == 0 {
		if at < 20 || at*1000 < len(l.pix) || high-low < 100 {
			return 0, nil
		}
		fullScale = high
	}
	for i, v := range l.pix {
		if v >= fullScale {
			l.bad[i] = true
			l.saturated++
		}
	}
	if l.saturated*5 > len(l.pix) {
		return 0, refuse(Saturated, "%s: %.0f %% of the pixels at %g counts or more", name, 100*float64(l.saturated)/float64(len(l.pix)), fullScale)
	}
	return fullScale, nil
}

// isFullScale says whether a count is the largest of a converter of 8 to 16 bits.
func isFullScale(v float64) bool {
	for bits := 8; bits <= 16; bits++ {
		if v == float64(int(1)<<bits-1) {
			return true
		}
	}
	return false
}

// extremes returns lowest and highest of the values that are not NaN, and how many pixels
// have the highest.
func extremes(pix []float64) (low, high float64, at int) {
	low, high = math.Inf(1), math.Inf(-1)
	for _, v := range pix {
		if v < low {
			low = v
		}
		if v > high {
			high, at = v, 0
		}
		if v == high {
			at++
		}
	}
	return low, high, at
}
