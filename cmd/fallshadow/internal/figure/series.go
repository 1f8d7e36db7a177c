package figure

import (
	"math"

	"gonum.org/v1/plot/vg"
)

// band fills the space between two curves, cut to the frame.
func (s *sheet) band(b *Band) {
	var up, down []vg.Point
	fill := func() {
		if len(up) > 1 {
			var p vg.Path
			p.Move(up[0])
			for _, q := range up[1:] {
				p.Line(q)
			}
			for i := len(down) - 1; i >= 0; i-- {
				p.Line(down[i])
			}
			p.Close()
			s.c.SetColor(pale(looks[b.Role].color, bandPart))
			s.c.Fill(p)
		}
		up, down = nil, nil
	}
	for i, x := range b.X {
		if !s.X.holds(x) || math.IsNaN(b.Low[i]+b.High[i]) {
			fill()
			continue
		}
		up = append(up, s.at(x, s.Y.clamp(b.High[i])))
		down = append(down, s.at(x, s.Y.clamp(b.Low[i])))
	}
	fill()
}

// bandPart is how much of its colour a band has.
const bandPart = 0.22

// curve draws a line where it is inside the frame.
func (s *sheet) curve(c *Curve) {
	l := looks[c.Role]
	var part []vg.Point
	flush := func() {
		s.stroke(l.color, l.width, l.dash, part...)
		part = nil
	}
	for i := range c.X {
		inside := s.X.holds(c.X[i]) && s.Y.holds(c.Y[i])
		if i > 0 {
			if a, b, ok := s.cut(c.X[i-1], c.Y[i-1], c.X[i], c.Y[i]); ok {
				if len(part) == 0 {
					part = append(part, a)
				}
				part = append(part, b)
			}
		}
		if !inside {
			flush()
		}
	}
	flush()
}

// cut returns the part of a straight line that is inside the frame.
func (s *sheet) cut(x0, y0, x1, y1 float64) (a, b vg.Point, ok bool) {
	u0, v0, u1, v1 := s.X.norm(x0), s.Y.norm(y0), s.X.norm(x1), s.Y.norm(y1)
	from, to := 0.0, 1.0
	for _, side := range [4][2]float64{{-(u1 - u0), u0}, {u1 - u0, 1 - u0}, {-(v1 - v0), v0}, {v1 - v0, 1 - v0}} {
		p, q := side[0], side[1]
		switch {
		case p < 0:
			from = math.Max(from, q/p)
		case p > 0:
			to = math.Min(to, q/p)
		case q < 0:
			return a, b, false
		}
	}
	if !(from <= to) || math.IsNaN(u0+v0+u1+v1) {
		return a, b, false
	}
	place := func(t float64) vg.Point {
		f := s.frame
		return vg.Point{
			X: f.Min.X + vg.Length(u0+t*(u1-u0))*(f.Max.X-f.Min.X),
			Y: f.Min.Y + vg.Length(v0+t*(v1-v0))*(f.Max.Y-f.Min.Y),
		}
	}
	return place(from), place(to), true
}

func (s *sheet) line(l Line) {
	k, f := looks[l.Role], s.frame
	switch {
	case l.Across && s.Y.holds(l.At):
		s.stroke(k.color, 0.6, k.dash, vg.Point{X: f.Min.X, Y: s.y(l.At)}, vg.Point{X: f.Max.X, Y: s.y(l.At)})
	case !l.Across && s.X.holds(l.At):
		s.stroke(k.color, 0.6, k.dash, vg.Point{X: s.x(l.At), Y: f.Min.Y}, vg.Point{X: s.x(l.At), Y: f.Max.Y})
	}
}

// Widths of error bars and sizes of marks, in points.
const (
	thickBar   = 1.5
	thinBar    = 0.5
	markSize   = 2.2
	smallMark  = 1.1
	markBorder = 0.8
)

// points draws bars, then marks.
func (s *sheet) points(p *Points) {
	c := looks[p.Role].color
	for i := range p.X {
		if !p.Plain && s.X.holds(p.X[i]) && s.Y.holds(p.Y[i]) {
			for _, b := range s.bars(p, i) {
				s.stroke(c, b.width, nil, b.from, b.to)
			}
		}
	}
	size := vg.Length(markSize)
	if p.Small {
		size = smallMark
	}
	for i := range p.X {
		if s.X.holds(p.X[i]) && s.Y.holds(p.Y[i]) {
			s.mark(p.Role, p.Open, s.at(p.X[i], p.Y[i]), size)
		}
	}
}

// bar is an error bar as it is drawn.
type bar struct {
	from, to vg.Point
	width    float64
}

// bars returns the error bars of a point: both errors thin, the statistical one thick.
func (s *sheet) bars(p *Points, i int) (list []bar) {
	pick := func(list []float64) float64 {
		if i < len(list) && list[i] > 0 {
			return list[i]
		}
		return 0
	}
	x, y := p.X[i], p.Y[i]
	across := func(low, high, width float64) {
		if low+high > 0 {
			list = append(list, bar{s.at(s.X.clamp(x-low), y), s.at(s.X.clamp(x+high), y), width})
		}
	}
	upright := func(err, width float64) {
		if err > 0 {
			list = append(list, bar{s.at(x, s.Y.clamp(y-err)), s.at(x, s.Y.clamp(y+err)), width})
		}
	}
	across(pick(p.XTotal), pick(p.XTotal), thinBar)
	upright(pick(p.YTotal), thinBar)
	low, high := pick(p.XErr), pick(p.XErr)
	if i < len(p.XLow) && p.XHigh[i]-p.XLow[i] > 0 {
		low, high = x-p.XLow[i], p.XHigh[i]-x
	}
	across(low, high, thickBar)
	upright(pick(p.YErr), thickBar)
	return list
}

// mark draws the shape of a role: a disc, a square, a triangle; an open one is white inside.
func (s *sheet) mark(r Role, open bool, at vg.Point, size vg.Length) {
	var p vg.Path
	switch r {
	case Second:
		a := size * 0.9
		p = vg.Rectangle{Min: vg.Point{X: at.X - a, Y: at.Y - a}, Max: vg.Point{X: at.X + a, Y: at.Y + a}}.Path()
	case Third:
		p.Move(vg.Point{X: at.X - 1.1*size, Y: at.Y - 0.75*size})
		p.Line(vg.Point{X: at.X + 1.1*size, Y: at.Y - 0.75*size})
		p.Line(vg.Point{X: at.X, Y: at.Y + 1.15*size})
		p.Close()
	default:
		p.Move(vg.Point{X: at.X + size, Y: at.Y})
		p.Arc(at, size, 0, 2*math.Pi)
		p.Close()
	}
	s.c.SetColor(looks[r].color)
	if open {
		s.c.SetColor(white)
	}
	s.c.Fill(p)
	s.c.SetColor(looks[r].color)
	s.c.SetLineWidth(markBorder)
	s.c.SetLineDash(nil, 0)
	if open {
		s.c.Stroke(p)
	}
}
