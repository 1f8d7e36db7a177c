package fit

import (
	"image"
	"math"
)

// Large is the number of pixels up to which a picture is fitted as a whole: a part of it would
// save little.
const Large = 512 * 512

const (
	// The half sides of a window in thermal widths and condensate radii. A picture of twenty widths
	// tells the plane of the light so well that N is known within 2 % of what the endless one gives.
	windowWidths, windowRadii = 10, 6
)

// telling is the part of a large picture that tells the cloud as well as all of it does, a
// rectangle in pixels; the whole where it is hardly more, or where no thermal part says how far
// the atoms reach.
func (s *session) telling(st *state) image.Rectangle {
	whole := image.Rect(0, 0, s.pic.Width, s.pic.Height)
	if s.pic.Width*s.pic.Height <= Large || !st.kind.thermal {
		return whole
	}
	half := s.tmpl.thermalOf(&st.p).half(windowWidths)
	if st.kind.condensate {
		c := s.tmpl.condensateOf(&st.p).half(windowRadii)
		half = [2]float64{math.Max(half[0], c[0]), math.Max(half[1], c[1])}
	}
	x, y := st.p[pX], st.p[pY]
	if !(math.Abs(x)+half[0] < 1e6 && math.Abs(y)+half[1] < 1e6) {
		return whole
	}
	r := image.Rect(int(x-half[0]), int(y-half[1]), int(x+half[0])+2, int(y+half[1])+2).Intersect(whole)
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

// In returns the place as Options.Near of the picture cropped to its Window; it has no mask.
func (p *Place) In(pic *Picture) *Place {
	if p.found == nil {
		return &Place{Rough: p.Rough}
	}
	r := p.Window
	f := *p.found
	for _, to := range []**state{&f.none, &f.thermal, &f.both, &f.alone} {
		if *to == nil {
			continue
		}
		st := **to
		st.p[pX] -= float64(r.Min.X)
		st.p[pY] -= float64(r.Min.Y)
		tx, ty := st.p[pLightX]/float64(pic.Width), st.p[pLightY]/float64(pic.Height)
		st.p[pLight] += tx*(middle(r.Min.X, r.Max.X)-middle(0, pic.Width)) + ty*(middle(r.Min.Y, r.Max.Y)-middle(0, pic.Height))
		st.p[pLightX], st.p[pLightY] = tx*float64(r.Dx()), ty*float64(r.Dy())
		*to = &st
	}
	return &Place{Rough: p.Rough, found: &f}
}

// middle is the centre of pixels a to b-1.
func middle(a, b int) float64 { return float64(a+b-1) / 2 }
