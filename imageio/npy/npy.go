// Package npy reads arrays of pictures in NPY and, through archive/zip, in NPZ (format
// versions 1.0 to 3.0, numpy.lib.format, NumPy Enhancement Proposal 1).
package npy

import (
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
	"regexp"
	"strconv"
	"strings"

	"fallshadow/imageio/fault"
)

// Array is an array of planes of Height·Width pixels: of shape (Height, Width), or
// (planes, Height, Width); leading axes of any number count planes. An array of shape
// (Height, Width, planes), with up to 8 planes and a picture larger than that either way,
// is told from its shape. Name is the name in an NPZ.
type Array struct {
	Name                  string
	Width, Height, Planes int

	open       func() (io.ReadCloser, error) // the file from its first byte
	offset     int64                         // of the pixels
	dtype      dtype
	sp, sy, sx int // strides in pixels
	raw        []byte
}

// Open reads the header of an NPY file of size bytes and checks that the pixels which it
// declares are there. Errors wrap fault.Truncated, fault.Broken or fault.Unsupported.
func Open(r io.ReaderAt, size int64) (*Array, error) {
	a := &Array{open: func() (io.ReadCloser, error) {
		return io.NopCloser(io.NewSectionReader(r, 0, size)), nil
	}}
	if err := a.header(); err != nil {
		return nil, err
	}
	if want := a.offset + a.bytes(); want > size {
		return nil, fmt.Errorf("%w: the header declares %d bytes, the file has %d", fault.Truncated, want, size)
	}
	return a, nil
}

func (a *Array) bytes() int64 {
	return int64(a.Width) * int64(a.Height) * int64(a.Planes) * int64(a.dtype.size)
}

// header reads magic, version, length and the description.
func (a *Array) header() error {
	r, err := a.open()
	if err != nil {
		return err
	}
	defer r.Close()
	var head [12]byte
	if _, err := io.ReadFull(r, head[:10]); err != nil {
		return ended(err, "inside its first 10 bytes")
	}
	if string(head[:6]) != "\x93NUMPY" {
		return fmt.Errorf("%w: not NPY: starts with %q", fault.Broken, head[:6])
	}
	n, start := int64(binary.LittleEndian.Uint16(head[8:])), int64(10)
	switch head[6] {
	case 1:
	case 2, 3:
		if _, err := io.ReadFull(r, head[10:]); err != nil {
			return ended(err, "inside its first 12 bytes")
		}
		n, start = int64(binary.LittleEndian.Uint32(head[8:])), 12
	default:
		return fmt.Errorf("%w: NPY version %d.%d, 1 to 3 are read", fault.Unsupported, head[6], head[7])
	}
	const limit = 1 << 16
	if n > limit {
		return fmt.Errorf("%w: a header of %d bytes, the limit is %d", fault.Broken, n, limit)
	}
	text := make([]byte, n)
	if _, err := io.ReadFull(r, text); err != nil {
		return ended(err, "inside its header")
	}
	a.offset = start + n
	return a.describe(string(text))
}

func ended(err error, where string) error {
	if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
		return fmt.Errorf("%w: the file ends %s", fault.Truncated, where)
	}
	return err
}

var (
	descrText  = regexp.MustCompile(`['"]descr['"]\s*:\s*(?:'([^']*)'|"([^"]*)"|(\[))`)
	orderText  = regexp.MustCompile(`['"]fortran_order['"]\s*:\s*(True|False)`)
	shapeText  = regexp.MustCompile(`['"]shape['"]\s*:\s*\(([0-9L,\s]*)\)`)
	descrParts = regexp.MustCompile(`^([<>|=]?)([a-zA-Z])(\d*)$`)
)

// describe reads the dictionary of the header.
func (a *Array) describe(text string) error {
	d, o, s := descrText.FindStringSubmatch(text), orderText.FindStringSubmatch(text), shapeText.FindStringSubmatch(text)
	if d == nil || o == nil || s == nil {
		return fmt.Errorf("%w: the header %.80q lacks descr, fortran_order or shape", fault.Broken, text)
	}
	if d[3] != "" {
		return fmt.Errorf("%w: records of several fields: save the pixels as an array of plain numbers", fault.Unsupported)
	}
	var err error
	if a.dtype, err = parseType(d[1] + d[2]); err != nil {
		return err
	}
	var shape []int
	for _, part := range strings.Split(s[1], ",") {
		if part = strings.Trim(part, " \t\nL"); part == "" {
			continue
		}
		n, err := strconv.ParseInt(part, 10, 32)
		if err != nil {
			return fmt.Errorf("%w: the shape (%s) is too large", fault.Broken, s[1])
		}
		shape = append(shape, int(n))
	}
	return a.shape(shape, o[1] == "True")
}

// planesLast is the largest number of planes that is looked for behind the pixels.
const planesLast = 8

