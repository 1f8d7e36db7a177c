package light

import "fallshadow/imageio"

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
	a, l, err := n.litPair(raw)
	if err != nil {
		return nil, err
	}
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
			Dark:         max(a.dark.variance, l.dark.variance) * pixels,
			DarkIsShared: !a.dark.own && !l.dark.own || raw.Frames[imageio.Dark] == nil || raw.Frames[imageio.DarkOfLight] == nil,
		},
	}
	for i := range e.Light {
		e.Light[i] *= scale
	}
	e.Notes = append(notes, n.remarks(raw, a, l)...)
	return e, nil
}

// lend returns the light frame of a shot as Expose cleans it, and fails as Expose does; sound
// says that it did not.
func (n *Night) lend(raw *imageio.Raw, sound bool) (*litFrame, error) {
	if sound {
		l, err := n.lit(raw)
		if err == nil {
			n.cleanLight(l)
		}
		return l, err
	}
	a, l, err := n.litPair(raw)
	if err != nil {
		return nil, err
	}
	n.clean(l, a)
	_, _, err = n.compare(a, l)
	return l, err
}

func (n *Night) cleanLight(l *litFrame) {
	outliers(l.pix, nil, n.win.width, n.readVar(), true, l.bad)
	fill(l.pix, n.win.width, l.bad)
}

// clean marks and fills what is wrong in the two frames; afterwards both share a mask.
func (n *Night) clean(l, a *litFrame) {
	n.cleanLight(l)
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
	alone := raw.Frames[imageio.Dark] == nil && raw.Frames[imageio.DarkOfLight] == nil
	if alone && n.OffsetSpread*n.Camera.ElectronsPerCount > max(n.Camera.ReadNoise/4, 1) {
		words = append(words, Drift)
	}
	return words
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
