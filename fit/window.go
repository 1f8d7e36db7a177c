package fit

import (
	"image"
	"math"
)

// Large is the number of pixels up to which a picture is looked at as a whole. In a larger one the
// bins that a first look takes are too coarse for the clouds of most machines, and what is far
// from the cloud may be anything.
const Large = 512 * 512

const (
	// The half sides of a window in thermal widths, in radii of a condensate beside a thermal part,
	// and in those of one alone, whose thermal part may yet be found. A picture of twenty widths
	// tells the plane of the light so well that N is known within 2 % of what the endless one gives.
	windowWidths, windowRadii, windowAlone = 10, 6, 12
	// leastWindow is the least half side, px.
	leastWindow = 48
)

// around is the part of the picture, in its pixels, that tells the cloud of a fit as well as all of
// it does; the whole where that is hardly more.
func (s *session) around(st *state) image.Rectangle {
	var half [2]float64
	grow := func(e ellipse, n float64) {
		for i, v := range e.half(n) {
			half[i] = max(half[i], v)
		}
	}
	switch k := st.kind; {
	case k.thermal && k.condensate:
		grow(s.tmpl.condensateOf(&st.p), windowRadii)
		grow(s.tmpl.thermalOf(&st.p), windowWidths)
	case k.thermal:
		grow(s.tmpl.thermalOf(&st.p), windowWidths)
	case k.condensate:
		grow(s.tmpl.condensateOf(&st.p), windowAlone)
	default:
		return s.pic.bounds()
	}
	return s.box(st.p[pX], st.p[pY], half)
}

// box is the part of the picture within half sides of a place, the whole where that is hardly
// more or not known.
func (s *session) box(x, y float64, half [2]float64) image.Rectangle {
	whole := s.pic.bounds()
	hx, hy := max(half[0], leastWindow), max(half[1], leastWindow)
	const far = 1e6 // a width may be anything
	if !(x-hx > -far && x+hx < far && y-hy > -far && y+hy < far) {
		return whole
	}
	r := image.Rect(int(x-hx), int(y-hy), int(x+hx)+2, int(y+hy)+2).Intersect(whole)
	if 2*r.Dx()*r.Dy() > whole.Dx()*whole.Dy() || min(r.Dx(), r.Dy()) < leastSide {
		return whole
	}
	return r
}

// half returns the half sides along x and y of the box around n of its half-axes.
func (e ellipse) half(n float64) [2]float64 {
	sh := e.shape()
	return [2]float64{n * math.Sqrt(sh.XX), n * math.Sqrt(sh.YY)}
}

// exploreWindow finds the candidates of a large picture in a window about what a coarse look at all
// of it finds.
func (s *session) exploreWindow() (*candidates, error) {
	places, top := s.lookCloser(len(s.levels) - 1)
	best := new(candidates)
	for i := range places {
		c, err := s.explorePlace(&places[i])
		if err != nil {
			return nil, err
		}
		if c.none != nil && (best.none == nil || c.gain() > best.gain()) {
			best = c
		}
	}
	if best.none != nil {
		if _, model := s.choose(best); model != ModelNone {
			return s.descend(s.work, best)
		}
	}
	c := new(candidates)
	if err := s.first(top, places, c); err != nil {
		return nil, err
	}
	return s.descend(top, c)
}

// explorePlace finds the candidates about a place, in a window that follows them; none at all where
// the window is as good as the picture.
func (s *session) explorePlace(g *guess) (*candidates, error) {
	whole, c := s.pic.bounds(), new(candidates)
	w := s.box(g.x, g.y, [2]float64{guessedWidths * math.Sqrt(g.moment[0]), guessedWidths * math.Sqrt(g.moment[2])})
	for turn := 0; turn < 3 && w != whole; turn++ {
		found, err := s.exploreIn(w)
		if err != nil {
			return nil, err
		}
		c = found.moved(w, whole)
		st, model := s.choose(c)
		next := s.around(st)
		if model == ModelNone || next.In(w) {
			break
		}
		w = next
	}
	return c, nil
}

// guessedWidths is the half side of the first window in rms sizes of what a first look saw.
const guessedWidths = 10

// gain is the χ² by which the best candidate is better than none.
func (c *candidates) gain() float64 { return c.none.chi2 - c.best().chi2 }

// exploreIn finds the candidates in a part of the picture, in pixels of that part.
func (s *session) exploreIn(w image.Rectangle) (*candidates, error) {
	t, err := newSession(s.ctx, s.pic.Crop(w), s.lab, s.flight, s.opt, s.ws.inside())
	if err != nil {
		return nil, err
	}
	t.opt.Near, t.part = nil, true
	c, err := t.explore()
	s.iterations, s.tmpl, s.condensed = s.iterations+t.iterations, t.tmpl, t.condensed
	return c, err
}

func (pic *Picture) bounds() image.Rectangle { return image.Rect(0, 0, pic.Width, pic.Height) }

// Crop returns the pixels of a picture inside a rectangle, copied. The rectangle must lie in it.
func (pic *Picture) Crop(r image.Rectangle) *Picture {
	c := *pic
	c.Width, c.Height = r.Dx(), r.Dy()
	c.Good = cropped(pic.Good, pic.Width, r)
	c.Atoms, c.Light, c.Density = cropped(pic.Atoms, pic.Width, r), cropped(pic.Light, pic.Width, r), cropped(pic.Density, pic.Width, r)
	return &c
}

func cropped[T any](pix []T, width int, r image.Rectangle) []T {
	if pix == nil {
		return nil
	}
	out := make([]T, 0, r.Dx()*r.Dy())
	for y := r.Min.Y; y < r.Max.Y; y++ {
		out = append(out, pix[y*width+r.Min.X:y*width+r.Max.X]...)
	}
	return out
}

// In returns the place as Options.Near of the picture cropped to a rectangle; it has no mask.
func (p *Place) In(r image.Rectangle) *Place {
	return &Place{Rough: p.Rough, Window: r, found: p.found.moved(p.whole, r), whole: r}
}

// moved returns the candidates of one part of a picture as those of another.
func (c *candidates) moved(from, to image.Rectangle) *candidates {
	m := *c
	for _, st := range []**state{&m.none, &m.thermal, &m.both, &m.alone} {
		if *st == nil {
			continue
		}
		q := **st
		q.p[pX] += float64(from.Min.X - to.Min.X)
		q.p[pY] += float64(from.Min.Y - to.Min.Y)
		tx, ty := q.p[pLightX]/float64(from.Dx()), q.p[pLightY]/float64(from.Dy())
		q.p[pLight] += tx*(middle(to.Min.X, to.Max.X)-middle(from.Min.X, from.Max.X)) + ty*(middle(to.Min.Y, to.Max.Y)-middle(from.Min.Y, from.Max.Y))
		q.p[pLightX], q.p[pLightY] = tx*float64(to.Dx()), ty*float64(to.Dy())
		*st = &q
	}
	return &m
}

// middle is the centre of pixels a to b-1.
func middle(a, b int) float64 { return float64(a+b-1) / 2 }
