package figure

import "gonum.org/v1/plot/vg"

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

// legend draws the legend in the corner that covers least.
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
	box := s.corner(size)
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

// corner returns where a box of the given size covers the fewest points and curves.
func (s *sheet) corner(size vg.Point) vg.Rectangle {
	f := s.frame
	left, right := f.Min.X+legendInset, f.Max.X-legendInset-size.X
	top, bottom := f.Max.Y-legendInset-size.Y, f.Min.Y+legendInset
	var best vg.Rectangle
	least := -1.0
	for _, min := range []vg.Point{{X: right, Y: top}, {X: left, Y: bottom}, {X: left, Y: top}, {X: right, Y: bottom}} {
		box := vg.Rectangle{Min: min, Max: min.Add(size)}
		if cost := s.covered(box); least < 0 || cost < least {
			best, least = box, cost
		}
	}
	return best
}

// covered counts what lies in a box, a point like ten of the points of a curve.
func (s *sheet) covered(box vg.Rectangle) float64 {
	const edge = 3
	in := func(x, y float64) bool {
		if !s.X.holds(x) || !s.Y.holds(y) {
			return false
		}
		p := s.at(x, y)
		return p.X > box.Min.X-edge && p.X < box.Max.X+edge && p.Y > box.Min.Y-edge && p.Y < box.Max.Y+edge
	}
	cost := 0.0
	for i := range s.Points {
		for k, x := range s.Points[i].X {
			if in(x, s.Points[i].Y[k]) {
				cost += 10
			}
		}
	}
	for i := range s.Curves {
		for k, x := range s.Curves[i].X {
			if in(x, s.Curves[i].Y[k]) {
				cost++
			}
		}
	}
	return cost
}
