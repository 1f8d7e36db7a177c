package figure

import (
	"bytes"
	"encoding/xml"
	"errors"
	"image"
	"image/color"
	"image/png"
	"io"
	"math"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg"
)

// sample is a figure with everything in it, some of it outside of the axes or NaN.
func sampleFigure() *Figure {
	return &Figure{
		X: Axis{Label: Markup("*T* / *T*_{c}^{0}"), Min: 0, Max: 1.4},
		Y: Axis{Label: Plain("fraction é*_^{}"), Min: 0, Max: 1},
		Bands: []Band{
			{Legend: "band", Role: Data, X: []float64{-1, 0.2, 0.4, math.NaN(), 1, 1.3}, Low: []float64{0, 0.1, 0.2, 0.2, 0.1, -4}, High: []float64{0, 0.3, 0.5, 0.6, 0.4, 9}},
		},
		Curves: []Curve{
			{Legend: "curve, *t*^{3}", Role: Law1, X: []float64{-1, 0.5, math.NaN(), 1, 3}, Y: []float64{2, 0.5, 0.5, 0.2, -7}},
			{Legend: "flat", Role: Law2, X: []float64{0, 1.4}, Y: []float64{0.25, 0.25}},
		},
		Points: []Points{{Legend: "shots", Role: Data, X: []float64{0.3, 0.7, 5, math.NaN()}, Y: []float64{0.9, 0.4, 0.5, 0.5},
			XErr: []float64{0.1, 9, 1, 1}, YErr: []float64{0.02, math.NaN(), 0, 0}, YTotal: []float64{7, 0.1, 0, 0},
			XLow: []float64{math.NaN(), 0.6, 0, 0}, XHigh: []float64{math.NaN(), 0.9, 0, 0}},
			{Legend: "more", Role: Second, Open: true, X: []float64{0.2}, Y: []float64{0.3}},
			{Legend: "most", Role: Third, Small: true, Plain: true, X: []float64{0.25}, Y: []float64{0.35}}},
		Lines: []Line{{Law4, 0.5, true}, {Law5, 1, false}, {Law5, 7, false}},
		Marks: []Mark{{0.1, 0.1, Plain("here")}},
	}
}

func render(t *testing.T, f *Figure, format string) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := f.Render(&b, format, 86, 66); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func TestSameBytes(t *testing.T) {
	for _, format := range Formats {
		if a, b := render(t, sampleFigure(), format), render(t, sampleFigure(), format); !bytes.Equal(a, b) {
			t.Errorf("%s: two drawings differ", format)
		}
	}
}

// TestPNG: 86 x 66 mm at 300 dpi (25.4 mm an inch), white corners, ink inside.
func TestPNG(t *testing.T) {
	m, err := png.Decode(bytes.NewReader(render(t, sampleFigure(), "png")))
	if err != nil {
		t.Fatal(err)
	}
	if s := m.Bounds().Size(); s.X < 1014 || s.X > 1017 || s.Y < 778 || s.Y > 781 {
		t.Errorf("%v pixels", s)
	}
	if !isWhite(m.At(0, 0)) || !isWhite(m.At(m.Bounds().Max.X-1, m.Bounds().Max.Y-1)) {
		t.Error("a corner is not white")
	}
	if inked(m) < 5000 {
		t.Errorf("only %d pixels have ink", inked(m))
	}
}

func isWhite(c color.Color) bool {
	r, g, b, _ := c.RGBA()
	return r == 0xffff && g == 0xffff && b == 0xffff
}

func inked(m image.Image) (n int) {
	for y := range m.Bounds().Max.Y {
		for x := range m.Bounds().Max.X {
			if !isWhite(m.At(x, y)) {
				n++
			}
		}
	}
	return n
}

var numberInPath = regexp.MustCompile(`-?\d+\.?\d*(?:e[-+]?\d+)?`)

// TestSVG: well-formed, letters only as outlines, and nothing drawn outside of the sheet of
// 86 x 66 mm (72 points an inch).
func TestSVG(t *testing.T) {
	const width, height = 86 / 25.4 * 72, 66 / 25.4 * 72
	d := xml.NewDecoder(bytes.NewReader(render(t, sampleFigure(), "svg")))
	paths := 0
	for {
		token, err := d.Token()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			t.Fatal(err)
		}
		e, ok := token.(xml.StartElement)
		if !ok {
			continue
		}
		if e.Name.Local == "text" || e.Name.Local == "image" {
			t.Errorf("element %s", e.Name.Local)
		}
		for _, a := range e.Attr {
			if e.Name.Local != "path" || a.Name.Local != "d" {
				continue
			}
			paths++
			if strings.Contains(a.Value, "NaN") || strings.Contains(a.Value, "Inf") {
				t.Errorf("path %.80s", a.Value)
			}
			for _, text := range numberInPath.FindAllString(a.Value, -1) {
				if v, _ := strconv.ParseFloat(text, 64); !(math.Abs(v) <= math.Max(width, height)+0.01) {
					t.Errorf("%g is outside of the sheet", v)
				}
			}
		}
	}
	if paths < 50 {
		t.Errorf("only %d paths", paths)
	}
}

