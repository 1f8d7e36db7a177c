package picture

import (
	"image"
	"image/color"
	"math"
	"strconv"
	"strings"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
)

var (
	paper      = color.RGBA{255, 255, 255, 255}
	ink        = color.RGBA{20, 24, 29, 255}
	faintInk   = color.RGBA{110, 120, 130, 255}
	gridInk    = color.RGBA{222, 225, 228, 255}
	dataInk    = color.RGBA{43, 115, 181, 255}
	thermalInk = color.RGBA{190, 105, 0, 255}
	onPicture  = color.RGBA{255, 255, 255, 255}
	thermalOn  = color.RGBA{255, 180, 84, 255}
	warnInk    = color.RGBA{140, 80, 0, 255}
)

const sheetWidth, sheetHeight = 1180, 790

// Sheet draws all that a person wants to see of a shot on one picture: density with the
// outlines of both parts, residuals, both cuts, and the numbers with their errors. The
// same shot gives the same picture.
func Sheet(r *ledger.Row, v *View) image.Image {
	c := newCanvas(sheetWidth, sheetHeight, paper)
	c.text(30, 44, report.Printable(r.Shot), 26, bold, ink, 0)
	about := []string{}
	if f := r.Number("flight_ms"); !math.IsNaN(f) {
		about = append(about, "flight "+report.Plain(f, 4)+" ms")
	}
	about = append(about, r.Words["model"])
	end := c.text(30, 70, strings.Join(about, " · "), 16, regular, faintInk, 0)
	c.text(end+16, 70, strings.ReplaceAll(strings.Join(r.Flags, ", "), "_", " "), 16, bold, warnInk, 0)
	box := v.box()
	c.density(v, box, image.Rect(30, 90, 580, 640))
	c.residual(v, box, image.Rect(620, 110, 880, 370))
	for i, cut := range v.Cuts {
		c.cut(cut, v, reach(box, v), i+1, image.Rect(660, 436+i*180, 1150, 570+i*180))
	}
	c.cards(report.Cards(r), image.Rect(910, 90, 1150, 390))
	return c
}

// box is the part of the map about the cloud: x, y, width, height; all where there is none.
func (v *View) box() [4]float64 {
	x0, y0, x1, y1 := math.Inf(1), math.Inf(1), math.Inf(-1), math.Inf(-1)
	for _, o := range v.Outlines {
		for _, p := range o.Line {
			x0, x1 = math.Min(x0, p.X), math.Max(x1, p.X)
			y0, y1 = math.Min(y0, p.Y), math.Max(y1, p.Y)
		}
	}
	w, h := float64(v.Width), float64(v.Height)
	if len(v.Outlines) == 0 {
		return [4]float64{0, 0, w, h}
	}
	half := math.Max(12, 1.05*math.Max(x1-x0, y1-y0))
	cx, cy := (x0+x1+1)/2, (y0+y1+1)/2
	x0, x1 = math.Max(0, cx-half), math.Min(w, cx+half)
	y0, y1 = math.Max(0, cy-half), math.Min(h, cy+half)
	return [4]float64{x0, y0, x1 - x0, y1 - y0}
}

// reach is how far from the centre the cuts go, um.
func reach(box [4]float64, v *View) float64 { return math.Hypot(box[2], box[3]) / 2 * v.PixelUm }

// fitted is the largest frame of the box's shape in the middle of another.
func fitted(box [4]float64, in image.Rectangle) image.Rectangle {
	scale := math.Min(float64(in.Dx())/box[2], float64(in.Dy())/box[3])
	w, h := int(scale*box[2]), int(scale*box[3])
	at := in.Min.Add(image.Pt((in.Dx()-w)/2, (in.Dy()-h)/2))
	return image.Rectangle{Min: at, Max: at.Add(image.Pt(w, h))}
}

