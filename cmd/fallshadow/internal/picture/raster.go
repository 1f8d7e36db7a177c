package picture

import (
	"image"
	"image/color"
	"math"
)

// widest is the side above which a picture is averaged down; no screen shows more of it.
const widest = 640

// raster draws values in a scale, of which place gives the fraction from its low to its
// high end, blocks of pixels averaged where the picture is wider than a screen shows.
// Not-a-number takes the last colour.
func raster(pix []float32, width int, place func(float64) float64, colors color.Palette) *image.Paletted {
	height := len(pix) / width
	b := (max(width, height) + widest - 1) / widest
	img := image.NewPaletted(image.Rect(0, 0, (width+b-1)/b, (height+b-1)/b), colors)
	for y := range img.Rect.Dy() {
		row := img.Pix[y*img.Stride:]
		for x := range img.Rect.Dx() {
			row[x] = level(place(blockMean(pix, width, x*b, y*b, b)))
		}
	}
	return img
}

// blockMean averages what counts in a block of side b; NaN where nothing does.
func blockMean(pix []float32, width, x0, y0, b int) float64 {
	if b == 1 {
		return float64(pix[y0*width+x0])
	}
	sum, n := 0.0, 0
	for y := y0; y < min(y0+b, len(pix)/width); y++ {
		for _, p := range pix[y*width+x0 : y*width+min(x0+b, width)] {
			if v := float64(p); v-v == 0 {
				sum += v
				n++
			}
		}
	}
	return sum / float64(n)
}

// linear places values evenly from low to high.
func linear(low, high float64) func(float64) float64 {
	return func(v float64) float64 { return (v - low) / (high - low) }
}

// level is the colour at a fraction of a scale.
func level(f float64) uint8 {
	if math.IsNaN(f) {
		return levels
	}
	return uint8(math.Round(math.Min(math.Max(f, 0), 1) * (levels - 1)))
}