func TestPDF(t *testing.T) {
	b := render(t, sampleFigure(), "pdf")
	if !bytes.Contains(b, []byte("/CreationDate (D:19700101000000)")) {
		t.Error("the PDF tells when it was made")
	}
	if !bytes.HasPrefix(b, []byte("%PDF-")) || bytes.Contains(b, []byte("/FontFile")) {
		t.Error("no PDF, or one with fonts in it")
	}
}

func TestRefused(t *testing.T) {
	for _, a := range []Axis{{Min: 1, Max: 1}, {Min: 0, Max: math.Inf(1)}, {Min: math.NaN(), Max: 1}, {Min: 0, Max: 1, Log: true}} {
		f := sampleFigure()
		f.Y = a
		if err := f.Render(io.Discard, "svg", 86, 66); err == nil {
			t.Errorf("axis %+v is drawn", a)
		}
	}
	if err := sampleFigure().Render(io.Discard, "gif", 86, 66); err == nil {
		t.Error("gif is drawn")
	}
	if _, err := FormatOf("curve.jpg"); err == nil {
		t.Error("jpg is a format")
	}
	if f, err := FormatOf("a.b/Curve.PDF"); err != nil || f != "pdf" {
		t.Errorf("Curve.PDF is %q, %v", f, err)
	}
}

func TestMarkup(t *testing.T) {
	for text, want := range map[string]Label{
		"*N*_{0}/N":  {{"N", true, 0}, {"0", false, -1}, {"/N", false, 0}},
		"x^{*a*}b":   {{"x", false, 0}, {"a", true, 1}, {"b", false, 0}},
		"a_b }^":     {{"a", false, 0}, {"_", false, 0}, {"b ", false, 0}, {"}", false, 0}, {"^", false, 0}},
		"":           nil,
		"evap_0001*": {{"evap", false, 0}, {"_", false, 0}, {"0001", false, 0}},
	} {
		got := Markup(text)
		if len(got) != len(want) {
			t.Errorf("%q: %+v", text, got)
			continue
		}
		for i := range want {
			if got[i] != want[i] {
				t.Errorf("%q: %+v, want %+v", text, got[i], want[i])
			}
		}
	}
	if got := Plain("a_{b}*"); len(got) != 1 || got[0].text != "a_{b}*" {
		t.Errorf("plain text is marked up: %+v", got)
	}
}

// TestStackedIndices: T_c^0 takes no more room than the wider index.
func TestStackedIndices(t *testing.T) {
	if both, one := Markup("*T*_{c}^{0}").width(10), Markup("*T*_{c}").width(10); !(both < one*1.08) {
		t.Errorf("stacked indices are %g wide, one is %g", both, one)
	}
}

func labelsOf(list []tick) (all []string) {
	for _, t := range list {
		text := ""
		for _, r := range t.label {
			text += r.text
		}
		if text != "" {
			all = append(all, text)
		}
	}
	return all
}

func TestTicks(t *testing.T) {
	for _, c := range []struct {
		axis  Axis
		want  string
		power int
	}{
		{Axis{Min: 0, Max: 1.4}, "0.0 0.2 0.4 0.6 0.8 1.0 1.2 1.4", 0},
		{Axis{Min: -0.02, Max: 1.05}, "0.0 0.2 0.4 0.6 0.8 1.0", 0},
		{Axis{Min: -30, Max: 30}, "\u221230 \u221220 \u221210 0 10 20 30", 0},
		{Axis{Min: 78000, Max: 183000}, "0.8 1.0 1.2 1.4 1.6 1.8", 5},
		{Axis{Min: 0, Max: 2e-3}, "0.0 0.5 1.0 1.5 2.0", -3},
		{Axis{Min: 2100, Max: 2540}, "2100 2200 2300 2400 2500", 0},
		{Axis{Min: 0.9, Max: 1200, Log: true}, "1 10 100 1000", 0},
		{Axis{Min: 7000, Max: 1.1e5, Log: true}, "104 2×104 5×104 105", 0},
		{Axis{Min: 15, Max: 60, Log: true}, "20 30 50", 0},
	} {
		list, power := c.axis.ticks()
		if got := strings.Join(labelsOf(list), " "); got != c.want || power != c.power {
			t.Errorf("%g to %g: %s, power %d, want %s, power %d", c.axis.Min, c.axis.Max, got, power, c.want, c.power)
		}
		for _, k := range list {
			if !c.axis.holds(k.at) {
				t.Errorf("mark at %g is outside of %g to %g", k.at, c.axis.Min, c.axis.Max)
			}
		}
	}
}

