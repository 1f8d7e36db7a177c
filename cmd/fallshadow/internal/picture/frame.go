package picture

import (
	"image"
	"math"

	"fallshadow/imageio"
)

// Frame draws the whole saved frame for finding one's way: the fraction of the light
// that is missing behind the atoms, over blocks of pixels; for a density image the
// density. It is nil where the shot has neither.
func Frame(raw *imageio.Raw) *image.Paletted {
	if d := raw.Frames[imageio.Density]; d != nil {
		high := 0.05
		for _, p := range d.Pix {
			if v := float64(p); v-v == 0 {
				high = math.Max(high, v)
			}
		}
		return raster(d.Pix, d.Width, linear(0, high), DensityColors)
	}
	a, l, d := raw.Frames[imageio.Atoms], raw.Frames[imageio.Light], raw.Frames[imageio.Dark]
	if a == nil || l == nil {
		return nil
	}
	if d == nil {
		d = &imageio.Frame{Width: a.Width, Height: a.Height, Pix: make([]float32, len(a.Pix))}
	}
	const side = 320
	b := max(1, (max(a.Width, a.Height)+side-1)/side)
	img := image.NewPaletted(image.Rect(0, 0, (a.Width+b-1)/b, (a.Height+b-1)/b), DensityColors)
	for y := range img.Rect.Dy() {
		for x := range img.Rect.Dx() {
			dark := blockMean(d.Pix, a.Width, x*b, y*b, b)
			light := blockMean(l.Pix, a.Width, x*b, y*b, b) - dark
			atoms := blockMean(a.Pix, a.Width, x*b, y*b, b) - dark
			img.Pix[y*img.Stride+x] = level(1 - atoms/light)
		}
	}
	return img
}