// density draws the density by its root, its scale and a ruler.
func (c canvas) density(v *View, box [4]float64, in image.Rectangle) {
	to := fitted(box, in)
	c.blocks(v, v.Faint, box, to)
	scale := float64(to.Dx()) / box[2]
	place := func(p Point) Point {
		return Point{float64(to.Min.X) + (p.X+0.5-box[0])*scale, float64(to.Min.Y) + (p.Y+0.5-box[1])*scale}
	}
	for i, cut := range v.Cuts {
		a, b := place(Point{cut.StartX, cut.StartY}), place(Point{cut.EndX, cut.EndY})
		for _, run := range dashed([]Point{a, b}, 2, 6) {
			c.stroke(run, 1, color.RGBA{150, 150, 150, 150}, to)
		}
		c.axisNumber(a, b, to, i+1)
	}
	for _, o := range v.Outlines {
		line := make([]Point, len(o.Line))
		for i, p := range o.Line {
			line[i] = place(p)
		}
		if o.Part == "thermal" {
			for _, run := range dashed(line, 8, 5) {
				c.stroke(run, 2, thermalOn, to)
			}
			continue
		}
		c.stroke(line, 2, onPicture, to)
	}
	c.ruler(v, scale, to)
	bar := image.Rect(in.Min.X+60, in.Max.Y+14, in.Max.X-40, in.Max.Y+28)
	c.bar(bar, DensityColors)
	base := float64(bar.Max.Y) - 1
	c.text(float64(bar.Min.X)-8, base, "σ₀n 0", 14, regular, ink, 1)
	c.text(float64(bar.Max.X)+8, base, report.Plain(v.Top, 3), 14, regular, ink, 0)
	for _, part := range []float64{0.25, 0.5, 0.75} { // of the root
		x := float64(bar.Min.X) + part*float64(bar.Dx())
		c.stroke([]Point{{x, float64(bar.Max.Y)}, {x, float64(bar.Max.Y) + 5}}, 1, ink, c.Rect)
		c.text(x, float64(bar.Max.Y)+19, report.Plain(v.Top*part*part, 3), 13, regular, ink, 0.5)
	}
	x, y := float64(in.Min.X), float64(in.Max.Y)+76
	c.text(x, y, "outlines: thermal part (dashed) at 1/e² of its centre, condensate at 2 %", 13, regular, faintInk, 0)
	c.text(x, y+18, "colours by the root of σ₀n; the optical density of a weak resonant probe is σ₀n/α", 13, regular, faintInk, 0)
}

// blocks draws a raster, whose pixels may be blocks of the map's.
func (c canvas) blocks(v *View, img *image.Paletted, box [4]float64, to image.Rectangle) {
	f := float64(img.Rect.Dx()) / float64(v.Width)
	c.picture(img, [4]float64{box[0] * f, box[1] * f, box[2] * f, box[3] * f}, to)
}

// axisNumber writes the number of an axis where its line leaves the frame.
func (c canvas) axisNumber(a, b Point, in image.Rectangle, number int) {
	d := math.Hypot(b.X-a.X, b.Y-a.Y)
	inner := in.Inset(14)
	for s := d; s > 0; s-- {
		x, y := a.X+(b.X-a.X)*s/d, a.Y+(b.Y-a.Y)*s/d
		if image.Pt(int(x), int(y)).In(inner) {
			c.text(x, y+5, strconv.Itoa(number), 15, bold, onPicture, 0.5)
			return
		}
	}
}

// ruler draws a bar of a round length.
func (c canvas) ruler(v *View, scale float64, in image.Rectangle) {
	most := float64(in.Dx()) / scale * v.PixelUm / 3
	um := math.Pow(10, math.Floor(math.Log10(most)))
	for _, k := range []float64{5, 2} {
		if k*um <= most {
			um *= k
			break
		}
	}
	x, y := float64(in.Min.X)+16, float64(in.Max.Y)-16
	c.stroke([]Point{{x, y}, {x + um/v.PixelUm*scale, y}}, 3, onPicture, in)
	c.text(x, y-8, report.Plain(um, 3)+" µm", 16, bold, onPicture, 0)
}

// bar draws a scale from low to high.
func (c canvas) bar(in image.Rectangle, colors color.Palette) {
	for x := in.Min.X; x < in.Max.X; x++ {
		k := (x - in.Min.X) * (levels - 1) / max(1, in.Dx()-1)
		for y := in.Min.Y; y < in.Max.Y; y++ {
			c.Set(x, y, colors[k])
		}
	}
}

func (c canvas) residual(v *View, box [4]float64, in image.Rectangle) {
	c.text(float64(in.Min.X), float64(in.Min.Y)-8, "residual, in standard deviations", 14, regular, faintInk, 0)
	to := fitted(box, in)
	c.blocks(v, v.Residual, box, to)
	bar := image.Rect(in.Min.X+34, in.Max.Y+8, in.Max.X-34, in.Max.Y+20)
	c.bar(bar, ResidualColors)
	c.text(float64(bar.Min.X)-6, float64(bar.Max.Y)-1, "−5σ", 13, regular, ink, 1)
	c.text(float64(bar.Max.X)+6, float64(bar.Max.Y)-1, "+5σ", 13, regular, ink, 0)
}

