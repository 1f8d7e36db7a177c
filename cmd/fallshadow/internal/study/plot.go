package study

import (
	"fmt"
	"io"
	"math"
	"slices"

	"fallshadow/cmd/fallshadow/internal/figure"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit/curve"
)

// Axes choose what is drawn.
type Axes struct {
	X, Y   string   // quantities
	XUnit  string   // of a scan variable, which has none of its own
	Laws   []string // names of laws; nil for the usual ones
	Group  Grouping // whose means are drawn, if any
	Single bool     // draw single shots however many there are
}

// The quantities that the usual figure shows.
const (
	DefaultX = "t_reduced"
	DefaultY = "fraction"
)

// usualLaws are drawn where none is asked for.
var usualLaws = []string{curve.Ideal, curve.SemiIdeal, curve.HartreeFock}

// crowd is the number of shots beyond which means of bins are drawn in their place.
const crowd = 400

// Drawn is a figure and the shots that could not be drawn in it.
type Drawn struct {
	Figure  *figure.Figure
	LeftOut []LeftOut
	Note    string // of what stands for the shots, where they are not drawn one by one
}

// Plot makes the figure of one quantity against another with the laws that hold between
// them.
func (a *Analysis) Plot(axes Axes) (*Drawn, error) {
	x, err := a.Night.Quantity(axes.X)
	if err != nil {
		return nil, err
	}
	y, err := a.Night.Quantity(axes.Y)
	if err != nil {
		return nil, err
	}
	d := &Drawn{Figure: &figure.Figure{}}
	p := &plotting{Analysis: a, axes: axes, x: x, y: y, drawn: d, figure: d.Figure}
	p.xs, p.ys = a.Night.series(a.Chosen, x), a.Night.series(a.Chosen, y)
	p.keep()
	if len(p.places) == 0 {
		return nil, fmt.Errorf("none of the %s has both %s and %s: nothing to draw", count(len(a.Chosen.Rows), "shot"), x.Name, y.Name)
	}
	p.range_()
	if err := p.laws(); err != nil {
		return nil, err
	}
	return d, p.points()
}

// plotting is a figure in the making.
type plotting struct {
	*Analysis
	axes   Axes
	x, y   *Quantity
	xs, ys series
	places []int // of the rows that have both
	drawn  *Drawn
	figure *figure.Figure
}

// keep finds the shots that have both quantities.
func (p *plotting) keep() {
	for i, r := range p.Chosen.Rows {
		switch {
		case math.IsNaN(p.xs.v[i]):
			p.drawn.LeftOut = append(p.drawn.LeftOut, LeftOut{Shot: r.Shot, Why: "no " + p.x.Name + " to draw it at"})
		case math.IsNaN(p.ys.v[i]):
			p.drawn.LeftOut = append(p.drawn.LeftOut, LeftOut{Shot: r.Shot, Why: "no " + p.y.Name + " to draw it at"})
		case p.log() && !(p.xs.v[i] > 0 && p.ys.v[i] > 0):
			p.drawn.LeftOut = append(p.drawn.LeftOut, LeftOut{Shot: r.Shot, Why: "not above 0 on an axis of logarithms"})
		default:
			p.places = append(p.places, i)
		}
	}
}

// log says that both axes have logarithms: μ against N0 is a power law.
func (p *plotting) log() bool {
	return p.x.Name == "condensate" && (p.y.Name == "mu_nK" || p.y.Name == "mu_from_atoms_nK")
}

// range_ sets axes and ranges: from 0 where the values come near it.
func (p *plotting) range_() {
	f := p.figure
	f.X = axis(p.x, p.axes.XUnit, p.pick(p.xs.v), p.pick(p.xs.err), p.log())
	f.Y = axis(p.y, "", p.pick(p.ys.v), p.pick(p.ys.err), p.log())
	if p.y.Name == "fraction" {
		f.Y.Min, f.Y.Max = -0.02, 1.05
	}
}

func (p *plotting) pick(values []float64) []float64 {
	list := make([]float64, len(p.places))
	for k, i := range p.places {
		list[k] = values[i]
	}
	return list
}

func axis(q *Quantity, unit string, values, errs []float64, log bool) figure.Axis {
	a := figure.Axis{Label: figure.Markup(q.Label), Log: log}
	if q.Label == "" {
		text := q.Name
		if unit == "" {
			unit = q.Unit
		}
		if unit != "" {
			text += "  (" + unit + ")"
		}
		a.Label = figure.Plain(text)
	}
	a.Min, a.Max = math.Inf(1), math.Inf(-1)
	for i, v := range values {
		e := 0.0
		if errs[i] > 0 && errs[i] < math.Abs(v)/2 {
			e = errs[i]
		}
		a.Min, a.Max = math.Min(a.Min, v-e), math.Max(a.Max, v+e)
	}
	switch room := (a.Max - a.Min) * 0.06; {
	case log:
		a.Min, a.Max = a.Min/1.15, a.Max*1.15
	case a.Max == a.Min:
		a.Min, a.Max = a.Min-0.5-math.Abs(a.Min)/10, a.Max+0.5+math.Abs(a.Max)/10
	case a.Min >= 0 && a.Min < 0.4*a.Max:
		a.Min, a.Max = 0, a.Max+room
	default:
		a.Min, a.Max = a.Min-room, a.Max+room
	}
	return a
}

