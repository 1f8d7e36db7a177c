package imageio

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"image"
	"image/png"
	"io"

	"fallshadow/imageio/fault"
)

// openPNG reads a grey picture of 8 or 16 bits (PNG specification, second edition,
// ISO/IEC 15948). All chunks must be there.
func openPNG(r io.ReaderAt, size int64) (*contents, error) {
	head, texts, err := pngChunks(r, size)
	if err != nil {
		return nil, err
	}
	width, height := int64(binary.BigEndian.Uint32(head)), int64(binary.BigEndian.Uint32(head[4:]))
	bits, colour := int64(head[8]), head[9]
	if colour != 0 || bits < 8 {
		return nil, fmt.Errorf("%w: PNG of colour type %d with %d bits: save as grey with 16 bits", fault.Unsupported, colour, bits)
	}
	if err := fault.Size(width, height, 1); err != nil {
		return nil, err
	}
	if err := fault.Packed(width*height*bits/8, size); err != nil {
		return nil, err
	}
	read := func(_ int, dst []float32) (int, error) {
		return 0, decodePNG(io.NewSectionReader(r, 0, size), dst)
	}
	return &contents{
		meta:   tags(texts),
		stacks: []stack{{"", int(width), int(height), 1, read}},
	}, nil
}

// pngChunks walks the chunks up to IEND and returns IHDR and the texts (tEXt, Latin-1).
func pngChunks(r io.ReaderAt, size int64) (head []byte, texts map[string]string, err error) {
	texts = make(map[string]string)
	for at := int64(8); ; {
		var start [8]byte
		if n, _ := r.ReadAt(start[:], at); n < len(start) {
			return nil, nil, fmt.Errorf("%w: the file ends at byte %d before its IEND chunk", fault.Truncated, size)
		}
		n, kind := int64(binary.BigEndian.Uint32(start[:])), string(start[4:])
		if at+n+12 > size {
			return nil, nil, fmt.Errorf("%w: a chunk of %d bytes from byte %d on, the file has %d", fault.Truncated, n, at, size)
		}
		if at == 8 && (kind != "IHDR" || n != 13) {
			return nil, nil, fmt.Errorf("%w: the first chunk is %q, not IHDR", fault.Broken, kind)
		}
		if kind == "IEND" {
			return head, texts, nil
		}
		if kind == "IHDR" || kind == "tEXt" {
			const longest = 1 << 16
			body := make([]byte, min(n, longest))
			if _, err := r.ReadAt(body, at+8); err != nil && err != io.EOF {
				return nil, nil, err
			}
			if key, text, ok := bytes.Cut(body, []byte{0}); at == 8 {
				head = body
			} else if kind == "tEXt" && ok && len(texts) < 1000 {
				texts[string(key)] = latin1(text)
			}
		}
		at += n + 12
	}
}

func latin1(b []byte) string {
	runes := make([]rune, len(b))
	for i, c := range b {
		runes[i] = rune(c)
	}
	return string(runes)
}

func decodePNG(r io.Reader, dst []float32) error {
	img, err := png.Decode(r)
	if err != nil {
		return fmt.Errorf("%w: %w", fault.Broken, err)
	}
	switch img := img.(type) {
	case *image.Gray16:
		for i := range dst {
			dst[i] = float32(binary.BigEndian.Uint16(img.Pix[2*i:]))
		}
	case *image.Gray:
		for i := range dst {
			dst[i] = float32(img.Pix[i])
		}
	default:
		return fmt.Errorf("%w: the pixels came as %T, not grey", fault.Unsupported, img)
	}
	return nil
}
