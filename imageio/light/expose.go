package light

import (
	"math"

	"fallshadow/imageio"
)

// Expose makes a shot ready for a fit, with its own light frame, scaled to the atoms
// frame along the border of the region, as reference.
//
// The dark is the night's pattern at the level of the shot's own dark, or the shot's own
// dark as it is where the night has only two or the two differ; with no dark in the shot
// it is the night's. Electrons are counts above the dark times electrons per
// count. Good is false where a pixel is listed, hot, restless, dead, not finite, struck,
// or at full scale in either frame, and where one such pixel is in a bin; Atoms and Light
// hold there the median of their neighbourhood. With a bin of b, counts are exact sums
// of b² pixels and all read variances are b² times those of a pixel.
//
// A shot whose frames cannot be used gives an *Error from the table of Problems; lesser
// ones stand in Notes. A ready density image comes through cropped, averaged over bins,
// with Good false where it is not finite.
func (n *Night) Expose(raw *imageio.Raw) (*imageio.Exposure, error) {
	if f := raw.Frames[imageio.Density]; f != nil {
		return n.exposeDensity(f)
	}
	l, err := n.lit(raw, imageio.Light)
	if err != nil {
		return nil, err
	}
	a, err := n.lit(raw, imageio.Atoms)
	if err != nil {
		return nil, err
	}
	own := l.dark.own || a.dark.own
	n.clean(l, a)
	scale, notes, err := n.compare(a, l)
	if err != nil {
		return nil, err
	}
	pixels := n.win.pixels()
	e := &imageio.Exposure{
		Width: n.win.width / n.win.bin, Height: n.win.height / n.win.bin,
		Atoms: n.win.sum(a.pix), Light: n.win.sum(l.pix), Good: n.win.good(a.bad),
		Reference: "own",
		Noise: imageio.Noise{
			Read:         n.Camera.ReadNoise * float64(n.win.bin),
			LightShot:    scale,
			LightRead:    scale * scale * n.readVar() * pixels,
			Dark:         a.dark.variance * pixels,
			DarkIsShared: !own || raw.Frames[imageio.DarkOfLight] == nil,
		},
	}
	for i := range e.Light {
		e.Light[i] *= scale
	}
	e.Notes = append(notes, n.remarks(raw, a, l)...)
	return e, nil
}

// clean marks and fills what is wrong in the two frames; afterwards both share a mask.
func (n *Night) clean(l, a *litFrame) {
	outliers(l.pix, nil, n.win.width, n.readVar(), true, l.bad)
	fill(l.pix, n.win.width, l.bad)
	for i, b := range l.bad {
		a.bad[i] = a.bad[i] || b
	}
	base := smooth(l.pix, n.win.width, max(n.Camera.ReadNoise, 1))
	outliers(a.pix, base, n.win.width, n.readVar(), false, a.bad)
	fill(a.pix, n.win.width, a.bad)
}

// remarks lists the lesser problems of the two frames.
func (n *Night) remarks(raw *imageio.Raw, a, l *litFrame) []string {
	var words []string
	size := n.win.size()
	bad := 0
	for _, b := range a.bad {
		if b {
			bad++
		}
	}
	if max(a.saturated, l.saturated)*1000 > size {
		words = append(words, PartSaturate)
	}
	if bad*100 > size {
		words = append(words, ManyBad)
	}
	if a.dark.odd || l.dark.odd {
		words = append(words, OddDark)
	}
	if raw.Frames[imageio.Dark] == nil && n.OffsetSpread*n.Camera.ElectronsPerCount > max(n.Camera.ReadNoise/4, 1) {
		words = append(words, Drift)
	}
	return words
}

// litFrame is an atoms or a light frame above its dark, electrons, inside the window.
type litFrame struct {
	pix       []float64
	bad       []bool
	saturated int
	dark      dark
}

// lit subtracts the dark of one frame and marks what needs no neighbours to be known.
func (n *Night) lit(raw *imageio.Raw, role imageio.Role) (*litFrame, error) {
	f := raw.Frames[role]
	if f == nil {
		if role == imageio.Atoms {
			return nil, refuse(NoAtoms, "")
		}
		return nil, refuse(NoLight, "")
	}
	if !fits(f, n.win) {
		return nil, refuse(WrongSize, "%dx%d instead of %dx%d pixels", f.Width, f.Height, n.win.frame.X, n.win.frame.Y)
	}
	l := &litFrame{pix: n.win.crop(f), bad: append([]bool(nil), n.bad...)}
	if err := l.judge(n.Camera.FullScale, roleName(role)); err != nil {
		return nil, err
	}
	d, err := n.darkFor(raw, role)
	if err != nil {
		return nil, err
	}
	l.dark = d
	for i := range l.pix {
		l.pix[i] = (l.pix[i] - d.counts(i)) * n.Camera.ElectronsPerCount
		if d.bad != nil && d.bad[i] || !finite(l.pix[i]) {
			l.bad[i] = true
		}
	}
	fill(l.pix, n.win.width, l.bad)
	return l, nil
}

func roleName(r imageio.Role) string {
	return [...]string{"atoms", "light", "dark", "dark of light", "density"}[r]
}

// judge counts saturated pixels and refuses frames that are blank or mostly saturated.
// Without a full scale the highest value counts as one where a thousandth of all pixels
// have it.
func (l *litFrame) judge(fullScale float64, name string) error {
	low, high, at := extremes(l.pix)
	if !(high > low) {
		return refuse(Blank, "%s: all %g counts", name, l.pix[0])
	}
	if fullScale == 0 {
		if at < 20 || at*1000 < len(l.pix) || high-low < 100 {
			return nil
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
		return refuse(Saturated, "%s: %.0f %% of the pixels at %g counts or more", name, 100*float64(l.saturated)/float64(len(l.pix)), fullScale)
	}
	return nil
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

// exposeDensity carries a ready density image through.
func (n *Night) exposeDensity(f *imageio.Frame) (*imageio.Exposure, error) {
	if !fits(f, n.win) {
		return nil, refuse(WrongSize, "%dx%d instead of %dx%d pixels", f.Width, f.Height, n.win.frame.X, n.win.frame.Y)
	}
	l := &litFrame{pix: n.win.crop(f), bad: append([]bool(nil), n.bad...)}
	for i, v := range l.pix {
		l.bad[i] = l.bad[i] || !finite(v)
	}
	fill(l.pix, n.win.width, l.bad)
	e := &imageio.Exposure{
		Width: n.win.width / n.win.bin, Height: n.win.height / n.win.bin,
		Density: n.win.sum(l.pix), Good: n.win.good(l.bad),
	}
	for i := range e.Density {
		e.Density[i] /= n.win.pixels()
	}
	return e, nil
}
