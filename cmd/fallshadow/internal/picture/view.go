package picture

import (
	"bytes"
	"image"
	"image/png"
	"math"
	"sync"

	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit"
)

// View is what there is to see of a fitted shot. Places are in pixels of the maps, the
// centre of the first at (0,0).
type View struct {
	Width, Height int             // of the maps
	Region        image.Rectangle // that the maps cover, saved pixels
	PixelUm       float64         // side of a pixel of the maps in the plane of the atoms
	Top           float64         // σ0 n at the upper end of the scale
	Sigmas        float64         // residual at the upper end of its scale
	Outlines      []Outline
	Cuts          []Cut // along axis 1 and axis 2
	Density       *image.Paletted
	Faint         *image.Paletted // density by its root, so that thin wings show beside a dense core
	Residual      *image.Paletted
}

// Sigmas is the range of the scale of residuals, both ways.
const sigmas = 5

// New makes the view of a shot whose facts hold maps; nil where they hold none.
func New(f *report.Facts) *View {
	if f.Fit == nil || f.Fit.Maps == nil {
		return nil
	}
	m, r := f.Fit.Maps, f.Fit
	v := &View{Width: m.Width, Height: m.Height, Region: f.Region, PixelUm: f.Pixel * 1e6, Top: top(r), Sigmas: sigmas}
	x, y, angle := r.X, r.Y, r.Angle
	if r.Model == fit.ModelNone || math.IsNaN(x) || math.IsNaN(y) || math.IsNaN(angle) {
		x, y, angle = float64(m.Width-1)/2, float64(m.Height-1)/2, 0
	} else {
		v.Outlines = outlines(m, x, y)
	}
	for axis := range 2 {
		v.Cuts = append(v.Cuts, newCut(m, x, y, angle+float64(axis)*math.Pi/2, v.PixelUm))
	}
	v.Density = raster(m.Density, m.Width, linear(0, v.Top), DensityColors)
	v.Faint = raster(m.Density, m.Width, func(d float64) float64 { return math.Sqrt(math.Max(d, 0) / v.Top) }, DensityColors)
	v.Residual = raster(m.Residual, m.Width, linear(-sigmas, sigmas), ResidualColors)
	return v
}

// top chooses the upper end of the density scale: the least round number above the peak
// of the fit and the brightest thousandth of the picture.
func top(r *fit.Result) float64 {
	peak := math.Max(0.05, upper(r.Maps.Density))
	if r.PeakOD > peak {
		peak = r.PeakOD
	}
	step := math.Pow(10, math.Floor(math.Log10(peak)))
	for _, k := range []float64{1, 1.5, 2, 3, 4, 5, 6, 8} {
		if peak <= k*step {
			return k * step
		}
	}
	return 10 * step
}

// upper returns the value that one pixel in a thousand exceeds.
func upper(pix []float32) float64 {
	const bins = 1024
	low, high := math.Inf(1), math.Inf(-1)
	for _, p := range pix {
		if v := float64(p); v-v == 0 {
			low, high = math.Min(low, v), math.Max(high, v)
		}
	}
	if !(high > low) {
		return 0
	}
	var count [bins]int
	n := 0
	for _, p := range pix {
		if v := float64(p); v-v == 0 {
			count[int((v-low)/(high-low)*(bins-1))]++
			n++
		}
	}
	above := 0
	for i := bins - 1; i > 0; i-- {
		if above += count[i]; above*1000 > n {
			return low + float64(i+1)/(bins-1)*(high-low)
		}
	}
	return high
}

// PNG encodes a picture, fast rather than small.
func PNG(img image.Image) ([]byte, error) {
	var b bytes.Buffer
	e := png.Encoder{CompressionLevel: png.BestSpeed, BufferPool: &buffers}
	err := e.Encode(&b, img)
	return bytes.Clone(b.Bytes()), err // pictures are kept, the room to grow is not
}

// buffers keeps the compressors, whose tables are larger than most pictures.
var buffers encoderBuffers

type encoderBuffers struct{ pool sync.Pool }

func (p *encoderBuffers) Get() *png.EncoderBuffer {
	b, _ := p.pool.Get().(*png.EncoderBuffer)
	return b // nil where there is none: the encoder makes one
}

func (p *encoderBuffers) Put(b *png.EncoderBuffer) { p.pool.Put(b) }
