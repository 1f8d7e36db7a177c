package imageio

import (
	"crypto/sha256"
	"encoding/binary"
	"hash"
	"math"
)

// Digest returns the SHA-256 of frames in the order given, absent ones (nil) included. A
// frame enters with its size and its pixels: as 16-bit numbers where all of them are
// whole counts from 0 to 65535, else as float32, little-endian. So the digest belongs to
// the pixels, whatever file format brought them.
func Digest(frames ...*Frame) [32]byte {
	h := sha256.New()
	buf := make([]byte, 0, 1<<15)
	for _, f := range frames {
		if f == nil {
			h.Write([]byte{'-'})
			continue
		}
		kind := byte('f')
		if whole16(f.Pix) {
			kind = 'u'
		}
		head := binary.LittleEndian.AppendUint64([]byte{kind}, uint64(f.Width))
		h.Write(binary.LittleEndian.AppendUint64(head, uint64(f.Height)))
		hashPixels(h, buf, f.Pix, kind == 'u')
	}
	return [32]byte(h.Sum(nil))
}

func hashPixels(h hash.Hash, buf []byte, pix []float32, short bool) {
	for len(pix) > 0 {
		n := min(cap(buf)/4, len(pix))
		if short {
			buf = buf[:2*n]
			for i, v := range pix[:n] {
				binary.LittleEndian.PutUint16(buf[2*i:], uint16(v))
			}
		} else {
			buf = buf[:4*n]
			for i, v := range pix[:n] {
				binary.LittleEndian.PutUint32(buf[4*i:], math.Float32bits(v))
			}
		}
		h.Write(buf)
		pix = pix[n:]
	}
}

// whole16 reports whether every pixel is a whole number from 0 to 65535: only such a
// number survives the way there and back. Negative zero counts as zero.
func whole16(pix []float32) bool {
	for _, v := range pix {
		if float32(uint16(int32(v))) != v {
			return false
		}
	}
	return true
}
