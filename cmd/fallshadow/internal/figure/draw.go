package figure

import (
	"image/color"
	"math"

	"gonum.org/v1/plot/vg"
)

// Sizes in points.
const (
	labelSize  vg.Length = 8
	tickSize   vg.Length = 7
	legendSize vg.Length = 6.8
	majorTick  vg.Length = 3.2
	minorTick  vg.Length = 1.7
	frameWidth vg.Length = 0.6
	gap        vg.Length = 3
	capHeight            = 0.72 // of letters, in parts of their size
)

var (
	black = color.NRGBA{A: 255}
	white = color.NRGBA{255, 255, 255, 255}
)

// sheet is a figure being drawn: the canvas and the frame that the axes span.
type sheet struct {
	*Figure
	c              vg.Canvas
	frame          vg.Rectangle
	xTicks, yTicks []tick
	xPower, yPower int
	bare           bool // another figure below it labels the x axis
}

// draw lays the figures out from the top, their frames one below the other.
func (s Stack) draw(c vg.Canvas, width, height vg.Length) {
	c.SetColor(white)
	c.Fill(vg.Rectangle{Max: vg.Point{X: width, Y: height}}.Path())
	sheets := make([]*sheet, len(s))
	left, foot := vg.Length(0), vg.Length(0)
	for i, f := range s {
		h := &sheet{Figure: f, c: c, bare: i < len(s)-1}
		h.xTicks, h.xPower = f.X.ticks()
		h.yTicks, h.yPower = f.Y.ticks()
		left = max(left, h.left())
		sheets[i] = h
	}
	foot = 2 + labelSize*1.15 + gap + tickSize*capHeight + gap
	part := (height - foot) / vg.Length(len(s))
	for i, h := range sheets {
		top := height - part*vg.Length(i)
		h.frame.Min = vg.Point{X: left, Y: top - part}
		h.frame.Max = vg.Point{X: width - 4 - h.overhang(), Y: top - 4}
		if i > 0 {
			h.frame.Max.Y -= 4 // the marks at the ends of two axes stand clear of one another
		}
		if h.yPower != 0 {
			h.frame.Max.Y -= tickSize * 1.2
		}
		h.draw(top)
	}
}

// left is the room that a figure needs to the left of its frame.
func (s *sheet) left() vg.Length {
	wide := vg.Length(0)
	for _, t := range s.yTicks {
		wide = max(wide, t.label.width(tickSize))
	}
	return 2 + labelSize*1.15 + gap + wide + gap
}

// draw draws a figure whose room ends at top.
func (s *sheet) draw(top vg.Length) {
	for i := range s.Bands {
		s.band(&s.Bands[i])
	}
	for _, l := range s.Lines {
		s.line(l)
	}
	for i := range s.Curves {
		s.curve(&s.Curves[i])
	}
	for i := range s.Points {
		s.points(&s.Points[i])
	}
	s.axes(top)
	for _, m := range s.Marks {
		s.text(m.Label, legendSize, s.at(m.X, m.Y), 0)
	}
	s.legend()
}

// overhang is how far the last label below the frame reaches over its end.
func (s *sheet) overhang() vg.Length {
	reach := vg.Length(0)
	for _, t := range s.xTicks {
		if t.label != nil {
			past := t.label.width(tickSize)/2 - vg.Length(1-s.X.norm(t.at))*150
			reach = max(reach, past)
		}
	}
	return reach
}

// norm returns where on the axis a value lies, 0 at its start and 1 at its end.
func (a *Axis) norm(v float64) float64 {
	if a.Log {
		return math.Log(v/a.Min) / math.Log(a.Max/a.Min)
	}
	return (v - a.Min) / (a.Max - a.Min)
}

// at returns the place of a pair of values.
func (s *sheet) at(x, y float64) vg.Point { return vg.Point{X: s.x(x), Y: s.y(y)} }

func (s *sheet) x(v float64) vg.Length {
	return s.frame.Min.X + vg.Length(s.X.norm(v))*(s.frame.Max.X-s.frame.Min.X)
}

func (s *sheet) y(v float64) vg.Length {
	return s.frame.Min.Y + vg.Length(s.Y.norm(v))*(s.frame.Max.Y-s.frame.Min.Y)
}

