package figure

import (
	"math"

	"gonum.org/v1/plot/vg"
)

// entry is a line of the legend.
type entry struct {
	label Label
	draw  func(from, to vg.Point)
}

// Sizes of the legend in points.
const (
	sample      vg.Length = 13 // length of the samples
	lineFeed    vg.Length = legendSize * 1.32
	legendInset vg.Length = 5
)

// entries returns the lines of the legend: points, curves, bands.
func (s *sheet) entries() []entry {
	var list []entry
	for i := range s.Points {
		if p := &s.Points[i]; p.Legend != "" {
			list = append(list, entry{Markup(p.Legend), func(a, b vg.Point) {
				mid := vg.Point{X: (a.X + b.X) / 2, Y: a.Y}
				if !p.Plain {
					s.stroke(looks[p.Role].color, thickBar, nil, vg.Point{X: mid.X, Y: mid.Y - 3.4}, vg.Point{X: mid.X, Y: mid.Y + 3.4})
				}
				s.mark(p.Role, p.Open, mid, markSize)
			}})
		}
	}
	for i := range s.Curves {
		if c := &s.Curves[i]; c.Legend != "" {
			l := looks[c.Role]
			list = append(list, entry{Markup(c.Legend), func(a, b vg.Point) { s.stroke(l.color, l.width, l.dash, a, b) }})
		}
	}
	for i := range s.Bands {
		if b := &s.Bands[i]; b.Legend != "" {
			list = append(list, entry{Markup(b.Legend), func(from, to vg.Point) {
				s.c.SetColor(pale(looks[b.Role].color, bandPart))
				s.c.Fill(vg.Rectangle{Min: vg.Point{X: from.X, Y: from.Y - 2.4}, Max: vg.Point{X: to.X, Y: to.Y + 2.4}}.Path())
			}})
		}
	}
	return list
}

// legend draws the legend where it hides least.
func (s *sheet) legend() {
	list := s.entries()
	if len(list) == 0 {
		return
	}
	wide := vg.Length(0)
	for _, e := range list {
		wide = max(wide, e.label.width(legendSize))
	}
	size := vg.Point{X: sample + gap + wide, Y: vg.Length(len(list)) * lineFeed}
	box := s.freest(size)
	s.c.SetColor(white)
	s.c.Fill(vg.Rectangle{Min: vg.Point{X: box.Min.X - 2, Y: box.Min.Y - 1}, Max: vg.Point{X: box.Max.X + 2, Y: box.Max.Y + 1}}.Path())
	y := box.Max.Y - lineFeed
	for _, e := range list {
		middle := y + legendSize*0.34
		e.draw(vg.Point{X: box.Min.X, Y: middle}, vg.Point{X: box.Min.X + sample, Y: middle})
		s.text(e.label, legendSize, vg.Point{X: box.Min.X + sample + gap, Y: y + 0.9}, 0)
		y -= lineFeed
	}
}

// freest returns where a box of the given size hides the fewest points and the least of the
// curves: a corner, or if all of them hide something any place in the frame.
func (s *sheet) freest(size vg.Point) vg.Rectangle {
	const steps = 12
	f := s.frame
	left, bottom := f.Min.X+legendInset, f.Min.Y+legendInset
	wide, high := f.Max.X-legendInset-size.X-left, f.Max.Y-legendInset-size.Y-bottom
	drawn := s.drawn()
	var best vg.Rectangle
	least := -1.0
	try := func(x, y vg.Length) {
		at := vg.Point{X: left + x*wide, Y: bottom + y*high}
		box := vg.Rectangle{Min: at, Max: at.Add(size)}
		if cost := hidden(drawn, box); least < 0 || cost < least {
			best, least = box, cost
		}
	}
	for _, corner := range [][2]vg.Length{{1, 1}, {0, 0}, {0, 1}, {1, 0}} {
		try(corner[0], corner[1])
	}
	for y := steps; y >= 0 && least > 0; y-- {
		for x := steps; x >= 0; x-- {
			try(vg.Length(x)/steps, vg.Length(y)/steps)
		}
	}
	return best
}

// spot is a place of the frame where something is drawn, and what it costs to hide it.
type spot struct {
	vg.Point
	cost float64
}

// drawn returns the points, and curves and error bars as spots two points (1/72 inch) apart; a
// point of data costs like 20 points of a curve.
func (s *sheet) drawn() (list []spot) {
	f := s.frame
	add := func(p vg.Point, cost float64) {
		if p.X >= f.Min.X && p.X <= f.Max.X && p.Y >= f.Min.Y && p.Y <= f.Max.Y {
			list = append(list, spot{p, cost})
		}
	}
	stretch := func(a, b vg.Point) {
		length := math.Hypot(float64(b.X-a.X), float64(b.Y-a.Y))
		if length-length != 0 {
			return // NaN breaks a curve
		}
		parts := min(int(length/2)+1, 2000)
		for j := range parts {
			t := (vg.Length(j) + 0.5) / vg.Length(parts)
			add(vg.Point{X: a.X + t*(b.X-a.X), Y: a.Y + t*(b.Y-a.Y)}, length/2/float64(parts))
		}
	}
	for i := range s.Points {
		p := &s.Points[i]
		for k, x := range p.X {
			add(s.at(x, p.Y[k]), 10)
			if !p.Plain && s.X.holds(x) && s.Y.holds(p.Y[k]) {
				for _, b := range s.bars(p, k) {
					stretch(b.from, b.to)
				}
			}
		}
	}
	for i := range s.Curves {
		c := &s.Curves[i]
		for k := 1; k < len(c.X); k++ {
			stretch(s.at(c.X[k-1], c.Y[k-1]), s.at(c.X[k], c.Y[k]))
		}
	}
	return list
}

// hidden is what it costs to lay a box over what is drawn.
func hidden(drawn []spot, box vg.Rectangle) (cost float64) {
	const edge = 3
	for _, p := range drawn {
		if p.X > box.Min.X-edge && p.X < box.Max.X+edge && p.Y > box.Min.Y-edge && p.Y < box.Max.Y+edge {
			cost += p.cost
		}
	}
	return cost
}
