package watch

import (
	"image"
	"math"
	"testing"

	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit"
)

func clouded(x, y, width, radius, angle float64) *report.Facts {
	return &report.Facts{X: x, Y: y, Pixel: 4e-6, Region: image.Rect(0, 0, 1024, 1024), Fit: &fit.Result{
		Model: fit.ModelBimodal, Angle: angle, Width: [2]float64{width * 2e-6, width * 1e-6}, Radius: [2]float64{radius * 2e-6, math.NaN()},
	}}
}

// The extent of a cloud holds its widths and radii along the axes of the picture, in saved
// pixels.
func TestExtent(t *testing.T) {
	tests := []struct {
		f    *report.Facts
		want image.Rectangle
	}{
		{clouded(500, 400, 20, 1, 0), image.Rect(500-80-10, 400-40-10, 500+80+11, 400+40+11)},
		{clouded(500, 400, 20, 1, math.Pi/2), image.Rect(500-40-10, 400-80-10, 500+40+11, 400+80+11)},
		{clouded(500, 400, 1, 100, 0), image.Rect(500-200-10, 400-2-10, 500+200+11, 400+2+11)},
	}
	for _, test := range tests {
		if got := night.Extent(test.f, 2, 4, 2, 10); got != test.want {
			t.Errorf("got %v, want %v", got, test.want)
		}
	}
	if got := onGrid(image.Rect(-5, 33, 70, 2000), image.Pt(1024, 1000)); got != image.Rect(0, 32, 96, 1000) {
		t.Errorf("on the grid it is %v", got)
	}
}

// A cloud is looked for in the whole frame where the window shows none, or one that
// reaches beyond it.
func TestLost(t *testing.T) {
	f := clouded(0, 0, 1, 1, 0)
	if lost(f) {
		t.Error("a cloud in the window is lost")
	}
	f.Fit.Touches = true
	if !lost(f) {
		t.Error("a cut cloud is not looked for")
	}
	f.Fit.Touches, f.Fit.Model = false, fit.ModelNone
	if !lost(f) {
		t.Error("no cloud is not looked for")
	}
}
