package picture

import (
	"image"
	"image/color"
	"image/draw"
	"math"

	"golang.org/x/image/font"
	"golang.org/x/image/font/gofont/gobold"
	"golang.org/x/image/font/gofont/goregular"
	"golang.org/x/image/font/opentype"
	"golang.org/x/image/math/fixed"
	"golang.org/x/image/vector"
)

// canvas is a sheet that lines and text are drawn on.
type canvas struct{ *image.RGBA }

func newCanvas(width, height int, paper color.Color) canvas {
	c := canvas{image.NewRGBA(image.Rect(0, 0, width, height))}
	draw.Draw(c, c.Rect, image.NewUniform(paper), image.Point{}, draw.Src)
	return c
}

// stroke draws a line through points, its ends cut straight.
func (c canvas) stroke(points []Point, width float64, ink color.Color, clip image.Rectangle) {
	clip = clip.Intersect(c.Rect).Intersect(around(points, width))
	if clip.Empty() {
		return
	}
	z := vector.NewRasterizer(clip.Dx(), clip.Dy())
	at := func(x, y float64) (float32, float32) {
		return float32(x - float64(clip.Min.X)), float32(y - float64(clip.Min.Y))
	}
	for i := 1; i < len(points); i++ {
		p, q := points[i-1], points[i]
		d := math.Hypot(q.X-p.X, q.Y-p.Y)
		if !(d > 0) || d > 1e6 {
			continue
		}
		ux, uy := (q.X-p.X)/d*width/2, (q.Y-p.Y)/d*width/2
		px, py, qx, qy := p.X-ux/2, p.Y-uy/2, q.X+ux/2, q.Y+uy/2 // overlap at the joints
		z.MoveTo(at(px-uy, py+ux))
		z.LineTo(at(qx-uy, qy+ux))
		z.LineTo(at(qx+uy, qy-ux))
		z.LineTo(at(px+uy, py-ux))
		z.ClosePath()
	}
	z.Draw(c.RGBA.SubImage(clip).(*image.RGBA), clip, image.NewUniform(ink), image.Point{})
}

// around is a frame about a stroke.
func around(points []Point, width float64) image.Rectangle {
	x0, y0, x1, y1 := math.Inf(1), math.Inf(1), math.Inf(-1), math.Inf(-1)
	for _, p := range points {
		x0, x1 = math.Min(x0, p.X-width), math.Max(x1, p.X+width)
		y0, y1 = math.Min(y0, p.Y-width), math.Max(y1, p.Y+width)
	}
	const far = 1 << 20
	at := func(v float64) int { return int(math.Min(math.Max(v, -far), far)) }
	return image.Rect(at(x0)-1, at(y0)-1, at(x1)+2, at(y1)+2)
}

// dashed cuts a line into dashes.
func dashed(points []Point, on, off float64) (runs [][]Point) {
	left, drawing := on, true
	var run []Point
	for i := 1; i < len(points); i++ {
		p, q := points[i-1], points[i]
		for {
			d := math.Hypot(q.X-p.X, q.Y-p.Y)
			if drawing && len(run) == 0 {
				run = []Point{p}
			}
			if d < left {
				left -= d
				if drawing {
					run = append(run, q)
				}
				break
			}
			p = Point{p.X + (q.X-p.X)*left/d, p.Y + (q.Y-p.Y)*left/d}
			if drawing {
				runs = append(runs, append(run, p))
				run = nil
			}
			drawing = !drawing
			if left = off; drawing {
				left = on
			}
		}
	}
	return append(runs, run)
}

// dot draws a small square.
func (c canvas) dot(p Point, size float64, ink color.Color, clip image.Rectangle) {
	c.stroke([]Point{{p.X - size/2, p.Y}, {p.X + size/2, p.Y}}, size, ink, clip)
}

// picture draws a picture into a frame, each of its pixels as a block.
func (c canvas) picture(img *image.Paletted, from [4]float64, into image.Rectangle) {
	rgba := make([]color.RGBA, len(img.Palette))
	for i, p := range img.Palette {
		rgba[i] = color.RGBAModel.Convert(p).(color.RGBA)
	}
	for y := into.Min.Y; y < into.Max.Y; y++ {
		for x := into.Min.X; x < into.Max.X; x++ {
			u := from[0] + (float64(x-into.Min.X)+0.5)/float64(into.Dx())*from[2]
			v := from[1] + (float64(y-into.Min.Y)+0.5)/float64(into.Dy())*from[3]
			c.SetRGBA(x, y, rgba[img.ColorIndexAt(int(math.Floor(u)), int(math.Floor(v)))])
		}
	}
}

var regular, bold = must(opentype.Parse(goregular.TTF)), must(opentype.Parse(gobold.TTF))

func must[T any](v T, err error) T {
	if err != nil {
		panic(err) // the fonts are part of the program
	}
	return v
}

// text writes a line of text; align is 0 for a start at x, 1 for an end there, 0.5 for the
// middle. It returns where the text ends.
func (c canvas) text(x, y float64, text string, size float64, face *opentype.Font, ink color.Color, align float64) float64 {
	f, err := opentype.NewFace(face, &opentype.FaceOptions{Size: size, DPI: 72, Hinting: font.HintingNone})
	if err != nil {
		return x
	}
	defer f.Close()
	raisedFace, err := opentype.NewFace(face, &opentype.FaceOptions{Size: 0.72 * size, DPI: 72, Hinting: font.HintingNone})
	if err != nil {
		return x
	}
	defer raisedFace.Close()
	faces := map[bool]font.Face{true: f, false: raisedFace} // by whether a run is level
	width := 0.0
	for _, r := range runs(text) {
		width += float64(font.MeasureString(faces[r.level == 0], r.text)) / 64
	}
	d := font.Drawer{Dst: c, Src: image.NewUniform(ink)}
	d.Dot.X = fixed.Int26_6((x - align*width) * 64)
	for _, r := range runs(text) {
		d.Face, d.Dot.Y = faces[r.level == 0], fixed.Int26_6((y-r.level*size)*64)
		d.DrawString(r.text)
	}
	return x + (1-align)*width
}

// run is a part of a text that stands so many heights of a letter above the line.
type run struct {
	text  string
	level float64
}

const raised, lowered = 0.36, -0.16

// small are the letters for which the font has no glyphs, as letters that it has.
var small = map[rune]run{
	'⁻': {"−", raised}, '⁰': {"0", raised}, '¹': {"1", raised}, '²': {"2", raised}, '³': {"3", raised}, '⁴': {"4", raised},
	'⁵': {"5", raised}, '⁶': {"6", raised}, '⁷': {"7", raised}, '⁸': {"8", raised}, '⁹': {"9", raised},
	'₀': {"0", lowered}, '\u2009': {"\u00a0", 0},
}

// runs splits a text into parts on one level.
func runs(text string) (list []run) {
	for _, letter := range text {
		r, ok := small[letter]
		if !ok {
			r.text = string(letter)
		}
		if last := len(list) - 1; last >= 0 && list[last].level == r.level {
			list[last].text += r.text
		} else {
			list = append(list, r)
		}
	}
	return list
}