// shape finds planes, rows and columns among the axes and how far apart they lie.
func (a *Array) shape(shape []int, fortran bool) error {
	if len(shape) < 2 || len(shape) > 8 {
		return fmt.Errorf("%w: an array of %d axes %v is no picture or stack of pictures", fault.Unsupported, len(shape), shape)
	}
	strides, step := make([]int, len(shape)), 1
	for i := range shape {
		k := len(shape) - 1 - i
		if fortran {
			k = i
		}
		if shape[k] <= 0 || step > fault.MaxPixels/shape[k] {
			return fault.Size(int64(step), int64(shape[k]), 1)
		}
		strides[k] = step
		step *= shape[k]
	}
	n := len(shape)
	if n > 3 && fortran {
		return fmt.Errorf("%w: %d axes in Fortran order: save in C order", fault.Unsupported, n)
	}
	if n == 3 && shape[2] <= planesLast && shape[0] > planesLast && shape[1] > planesLast {
		shape = []int{shape[2], shape[0], shape[1]}
		strides = []int{strides[2], strides[0], strides[1]}
	}
	a.Height, a.Width = shape[n-2], shape[n-1]
	a.sy, a.sx = strides[n-2], strides[n-1]
	a.Planes = 1
	for _, d := range shape[:n-2] {
		a.Planes *= d
	}
	if n > 2 {
		a.sp = strides[n-3]
	}
	return nil
}

// Read decodes a plane into dst, which holds Width·Height pixels, and returns how many
// of them are not finite. The bytes of the whole array are kept for the next plane.
func (a *Array) Read(plane int, dst []float32) (nonFinite int, err error) {
	if err := a.load(); err != nil {
		return 0, err
	}
	size := a.dtype.size
	for y := range a.Height {
		at := (plane*a.sp + y*a.sy) * size
		if a.dtype.little16 && a.sx == 1 {
			counts16(dst[y*a.Width:(y+1)*a.Width], a.raw[at:])
			continue
		}
		for x := range a.Width {
			v := float32(a.dtype.value(a.raw[at : at+size]))
			if v-v != 0 {
				nonFinite++
			}
			dst[y*a.Width+x] = v
			at += a.sx * size
		}
	}
	return nonFinite, nil
}

// counts16 is the path of nearly every camera: a row of unsigned 16-bit numbers.
func counts16(dst []float32, raw []byte) {
	for i := range dst {
		dst[i] = float32(binary.LittleEndian.Uint16(raw[2*i:]))
	}
}

// load reads the bytes of all planes once.
func (a *Array) load() error {
	if a.raw != nil {
		return nil
	}
	r, err := a.open()
	if err != nil {
		return err
	}
	defer r.Close()
	if _, err := io.CopyN(io.Discard, r, a.offset); err != nil {
		return ended(err, "inside its header")
	}
	raw := make([]byte, a.bytes())
	if _, err := io.ReadFull(r, raw); err != nil {
		return ended(err, "inside its pixels")
	}
	// Reading on to the end lets an archive check its sum.
	if _, err := io.Copy(io.Discard, io.LimitReader(r, 1<<20)); err != nil {
		return ended(err, "before its end mark")
	}
	a.raw = raw
	return nil
}

// dtype is how a number is stored.
type dtype struct {
	size     int
	value    func([]byte) float64
	little16 bool
}

// parseType understands whole numbers of 1 to 8 bytes, logicals, and real numbers of 4
// and 8 bytes, in either byte order.
func parseType(descr string) (dtype, error) {
	m := descrParts.FindStringSubmatch(descr)
	if m == nil {
		return dtype{}, fmt.Errorf("%w: numbers of type %q", fault.Broken, descr)
	}
	if m[2] == "O" {
		return dtype{}, fmt.Errorf("%w: an array of objects (descr %q): save the pixels as an array of plain numbers", fault.Unsupported, descr)
	}
	var order binary.ByteOrder = binary.LittleEndian
	if m[1] == ">" {
		order = binary.BigEndian
	}
	size, _ := strconv.Atoi(m[3])
	if value := decoders(order)[m[2]+m[3]]; value != nil {
		return dtype{size, value, m[1] != ">" && m[2]+m[3] == "u2"}, nil
	}
	return dtype{}, fmt.Errorf("%w: numbers of type %q: save as whole or real numbers, such as uint16 or float32", fault.Unsupported, descr)
}

func decoders(o binary.ByteOrder) map[string]func([]byte) float64 {
	return map[string]func([]byte) float64{
		"b1": func(b []byte) float64 { return float64(b[0]) },
		"u1": func(b []byte) float64 { return float64(b[0]) },
		"i1": func(b []byte) float64 { return float64(int8(b[0])) },
		"u2": func(b []byte) float64 { return float64(o.Uint16(b)) },
		"i2": func(b []byte) float64 { return float64(int16(o.Uint16(b))) },
		"u4": func(b []byte) float64 { return float64(o.Uint32(b)) },
		"i4": func(b []byte) float64 { return float64(int32(o.Uint32(b))) },
		"u8": func(b []byte) float64 { return float64(o.Uint64(b)) },
		"i8": func(b []byte) float64 { return float64(int64(o.Uint64(b))) },
		"f4": func(b []byte) float64 { return float64(math.Float32frombits(o.Uint32(b))) },
		"f8": func(b []byte) float64 { return math.Float64frombits(o.Uint64(b)) },
	}
}
