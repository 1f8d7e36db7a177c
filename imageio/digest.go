package imageio

import (
	"crypto/sha256"
	"encoding/binary"
	"hash"
	"math"
)

// Digest returns the SHA-256 of a frame, zero for an absent one (nil): of its size and its
// pixels, as 16-bit numbers where all of them are whole counts from 0 to 65535, else as
// float32, little-endian. So the digest belongs to the pixels, whatever file format brought
// them.
func Digest(f *Frame) [32]byte {
	if f == nil {
		return [32]byte{}
	}
	// Nearly all frames are whole counts: they are looked at while they are hashed.
	sum, ok := f.digest('u')
	if !ok {
		sum, _ = f.digest('f')
	}
	return sum
}

// digest is Digest for pixels of the kind told, 'u' or 'f'; ok is false where one is not.
func (f *Frame) digest(kind byte) (sum [32]byte, ok bool) {
	h := sha256.New()
	head := binary.LittleEndian.AppendUint64([]byte{kind}, uint64(f.Width))
	h.Write(binary.LittleEndian.AppendUint64(head, uint64(f.Height)))
	if !hashPixels(h, make([]byte, 1<<15), f.Pix, kind == 'u') {
		return sum, false
	}
	return [32]byte(h.Sum(nil)), true
}

// sign fills in the digests.
func (raw *Raw) sign() {
	h := sha256.New()
	for r, f := range raw.Frames {
		raw.Digests[r] = Digest(f)
		h.Write(raw.Digests[r][:])
	}
	raw.Digest = [32]byte(h.Sum(nil))
}

func hashPixels(h hash.Hash, buf []byte, pix []float32, short bool) bool {
	for len(pix) > 0 {
		n := min(len(buf)/4, len(pix))
		some := buf[:4*n]
		if short {
			if some = buf[:2*n]; !put16(some, pix[:n]) {
				return false
			}
		} else {
			for i, v := range pix[:n] {
				binary.LittleEndian.PutUint32(some[4*i:], math.Float32bits(v))
			}
		}
		h.Write(some)
		pix = pix[n:]
	}
	return true
}

// put16 writes pixels as 16-bit numbers, four at a time, where dst is not nil, and reports
// whether all of them are whole numbers from 0 to 65535: only such a number survives the way
// there and back. Negative zero counts as zero.
func put16(dst []byte, pix []float32) bool {
	for len(pix) >= 4 {
		p := (*[4]float32)(pix)
		a, b, c, d := uint16(int32(p[0])), uint16(int32(p[1])), uint16(int32(p[2])), uint16(int32(p[3]))
		if float32(a) != p[0] || float32(b) != p[1] || float32(c) != p[2] || float32(d) != p[3] {
			return false
		}
		if pix = pix[4:]; dst != nil {
			binary.LittleEndian.PutUint64(dst, uint64(a)|uint64(b)<<16|uint64(c)<<32|uint64(d)<<48)
			dst = dst[8:]
		}
	}
	for i, v := range pix {
		w := uint16(int32(v))
		if float32(w) != v {
			return false
		}
		if dst != nil {
			binary.LittleEndian.PutUint16(dst[2*i:], w)
		}
	}
	return true
}
