package imageio

import (
	"math"
	"math/bits"
)

// Sum is a checksum of the frames, their sizes and their bits, which others share by a chance of
// 2⁻⁶⁴. It costs a sixth of the digest, is no match for a forger and means nothing to another
// program.
func (raw *Raw) Sum() uint64 {
	sum := uint64(numRoles)
	for _, f := range raw.Frames {
		if sum = stir(sum, 1); f != nil {
			sum = stir(stir(sum, uint64(f.Width)), uint64(f.Height))
			sum = stir(sum, sumPixels(f.Pix))
		}
	}
	return sum
}

// stir takes x into a sum: both halves of a product with an odd number.
func stir(sum, x uint64) uint64 {
	hi, lo := bits.Mul64(sum^x, 0x9e3779b97f4a7c15)
	return hi ^ lo
}

// sumPixels keeps four sums that a processor works on side by side, each of pairs of pixels.
func sumPixels(pix []float32) uint64 {
	a, b, c, d := uint64(1), uint64(2), uint64(3), uint64(4)
	pair := func(v, w float32) uint64 { return uint64(math.Float32bits(v)) | uint64(math.Float32bits(w))<<32 }
	for ; len(pix) >= 8; pix = pix[8:] {
		p := (*[8]float32)(pix)
		a, b = stir(a, pair(p[0], p[1])), stir(b, pair(p[2], p[3]))
		c, d = stir(c, pair(p[4], p[5])), stir(d, pair(p[6], p[7]))
	}
	for _, v := range pix {
		a = stir(a, pair(v, 0))
	}
	return stir(stir(stir(a, b), c), d)
}