// holds says that a value is on the axis, its ends included.
func (a *Axis) holds(v float64) bool {
	n := a.norm(v)
	return n >= -1e-9 && n <= 1+1e-9
}

// clamp returns the value on the axis that is nearest.
func (a *Axis) clamp(v float64) float64 { return math.Min(a.Max, math.Max(a.Min, v)) }

// text fills a label whose base line begins at the point, turned to the left by angle.
func (s *sheet) text(l Label, size vg.Length, at vg.Point, angle float64) {
	s.c.SetColor(black)
	if angle == 0 {
		s.c.Fill(l.path(size, at))
		return
	}
	s.c.Push()
	s.c.Translate(at)
	s.c.Rotate(angle)
	s.c.Fill(l.path(size, vg.Point{}))
	s.c.Pop()
}

// stroke draws a path of straight lines.
func (s *sheet) stroke(c color.Color, width float64, dash []float64, points ...vg.Point) {
	if len(points) < 2 {
		return
	}
	var p vg.Path
	p.Move(points[0])
	for _, q := range points[1:] {
		p.Line(q)
	}
	s.c.SetColor(c)
	s.c.SetLineWidth(vg.Length(width))
	pattern := make([]vg.Length, len(dash))
	for i, d := range dash {
		pattern[i] = vg.Length(d)
	}
	s.c.SetLineDash(pattern, 0)
	s.c.Stroke(p)
}

// axes draws frame, marks and labels.
func (s *sheet) axes(top vg.Length) {
	f := s.frame
	s.stroke(black, float64(frameWidth), nil, f.Min, vg.Point{X: f.Max.X, Y: f.Min.Y}, f.Max, vg.Point{X: f.Min.X, Y: f.Max.Y}, f.Min, vg.Point{X: f.Min.X + 1, Y: f.Min.Y})
	for _, t := range s.xTicks {
		x, long := s.x(t.at), lengthOf(t)
		s.stroke(black, float64(frameWidth), nil, vg.Point{X: x, Y: f.Min.Y}, vg.Point{X: x, Y: f.Min.Y + long})
		s.stroke(black, float64(frameWidth), nil, vg.Point{X: x, Y: f.Max.Y}, vg.Point{X: x, Y: f.Max.Y - long})
		if !s.bare {
			s.text(t.label, tickSize, vg.Point{X: x - t.label.width(tickSize)/2, Y: f.Min.Y - gap - tickSize*capHeight}, 0)
		}
	}
	for _, t := range s.yTicks {
		y, long := s.y(t.at), lengthOf(t)
		s.stroke(black, float64(frameWidth), nil, vg.Point{X: f.Min.X, Y: y}, vg.Point{X: f.Min.X + long, Y: y})
		s.stroke(black, float64(frameWidth), nil, vg.Point{X: f.Max.X, Y: y}, vg.Point{X: f.Max.X - long, Y: y})
		s.text(t.label, tickSize, vg.Point{X: f.Min.X - gap - t.label.width(tickSize), Y: y - tickSize*capHeight/2}, 0)
	}
	s.names(top)
}

// names writes what the axes are, and the powers of ten taken out of their marks.
func (s *sheet) names(top vg.Length) {
	f := s.frame
	y := s.Y.Label.width(labelSize)
	s.text(s.Y.Label, labelSize, vg.Point{X: 2 + labelSize*0.85, Y: (f.Min.Y+f.Max.Y)/2 - y/2}, math.Pi/2)
	if s.yPower != 0 {
		s.text(Plain("×").And(powerOfTen(s.yPower)), tickSize, vg.Point{X: f.Min.X, Y: top - 2 - tickSize*1.05}, 0)
	}
	if s.bare {
		return
	}
	below := 2 + labelSize*0.25
	x := s.X.Label.width(labelSize)
	s.text(s.X.Label, labelSize, vg.Point{X: (f.Min.X+f.Max.X)/2 - x/2, Y: below}, 0)
	if s.xPower != 0 {
		l := Plain("×").And(powerOfTen(s.xPower))
		s.text(l, tickSize, vg.Point{X: f.Max.X - l.width(tickSize), Y: below}, 0)
	}
}

func lengthOf(t tick) vg.Length {
	if t.label == nil {
		return minorTick
	}
	return majorTick
}
