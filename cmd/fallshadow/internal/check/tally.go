package check

import (
	"image"
	"math"

	"fallshadow/imageio"
)

// tally is what a shot's frames tell at first sight.
type tally struct {
	frames int
	size   image.Point
	peaks  [2]peak // of atoms and light
	raw    bool    // there are camera frames, not only a density image
}

// peak is how far a frame's counts go: the highest, and the one that a thousandth of the
// pixels are above, which hot pixels do not move.
type peak struct{ highest, common float64 }

func count(raw *imageio.Raw) tally {
	var t tally
	for _, f := range raw.Frames {
		if f != nil {
			t.frames++
			t.size = image.Pt(f.Width, f.Height)
		}
	}
	for i, role := range []imageio.Role{imageio.Atoms, imageio.Light} {
		if f := raw.Frames[role]; f != nil {
			t.peaks[i] = peakOf(f.Pix)
			t.raw = true
		}
	}
	return t
}

// peakOf sorts counts into 65536 bins from 0 to the highest, one count wide at least.
func peakOf(pix []float32) peak {
	highest := 0.0
	for _, v := range pix {
		if x := float64(v); x > highest && !math.IsInf(x, 1) {
			highest = x
		}
	}
	const bins = 1 << 16
	step := max(1, highest/(bins-1))
	var n [bins]int
	for _, v := range pix {
		if x := float64(v); x >= 0 && x <= highest {
			n[int(x/step)]++
		}
	}
	above, i := 0, bins-1
	for ; i > 0 && (above+n[i])*1000 <= len(pix); i-- {
		above += n[i]
	}
	return peak{highest, math.Min(float64(i)*step, highest)}
}
