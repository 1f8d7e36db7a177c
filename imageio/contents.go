package imageio

import (
	"fmt"
	"io"
	"os"

	"fallshadow/imageio/fault"
	"fallshadow/imageio/fits"
)

// contents is what an open camera file holds: its arrays in order, and its metadata.
type contents struct {
	stacks []stack
	meta   Metadata
}

// stack is an array of planes of one size. read decodes one of them into width·height
// pixels and counts those that are not finite.
type stack struct {
	name                  string
	width, height, planes int
	read                  func(plane int, dst []float32) (nonFinite int, err error)
}

// withContents opens a file, whatever its format, and hands its contents to use.
func withContents(full string, use func(*contents) error) error {
	f, err := os.Open(full)
	if err != nil {
		return cause(err)
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return cause(err)
	}
	if !info.Mode().IsRegular() {
		return fmt.Errorf("%w: not a regular file", fault.Unsupported)
	}
	c, err := open(f, info.Size())
	if err != nil {
		return err
	}
	return use(c)
}

// open reads everything but the pixels.
func open(r io.ReaderAt, size int64) (*contents, error) {
	start := make([]byte, sniffLength)
	n, err := r.ReadAt(start, 0)
	if err != nil && err != io.EOF {
		return nil, err
	}
	switch format := Sniff(start[:n]); format {
	case FITS:
		return openFITS(r, size)
	case Empty:
		return nil, fmt.Errorf("%w: the file is empty", fault.Truncated)
	default:
		return nil, fmt.Errorf("%w: the content is %s: save the frames as FITS, TIFF, PNG or NPY", fault.Unsupported, format)
	}
}

func openFITS(r io.ReaderAt, size int64) (*contents, error) {
	f, err := fits.Open(r, size)
	if err != nil {
		return nil, err
	}
	c := &contents{meta: cards(f)}
	for i, h := range f.HDUs {
		width, height, planes, err := h.Image()
		if err != nil {
			return nil, fmt.Errorf("%w (header-data unit %d)", err, i)
		}
		if planes > 0 {
			c.stacks = append(c.stacks, stack{h.Name(), width, height, planes, h.Plane})
		}
	}
	return c, nil
}