// cut draws data, thermal part and sum along an axis.
func (c canvas) cut(cut Cut, v *View, reach float64, number int, in image.Rectangle) {
	reach = math.Min(reach, farthest(cut.Um))
	high := math.Max(0.05, v.Top*0.3)
	for _, list := range [][]float64{cut.Data, cut.Total} {
		for i, d := range list {
			if math.Abs(cut.Um[i]) <= reach && d > high {
				high = d
			}
		}
	}
	low := -0.08 * high
	high *= 1.06
	place := func(um, od float64) Point {
		return Point{
			float64(in.Min.X) + (um+reach)/(2*reach)*float64(in.Dx()),
			float64(in.Max.Y) - (od-low)/(high-low)*float64(in.Dy()),
		}
	}
	c.grid(in, place, reach, high)
	curve := func(values []float64) (line []Point) {
		for i, d := range values {
			if d-d == 0 && math.Abs(cut.Um[i]) <= reach {
				line = append(line, place(cut.Um[i], d))
			}
		}
		return line
	}
	for _, p := range curve(cut.Data) {
		c.dot(p, 3, dataInk, in)
	}
	for _, run := range dashed(curve(cut.Thermal), 7, 4) {
		c.stroke(run, 2, thermalInk, in)
	}
	c.stroke(curve(cut.Total), 1.5, ink, in)
	c.text(float64(in.Min.X), float64(in.Min.Y)-8, "cut along axis "+strconv.Itoa(number)+": data, thermal part (dashed), sum", 13, regular, faintInk, 0)
	c.text(float64(in.Max.X), float64(in.Max.Y)+18, "µm", 13, regular, ink, 1)
	c.text(float64(in.Min.X)-8, float64(in.Min.Y)-8, "σ₀n", 13, regular, ink, 1)
}

func farthest(um []float64) float64 {
	most := 1.0
	for _, x := range um {
		most = math.Max(most, math.Abs(x))
	}
	return most
}

// grid draws lines at round numbers with their values.
func (c canvas) grid(in image.Rectangle, place func(um, od float64) Point, reach, high float64) {
	step := round(2 * reach / 5)
	for k := -math.Floor(reach / step); k*step <= reach; k++ {
		p := place(k*step, 0)
		c.stroke([]Point{{p.X, float64(in.Min.Y)}, {p.X, float64(in.Max.Y)}}, 1, gridInk, in)
		if p.X < float64(in.Max.X)-40 {
			c.text(p.X, float64(in.Max.Y)+18, report.Plain(k*step, 4), 13, regular, ink, 0.5)
		}
	}
	step = round(high / 3)
	for k := 0.0; k*step <= high; k++ {
		p := place(0, k*step)
		c.stroke([]Point{{float64(in.Min.X), p.Y}, {float64(in.Max.X), p.Y}}, 1, gridInk, in)
		if p.Y > float64(in.Min.Y)+8 {
			c.text(float64(in.Min.X)-8, p.Y+5, strconv.FormatFloat(k*step, 'g', 3, 64), 13, regular, ink, 1)
		}
	}
}

// round is the next smaller of 1, 2, 5 times a power of ten.
func round(x float64) float64 {
	p := math.Pow(10, math.Floor(math.Log10(x)))
	for _, k := range []float64{5, 2} {
		if k*p <= x {
			return k * p
		}
	}
	return p
}

// cards writes the numbers with both errors.
func (c canvas) cards(cards []report.Card, in image.Rectangle) {
	y := float64(in.Min.Y) + 20
	for _, k := range cards {
		c.text(float64(in.Min.X), y, k.Label, 15, regular, faintInk, 0)
		end := c.text(float64(in.Min.X)+52, y, k.Value, 24, bold, ink, 0)
		c.text(end+6, y, k.Unit, 15, regular, faintInk, 0)
		end = float64(in.Min.X) + 52
		if k.Err != "" {
			end = c.text(end, y+18, k.Err+" stat", 13, regular, ink, 0) + 10
		}
		if k.Cal != "" {
			c.text(end, y+18, k.Cal+" cal", 13, regular, faintInk, 0)
		}
		y += 50
	}
}
