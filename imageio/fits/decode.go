package fits

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"io"
	"math"

	"github.com/astrogo/fitsio"
)

// Plane decodes one picture of the unit into dst, which holds width·height pixels, row
// by row in the order of the file: physical value = BZERO + BSCALE·stored value, BLANK
// and what float32 cannot hold become not finite. It returns how many pixels are not
// finite. Call it only for a unit and a plane that Image reports.
func (h *HDU) Plane(plane int, dst []float32) (nonFinite int, err error) {
	raw, err := h.raw(plane)
	if err != nil {
		return 0, err
	}
	if want := len(dst) * h.pixelSize(); len(raw) != want {
		return 0, fmt.Errorf("plane %d has %d bytes, room was made for %d", plane, len(raw), want)
	}
	if h.Bitpix == 16 && h.scale == 1 && !h.hasBlank && h.zero == math.Trunc(h.zero) && math.Abs(h.zero) <= 1<<16 {
		counts16(dst, raw, int32(h.zero))
		return 0, nil
	}
	h.scaled(dst, raw)
	for _, v := range dst {
		if v-v != 0 {
			nonFinite++
		}
	}
	return nonFinite, nil
}

// raw hands fitsio one clean unit that holds the plane alone, and returns the bytes of
// its pixels. A panic in there becomes an error.
func (h *HDU) raw(plane int) (raw []byte, err error) {
	defer func() {
		if p := recover(); p != nil {
			raw, err = nil, fmt.Errorf("decoding the pixels: %v", p)
		}
	}()
	size := int64(h.Axes[0]) * int64(h.Axes[1]) * int64(h.pixelSize())
	head := bytes.NewReader(header(structure(h.Bitpix, h.Axes[0], h.Axes[1])))
	data := io.NewSectionReader(h.r, h.offset+int64(plane)*size, size)
	filling := bytes.NewReader(make([]byte, (blockSize-size%blockSize)%blockSize))
	unit, err := fitsio.NewDecoder(io.MultiReader(head, data, filling)).DecodeHDU()
	if err != nil {
		return nil, fmt.Errorf("decoding the pixels: %w", err)
	}
	return unit.(fitsio.Image).Raw(), nil
}

// counts16 is the path of nearly every camera: 16 bits with a whole BZERO.
func counts16(dst []float32, raw []byte, zero int32) {
	count := func(hi, lo byte) float32 { return float32(int32(int16(uint16(hi)<<8|uint16(lo))) + zero) }
	for len(dst) >= 4 && len(raw) >= 8 {
		d, r := (*[4]float32)(dst), (*[8]byte)(raw)
		d[0], d[1], d[2], d[3] = count(r[0], r[1]), count(r[2], r[3]), count(r[4], r[5]), count(r[6], r[7])
		dst, raw = dst[4:], raw[8:]
	}
	for i := range dst {
		dst[i] = count(raw[2*i], raw[2*i+1])
	}
}

// scaled is the general path.
func (h *HDU) scaled(dst []float32, raw []byte) {
	stored := h.stored(raw)
	for i := range dst {
		v, whole := stored(i)
		if h.Bitpix > 0 && h.hasBlank && whole == h.blank {
			v = math.NaN()
		}
		dst[i] = float32(h.zero + h.scale*v)
	}
}

// stored returns the reader of pixel i of raw: its value and, where the file holds
// integers, the same as a whole number.
func (h *HDU) stored(raw []byte) func(i int) (float64, int64) {
	be := binary.BigEndian
	whole := func(v int64) (float64, int64) { return float64(v), v }
	switch h.Bitpix {
	case 8:
		return func(i int) (float64, int64) { return whole(int64(raw[i])) }
	case 16:
		return func(i int) (float64, int64) { return whole(int64(int16(be.Uint16(raw[2*i:])))) }
	case 32:
		return func(i int) (float64, int64) { return whole(int64(int32(be.Uint32(raw[4*i:])))) }
	case 64:
		return func(i int) (float64, int64) { return whole(int64(be.Uint64(raw[8*i:]))) }
	case -32:
		return func(i int) (float64, int64) {
			return float64(math.Float32frombits(be.Uint32(raw[4*i:]))), 0
		}
	}
	return func(i int) (float64, int64) {
		return math.Float64frombits(be.Uint64(raw[8*i:])), 0
	}
}
