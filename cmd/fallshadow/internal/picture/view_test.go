package picture

import (
	"bytes"
	"image"
	"image/png"
	"math"
	"testing"

	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit"
	"fallshadow/imageio"
)

// cloud is a picture of known shape: a gaussian of rms 36 and 21 px and a Thomas-Fermi
// column of radii 15 and 27 px, both turned by 30 degrees about (121.3, 88.8).
func cloud() *report.Facts {
	const w, h, x0, y0, thermal, condensate = 240, 180, 121.3, 88.8, 0.8, 1.7
	m := &fit.Maps{Width: w, Height: h}
	sin, cos := math.Sincos(math.Pi / 6)
	for i := range w * h {
		x, y := float64(i%w)-x0, float64(i/w)-y0
		u, v := x*cos+y*sin, y*cos-x*sin
		t := thermal * math.Exp(-u*u/(2*36*36)-v*v/(2*21*21))
		c := condensate * math.Pow(math.Max(0, 1-u*u/225-v*v/729), 1.5)
		m.Thermal = append(m.Thermal, float32(t))
		m.Total = append(m.Total, float32(t+c))
		m.Seen = append(m.Seen, float32(t+c))
		m.Density = append(m.Density, float32(t+c+0.01*math.Sin(float64(i))))
		m.Residual = append(m.Residual, float32(math.Sin(float64(i))))
	}
	m.Density[0] = float32(math.NaN())
	return &report.Facts{
		Region: image.Rect(10, 20, 250, 200), Pixel: 2e-6,
		Fit: &fit.Result{Model: fit.ModelBimodal, X: x0, Y: y0, Angle: math.Pi / 6, PeakOD: thermal + condensate, Maps: m},
	}
}

// The outlines lie on the level of the shape that was drawn, within a third of a pixel.
func TestOutlinesLieOnTheirLevel(t *testing.T) {
	v := New(cloud())
	sin, cos := math.Sincos(math.Pi / 6)
	levels := map[string][2]float64{ // semi-axes where the part has the stated fraction
		"thermal":    {36 * math.Sqrt(-2*math.Log(ThermalFraction)), 21 * math.Sqrt(-2*math.Log(ThermalFraction))},
		"condensate": {15 * math.Sqrt(1-math.Pow(CondensateFraction, 2./3)), 27 * math.Sqrt(1-math.Pow(CondensateFraction, 2./3))},
	}
	if len(v.Outlines) != 2 {
		t.Fatalf("%d outlines", len(v.Outlines))
	}
	for _, o := range v.Outlines {
		for _, p := range o.Line {
			x, y := p.X-121.3, p.Y-88.8
			a := levels[o.Part]
			r := math.Hypot((x*cos+y*sin)/a[0], (y*cos-x*sin)/a[1])
			if d := math.Abs(r-1) * math.Hypot(x, y); !(d <= 0.34) {
				t.Errorf("%s: point %v is %.2f px off its level", o.Part, p, d)
			}
		}
	}
}

// A cut follows the picture along its axis; data, parts and distances belong together.
func TestCuts(t *testing.T) {
	v := New(cloud())
	for axis, want := range []struct{ width, radius float64 }{{36, 15}, {21, 27}} {
		c := v.Cuts[axis]
		for i, um := range c.Um {
			d := um / 2 // px
			thermal := 0.8 * math.Exp(-d*d/(2*want.width*want.width))
			total := thermal + 1.7*math.Pow(math.Max(0, 1-d*d/(want.radius*want.radius)), 1.5)
			if !(math.Abs(c.Thermal[i]-thermal) <= 0.03) || !(math.Abs(c.Total[i]-total) <= 0.12) {
				t.Errorf("axis %d at %g px: thermal %.3f, want %.3f; sum %.3f, want %.3f", axis+1, d, c.Thermal[i], thermal, c.Total[i], total)
			}
			if !(math.Abs(c.Data[i]-c.Total[i]) <= 0.0101) {
				t.Errorf("axis %d at %g px: data %.3f beside %.3f", axis+1, d, c.Data[i], c.Total[i])
			}
		}
		if n := len(c.Um); n < 180 {
			t.Errorf("axis %d has %d points", axis+1, n)
		}
	}
}

// The maps come out in the colours of their values.
func TestMapsAreDrawn(t *testing.T) {
	v := New(cloud())
	if v.Top != 3 || v.Width != 240 || v.PixelUm != 2 {
		t.Errorf("top %g, width %d, pixel %g", v.Top, v.Width, v.PixelUm)
	}
	at := 89*240 + 121
	want := uint8(math.Round(float64(cloud().Fit.Maps.Density[at]) / 3 * (levels - 1)))
	if got := v.Density.Pix[at]; got != want {
		t.Errorf("the centre has level %d, want %d", got, want)
	}
	if v.Density.Pix[0] != levels || v.Faint.Pix[0] != levels {
		t.Error("a pixel that does not count has a colour of the scale")
	}
	if thin := 89*240 + 190; v.Faint.Pix[thin] < 2*v.Density.Pix[thin] {
		t.Errorf("a thin wing has level %d by its root, %d linearly", v.Faint.Pix[thin], v.Density.Pix[thin])
	}
	data, err := PNG(v.Density)
	if err != nil {
		t.Fatal(err)
	}
	back, err := png.Decode(bytes.NewReader(data))
	if err != nil || back.Bounds() != image.Rect(0, 0, 240, 180) {
		t.Errorf("%v, %v", back, err)
	}
}

// An empty picture has no outlines, a wide one is averaged down, none gives no view.
func TestViewAtTheEdges(t *testing.T) {
	f := cloud()
	f.Fit.Model, f.Fit.X, f.Fit.Y, f.Fit.Angle = fit.ModelNone, math.NaN(), math.NaN(), math.NaN()
	if v := New(f); len(v.Outlines) != 0 || len(v.Cuts) != 2 {
		t.Errorf("an empty picture has %d outlines and %d cuts", len(v.Outlines), len(v.Cuts))
	}
	f = cloud()
	f.Fit.X, f.Fit.Y = 1e6, -3
	New(f) // a centre outside the picture is drawn as well as can be
	wide := make([]float32, 1500*2)
	if b := raster(wide, 1500, linear(0, 1), DensityColors).Bounds(); b.Dx() != 500 || b.Dy() != 1 {
		t.Errorf("a wide picture became %v", b)
	}
	if v := New(&report.Facts{}); v != nil {
		t.Error("a view of nothing")
	}
}

// The whole frame shows the light that is missing, with or without a dark frame.
func TestFrame(t *testing.T) {
	frame := func(v ...float32) *imageio.Frame { return &imageio.Frame{Width: 2, Height: 1, Pix: v} }
	raw := &imageio.Raw{}
	if Frame(raw) != nil {
		t.Error("a picture of no frames")
	}
	raw.Frames[imageio.Atoms], raw.Frames[imageio.Light] = frame(110, 60), frame(110, 110)
	raw.Frames[imageio.Dark] = frame(10, 10)
	if got := Frame(raw).Pix; got[0] != 0 || got[1] != levels/2 {
		t.Errorf("levels %v", got)
	}
	raw.Frames[imageio.Dark] = nil
	if got := Frame(raw).Pix[1]; got != 115 { // 1 - 60/110 of 254
		t.Errorf("without a dark level %d", got)
	}
}
