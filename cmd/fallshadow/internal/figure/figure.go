// Package figure draws the figures of the program to PNG, SVG and PDF. It alone sees the
// plotting library, of which it takes the canvases; letters are drawn as outlines, so that a
// figure does not hang on the fonts of its viewer. Axes, marks and legends are its own.
package figure

import (
	"bytes"
	"fmt"
	"io"
	"path/filepath"
	"strings"
	"time"

	"codeberg.org/go-pdf/fpdf"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgpdf"
	"gonum.org/v1/plot/vg/vgsvg"
)

// Figure is one diagram. What stands later in its lists is drawn over what stands before.
type Figure struct {
	X, Y   Axis
	Bands  []Band
	Curves []Curve
	Points []Points
	// Lines are drawn across the diagram: at a value of x (Across false) or of y.
	Lines []Line
	// Marks are labels at places in the diagram.
	Marks []Mark
}

// Axis is an axis with its range.
type Axis struct {
	Label    Label
	Min, Max float64
	Log      bool
}

// Band is filled between two curves over x.
type Band struct {
	Legend       string
	Role         Role
	X, Low, High []float64
}

// Curve is a line through points; NaN interrupts it.
type Curve struct {
	Legend string
	Role   Role
	X, Y   []float64
}

// Points are marks with error bars: thick ones for the statistical error and, where Total
// is given, thin ones for both errors together. NaN and 0 are no bar.
type Points struct {
	Legend       string
	Role         Role
	Open         bool
	X, Y         []float64
	XErr, YErr   []float64
	XLow, XHigh  []float64 // instead of XErr where they are finite
	XTotal       []float64
	YTotal       []float64
	Plain, Small bool // without bars; small marks
}

// Line goes straight across the diagram.
type Line struct {
	Role   Role
	At     float64
	Across bool
}

// Mark is a label with its lower left corner at a place.
type Mark struct {
	X, Y  float64
	Label Label
}

// Formats are the endings of the files that Render can make.
var Formats = []string{"png", "svg", "pdf"}

// dpi of pictures in pixels: 86 mm are 1016 of them.
const dpi = 300

// FormatOf returns the format that the name of a file asks for.
func FormatOf(file string) (string, error) {
	ending := strings.ToLower(strings.TrimPrefix(filepath.Ext(file), "."))
	for _, f := range Formats {
		if f == ending {
			return f, nil
		}
	}
	return "", fmt.Errorf("%s: a figure is written as .%s", file, strings.Join(Formats, ", ."))
}

// A PDF says when it was made; ours do not, so that the same figure gives the same bytes.
func init() {
	fpdf.SetDefaultCreationDate(time.Unix(0, 0).UTC())
	fpdf.SetDefaultModificationDate(time.Unix(0, 0).UTC())
}

// Render draws the figure in a format of Formats. Sizes are in mm; letters keep their size.
// The same figure gives the same bytes.
func (f *Figure) Render(w io.Writer, format string, width, height float64) error {
	return Stack{f}.Render(w, format, width, height)
}

// Stack are figures over one another that share their x axis, which the lowest one labels.
type Stack []*Figure

// Render draws the stack as Figure.Render does; each figure has its part of the height.
func (s Stack) Render(w io.Writer, format string, width, height float64) (err error) {
	defer func() {
		if r := recover(); r != nil {
			err = fmt.Errorf("draw the figure: %v", r) // the canvases panic on what they cannot draw
		}
	}()
	wl, hl := vg.Length(width)*vg.Millimeter, vg.Length(height)*vg.Millimeter
	c, err := canvas(format, wl, hl)
	if err != nil {
		return err
	}
	for _, f := range s {
		if err := f.check(); err != nil {
			return err
		}
	}
	s.draw(c, wl, hl)
	var b bytes.Buffer
	if _, err := c.WriteTo(&b); err != nil {
		return fmt.Errorf("draw the figure: %w", err)
	}
	_, err = w.Write(b.Bytes())
	return err
}

func canvas(format string, width, height vg.Length) (vg.CanvasWriterTo, error) {
	switch format {
	case "png":
		return vgimg.PngCanvas{Canvas: vgimg.NewWith(vgimg.UseWH(width, height), vgimg.UseDPI(dpi))}, nil
	case "svg":
		return vgsvg.New(width, height), nil
	case "pdf":
		return vgpdf.New(width, height), nil
	}
	return nil, fmt.Errorf("draw the figure: unknown format %q", format)
}

// check refuses ranges that cannot be drawn.
func (f *Figure) check() error {
	for _, a := range []*Axis{&f.X, &f.Y} {
		if !(a.Max > a.Min) || a.Max-a.Max != 0 || a.Min-a.Min != 0 || a.Log && !(a.Min > 0) {
			return fmt.Errorf("draw the figure: an axis from %g to %g", a.Min, a.Max)
		}
	}
	return nil
}
