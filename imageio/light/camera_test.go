package light

import (
	"image"
	"math"
	"testing"

	"fallshadow/imageio"
)

func TestCameraRefuses(t *testing.T) {
	for name, c := range map[string]Camera{
		"negative gain": {ElectronsPerCount: -1}, "NaN noise": {ReadNoise: math.NaN()},
		"infinite scale": {FullScale: math.Inf(1)}, "bin of three": {Bin: 3},
	} {
		if c.check() == nil {
			t.Errorf("%s passes", name)
		}
	}
	for name, c := range map[string]Camera{
		"region outside": {Region: image.Rect(10, 10, 40, 20)},
		"too small":      {Region: image.Rect(0, 0, 8, 8), Bin: 4},
	} {
		if _, err := c.window(32, 32); err == nil {
			t.Errorf("%s passes", name)
		}
	}
}

// ramp is a noiseless frame whose every pixel differs.
func ramp(width, height int, start float32) *imageio.Frame {
	f := &imageio.Frame{Width: width, Height: height, Pix: make([]float32, width*height)}
	for i := range f.Pix {
		f.Pix[i] = start + float32(i%width) + 3*float32(i/width)
	}
	return f
}

// TestBins checks that a region and a bin give exact sums over the pixels that ToSaved
// names, and that one bad pixel costs its bin and no other.
func TestBins(t *testing.T) {
	const width, height = 61, 47
	bad := [2]int{20, 15}
	for _, bin := range []int{1, 2, 4} {
		region := image.Rect(7, 5, 60, 46)
		c := Camera{ElectronsPerCount: 2, ReadNoise: 3, Bin: bin, Region: region, BadPixels: [][2]int{bad, {0, 0}}}
		raw := &imageio.Raw{}
		raw.Frames[imageio.Atoms] = ramp(width, height, 1100)
		raw.Frames[imageio.Light] = ramp(width, height, 1100)
		dark := ramp(width, height, 100)
		for i := range dark.Pix {
			shift := float32(i * 7919 % 13)
			dark.Pix[i] += shift
			raw.Frames[imageio.Atoms].Pix[i] += shift
			raw.Frames[imageio.Light].Pix[i] += shift
		}
		raw.Frames[imageio.Dark] = dark
		n := prepare(t, c, []*imageio.Raw{raw})
		e := expose(t, n, raw)
		if e.Width != 53/bin || e.Height != 41/bin {
			t.Fatalf("bin %d: %dx%d", bin, e.Width, e.Height)
		}
		within(t, "read", e.Noise.Read, float64(3*bin), 1e-12)
		within(t, "read of light", e.Noise.LightRead, float64(9*bin*bin), 1e-9)
		for i, g := range e.Good {
			x, y := n.Camera.ToSaved(float64(i%e.Width), float64(i/e.Width))
			reach := float64(bin) / 2
			inside := math.Abs(x-float64(bad[0])) < reach && math.Abs(y-float64(bad[1])) < reach
			if g == inside {
				t.Errorf("bin %d: pixel %d at (%g, %g): good %v", bin, i, x, y, g)
			}
			within(t, "sum", e.Atoms[i], float64(2*1000*bin*bin), 1e-9)
		}
	}
}

func TestDensityImage(t *testing.T) {
	f := ramp(16, 12, 0)
	f.Pix[5*16+6] = float32(math.NaN())
	raw := &imageio.Raw{}
	raw.Frames[imageio.Density] = f
	n := prepare(t, Camera{Bin: 2}, []*imageio.Raw{raw})
	e := expose(t, n, raw)
	if e.Atoms != nil || e.Light != nil || e.Width != 8 || e.Height != 6 {
		t.Fatalf("density exposure %dx%d with frames", e.Width, e.Height)
	}
	for i, g := range e.Good {
		x, y := n.Camera.ToSaved(float64(i%8), float64(i/8))
		if g == (i == 2*8+3) {
			t.Errorf("pixel %d: good %v", i, g)
		}
		if g {
			within(t, "mean", e.Density[i], x+3*y, 1e-9)
		}
	}
}