// luminance is the relative luminance of WCAG 2.1.
func luminance(c color.NRGBA) float64 {
	part := func(v uint8) float64 {
		x := float64(v) / 255
		if x <= 0.03928 {
			return x / 12.92
		}
		return math.Pow((x+0.055)/1.055, 2.4)
	}
	return 0.2126*part(c.R) + 0.7152*part(c.G) + 0.0722*part(c.B)
}

// TestLooks: every line and mark has the contrast of 3:1 to white that WCAG 2.1, 1.4.11
// asks of graphics, and no two laws have the same dashes.
func TestLooks(t *testing.T) {
	dashes := map[string]Role{}
	for role := Data; role <= Law5; role++ {
		l := looks[role]
		if contrast := 1.05 / (luminance(l.color) + 0.05); contrast < 3 {
			t.Errorf("role %d has a contrast of %.2f", role, contrast)
		}
		if role < Law1 {
			continue
		}
		key := ""
		for _, d := range l.dash {
			key += strconv.FormatFloat(d, 'g', -1, 64) + " "
		}
		if other, taken := dashes[key]; taken {
			t.Errorf("roles %d and %d have the same dashes", role, other)
		}
		dashes[key] = role
	}
}

// TestLegendHidesNothing: the legend goes where no curve passes, also between the points of one
// of few points and where all corners are taken.
func TestLegendHidesNothing(t *testing.T) {
	axis := Axis{Min: 0, Max: 1}
	nan := math.NaN()
	for name, curves := range map[string][]Curve{
		"none":            nil,
		"both diagonals":  {{X: []float64{0, 1}, Y: []float64{0, 1}}, {X: []float64{0, 1}, Y: []float64{1, 0}}},
		"steep from afar": {{X: []float64{0, 0.1, 1}, Y: []float64{90, 0.1, 0.1}}, {X: []float64{0.9, 1}, Y: []float64{-7, 9}}},
		"broken":          {{X: []float64{0, 0.05, 0.1, 1}, Y: []float64{nan, 0.9, nan, 0.9}}, {X: []float64{0, 1}, Y: []float64{0.1, 0.1}}},
	} {
		s := &sheet{Figure: &Figure{X: axis, Y: axis, Curves: curves}, frame: vg.Rectangle{Max: vg.Point{X: 200, Y: 120}}}
		box := s.freest(vg.Point{X: 50, Y: 30})
		if box.Min.X < legendInset || box.Min.Y < legendInset || box.Max.X > 200-legendInset+1e-9 || box.Max.Y > 120-legendInset+1e-9 {
			t.Errorf("%s: the legend %v is not in the frame", name, box)
		}
		for _, c := range curves {
			for k := 1; k < len(c.X); k++ {
				for part := 0.0; part <= 1; part += 1.0 / 4096 {
					p := s.at(c.X[k-1]+part*(c.X[k]-c.X[k-1]), c.Y[k-1]+part*(c.Y[k]-c.Y[k-1]))
					if p.X > box.Min.X && p.X < box.Max.X && p.Y > box.Min.Y && p.Y < box.Max.Y {
						t.Fatalf("%s: the legend %v hides %v", name, box, p)
					}
				}
			}
		}
	}
}

// TestLegendHidesNoBar: error bars reach where their points do not.
func TestLegendHidesNoBar(t *testing.T) {
	axis := Axis{Min: 0, Max: 1}
	points := []Points{
		{X: []float64{0.9}, Y: []float64{0.5}, YErr: []float64{0.3}, YTotal: []float64{0.45}},
		{X: []float64{0.5}, Y: []float64{0.1}, XErr: []float64{0.45}},
	}
	s := &sheet{Figure: &Figure{X: axis, Y: axis, Points: points}, frame: vg.Rectangle{Max: vg.Point{X: 200, Y: 120}}}
	box := s.freest(vg.Point{X: 50, Y: 30})
	if box.Max.X > 0.9*200 || box.Min.Y < 0.1*120 {
		t.Errorf("the legend %v hides a bar", box)
	}
	points[0].Plain, points[1].Plain = true, true
	if box := s.freest(vg.Point{X: 50, Y: 30}); box.Max.X < 0.9*200 {
		t.Errorf("the legend %v leaves room for bars that are not drawn", box)
	}
}
