// Package light turns raw camera frames into counts that a fit can trust: the dark
// subtracted, bad pixels masked, the light that the cloud would have seen rebuilt, and
// the noise of each stated. It knows nothing of atoms beyond "somewhere here".
//
// A night runs in this order: Prepare over all shots, Expose for one shot (reference:
// its own light frame), a first fit, then References.Apply with the cloud that this fit
// found (reference: the best combination of light frames, where that is better).
package light

import (
	"fmt"
	"image"
	"math"

	"fallshadow/imageio"
)

// Camera is what is known of the camera before a frame is read. Pixels are those saved
// in the file, counted from (0,0) at the top left.
type Camera struct {
	ElectronsPerCount float64         // 0: measured from the night's light and dark frames
	ReadNoise         float64         // rms electrons of one read; 0: measured from the darks
	FullScale         float64         // counts; a pixel at or above is saturated; 0: not known
	BadPixels         [][2]int        // column, row of saved pixels
	Bin               int             // 1, 2 or 4 saved pixels summed along each side; 0 is 1
	Region            image.Rectangle // saved pixels that are used; empty: all
}

// ToSaved returns the place in the saved frame, in its pixels, of the point (x, y) of
// an exposure made with this camera.
func (c Camera) ToSaved(x, y float64) (float64, float64) {
	b := float64(c.bin())
	half := (b - 1) / 2
	return float64(c.Region.Min.X) + b*x + half, float64(c.Region.Min.Y) + b*y + half
}

// FromSaved is the inverse of ToSaved.
func (c Camera) FromSaved(x, y float64) (float64, float64) {
	b := float64(c.bin())
	half := (b - 1) / 2
	return (x - half - float64(c.Region.Min.X)) / b, (y - half - float64(c.Region.Min.Y)) / b
}

// Saved returns the rectangle of the saved frame that a rectangle of pixels of an exposure made
// with this camera covers.
func (c Camera) Saved(r image.Rectangle) image.Rectangle {
	b := c.bin()
	return image.Rectangle{Min: r.Min.Mul(b), Max: r.Max.Mul(b)}.Add(c.Region.Min)
}

func (c Camera) bin() int { return max(c.Bin, 1) }

// check refuses a camera that cannot be.
func (c Camera) check() error {
	for _, v := range []struct {
		name  string
		value float64
	}{{"electrons per count", c.ElectronsPerCount}, {"read noise", c.ReadNoise}, {"full scale", c.FullScale}} {
		if !(v.value >= 0) || math.IsInf(v.value, 0) {
			return fmt.Errorf("camera: %s is %g: give a positive number, or leave it out", v.name, v.value)
		}
	}
	if b := c.bin(); b != 1 && b != 2 && b != 4 {
		return fmt.Errorf("camera: bin is %d: give 1, 2 or 4", c.Bin)
	}
	return nil
}

// window is the part of the saved frame in use, and how it is rebinned. Width and
// height are those of the part before rebinning, a multiple of bin.
type window struct {
	frame         image.Point
	corner        image.Point
	width, height int
	bin           int
}

// window returns the window of this camera on frames of the given size. Columns and
// rows at the right and lower edge that do not fill a bin are left out.
func (c Camera) window(width, height int) (window, error) {
	all := image.Rect(0, 0, width, height)
	r := c.Region
	if r.Empty() {
		r = all
	}
	if !r.In(all) {
		return window{}, fmt.Errorf("camera: region %v is not inside a frame of %dx%d pixels: draw it inside the frame", r, width, height)
	}
	b := c.bin()
	w := window{frame: image.Pt(width, height), corner: r.Min, width: r.Dx() / b * b, height: r.Dy() / b * b, bin: b}
	if w.width < 3*b || w.height < 3*b {
		return window{}, fmt.Errorf("camera: a region of %dx%d pixels binned by %d is too small: use at least 3x3 bins", r.Dx(), r.Dy(), b)
	}
	return w, nil
}

// rect is the window in saved pixels.
func (w window) rect() image.Rectangle {
	return image.Rectangle{Min: w.corner, Max: w.corner.Add(image.Pt(w.width, w.height))}
}

// size is the number of pixels before rebinning.
func (w window) size() int { return w.width * w.height }

// pixels is how many saved pixels are in a bin.
func (w window) pixels() float64 { return float64(w.bin * w.bin) }

// crop returns the counts of a frame inside the window.
func (w window) crop(f *imageio.Frame) []float64 {
	pix := make([]float64, w.size())
	for y := range w.height {
		from := (w.corner.Y+y)*f.Width + w.corner.X
		to := pix[y*w.width : (y+1)*w.width]
		for x, v := range f.Pix[from : from+w.width] {
			to[x] = float64(v)
		}
	}
	return pix
}

// sum adds up the pixels of each bin. The variance of a sum of bin² pixels is bin² times
// that of one pixel's read, and its shot noise follows from its own electrons.
func (w window) sum(pix []float64) []float64 {
	if w.bin == 1 {
		return pix
	}
	bw := w.width / w.bin
	out := make([]float64, bw*(w.height/w.bin))
	for y := range w.height {
		row := out[y/w.bin*bw:]
		for x, v := range pix[y*w.width : (y+1)*w.width] {
			row[x/w.bin] += v
		}
	}
	return out
}

// good tells which bins hold no bad pixel.
func (w window) good(bad []bool) []bool {
	bw := w.width / w.bin
	out := make([]bool, bw*(w.height/w.bin))
	for i := range out {
		out[i] = true
	}
	for i, b := range bad {
		if b {
			out[i/w.width/w.bin*bw+i%w.width/w.bin] = false
		}
	}
	return out
}
