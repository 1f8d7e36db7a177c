package night

import (
	"image"
	"math"

	"fallshadow/cmd/fallshadow/internal/report"
)

// Extent is the part of the frame, in saved pixels, within so many widths of the thermal
// part and radii of the condensate, and a margin.
func Extent(f *report.Facts, bin int, widths, radii, margin float64) image.Rectangle {
	perMetre := float64(bin) / f.Pixel
	var a [2]float64
	for i := range a {
		a[i] = perMetre * math.Max(orZero(widths*f.Fit.Width[i]), orZero(radii*f.Fit.Radius[i]))
	}
	sin, cos := math.Sincos(f.Fit.Angle)
	dx, dy := math.Hypot(a[0]*cos, a[1]*sin)+margin, math.Hypot(a[0]*sin, a[1]*cos)+margin
	return image.Rect(int(f.X-dx), int(f.Y-dy), int(f.X+dx)+1, int(f.Y+dy)+1)
}

func orZero(x float64) float64 {
	if math.IsNaN(x) {
		return 0
	}
	return x
}