// points draws the shots, or means where there are too many of them or groups are asked for.
func (p *plotting) points() error {
	grouping, err := p.grouping()
	if err != nil {
		return err
	}
	if grouping == nil {
		p.single()
		return nil
	}
	pt := figure.Points{Legend: "means of groups", Role: figure.Data}
	for _, g := range grouping {
		x, y := p.xs.mean(g.Places), p.ys.mean(g.Places)
		pt.X, pt.XErr = append(pt.X, x.V), append(pt.XErr, x.Err)
		pt.Y, pt.YErr = append(pt.Y, y.V), append(pt.YErr, y.Err)
		pt.YTotal = append(pt.YTotal, y.Spread)
	}
	p.drawn.Note = fmt.Sprintf("%s drawn as the means of %s: thick bars are errors of the mean, with what the shots scatter beyond their own, thin ones the spread of the shots", count(len(p.places), "shot"), count(len(grouping), "group"))
	p.figure.Points = append(p.figure.Points, pt)
	return nil
}

// grouping returns the groups to draw, nil for single shots.
func (p *plotting) grouping() ([]curve.Group, error) {
	if p.axes.Group.Quantity != "" {
		groups, err := p.Groups(p.axes.Group)
		if err != nil {
			return nil, err
		}
		return p.within(groups), nil
	}
	if p.axes.Single || len(p.places) <= crowd {
		return nil, nil
	}
	return p.within(curve.ByWidth(p.xs.v, (p.figure.X.Max-p.figure.X.Min)/40)), nil
}

// within drops from groups what cannot be drawn.
func (p *plotting) within(groups []curve.Group) []curve.Group {
	drawn := make([]bool, len(p.Chosen.Rows))
	for _, i := range p.places {
		drawn[i] = true
	}
	if len(p.figure.Curves) > 0 { // a theory of T and N, in whose means no shot may tell its own law
		for i := range drawn {
			if drawn[i] && !p.Curve.Points[i].Independent() {
				drawn[i] = false
				p.drawn.LeftOut = append(p.drawn.LeftOut, LeftOut{Shot: p.Chosen.Rows[i].Shot, Why: whyByNumber})
			}
		}
	}
	var list []curve.Group
	for _, g := range groups {
		g.Places = slices.DeleteFunc(slices.Clone(g.Places), func(i int) bool { return !drawn[i] })
		if len(g.Places) > 0 {
			list = append(list, g)
		}
	}
	return list
}

// single draws every shot: closed marks with a condensate, open ones without, others where T
// follows from the number.
func (p *plotting) single() {
	with := figure.Points{Legend: "shots, stat. error", Role: figure.Data}
	if !p.anyError() {
		with.Legend, with.Plain = "shots", true
	}
	none := figure.Points{Legend: "no condensate", Role: figure.Data, Open: true, Plain: with.Plain}
	tied := figure.Points{Legend: "*T* from *N*_{th}", Role: figure.Third, Plain: with.Plain}
	banded := p.banded()
	for _, i := range p.places {
		into := &with
		switch pt := &p.Curve.Points[i]; {
		case !pt.Independent():
			into = &tied
		case pt.Vector[curve.Condensate] == 0:
			into = &none
		}
		into.X, into.Y = append(into.X, p.xs.v[i]), append(into.Y, p.ys.v[i])
		into.XErr, into.YErr = append(into.XErr, p.xs.err[i]), append(into.YErr, p.ys.err[i])
		into.XLow, into.XHigh = append(into.XLow, p.xs.low[i]), append(into.XHigh, p.xs.high[i])
		if !banded {
			into.XTotal = append(into.XTotal, math.Hypot(p.xs.err[i], p.xs.cal[i]))
			into.YTotal = append(into.YTotal, math.Hypot(p.ys.err[i], p.ys.cal[i]))
		}
	}
	for _, pt := range []figure.Points{with, none, tied} {
		if len(pt.X) > 0 {
			p.figure.Points = append(p.figure.Points, pt)
		}
	}
}

// anyError says that a shot has a statistical error on an axis.
func (p *plotting) anyError() bool {
	return slices.ContainsFunc(p.places, func(i int) bool { return p.xs.err[i] > 0 || p.ys.err[i] > 0 })
}

// banded says that calibration errors are drawn as a band about a law and not on the points.
func (p *plotting) banded() bool { return p.x.Name == DefaultX && p.y.Name == DefaultY }

// Save draws a figure into a file; the ending of its name is the format.
func Save(f *figure.Figure, file string, width, height float64) error {
	format, err := figure.FormatOf(file)
	if err != nil {
		return err
	}
	if err := report.Replace(file, func(w io.Writer) error { return f.Render(w, format, width, height) }); err != nil {
		return fmt.Errorf("write the figure %s: %w", file, err)
	}
	return nil
}
