package imageio

import (
	"fmt"
	"io"
	"os"

	"fallshadow/imageio/fault"
	"fallshadow/imageio/fits"
	"fallshadow/imageio/npy"
	"fallshadow/imageio/tiff"
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
	case Gzip:
		return openGzip(r, size)
	case TIFF, BigTIFF:
		return openTIFF(r, size)
	case PNG:
		return openPNG(r, size)
	case NPY:
		return openNPY(r, size)
	case NPZ:
		return openNPZ(r, size)
	case Empty:
		return nil, fmt.Errorf("%w: the file is empty", fault.Truncated)
	case Zeros:
		return nil, fmt.Errorf("%w: the file holds zeros where its content should start", fault.Truncated)
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

// openTIFF makes one stack a page; the texts of the first page that has them count.
func openTIFF(r io.ReaderAt, size int64) (*contents, error) {
	f, err := tiff.Open(r, size)
	if err != nil {
		return nil, err
	}
	c := &contents{meta: Metadata{}}
	for _, p := range f.Pages {
		c.meta.under(tags(p.Tags))
		c.stacks = append(c.stacks, stack{"", p.Width, p.Height, 1, func(_ int, dst []float32) (int, error) {
			return 0, p.Read(dst)
		}})
	}
	return c, nil
}

func openNPY(r io.ReaderAt, size int64) (*contents, error) {
	a, err := npy.Open(r, size)
	if err != nil {
		return nil, err
	}
	return arrays(a), nil
}

func openNPZ(r io.ReaderAt, size int64) (*contents, error) {
	all, err := npy.OpenArchive(r, size)
	if err != nil {
		return nil, err
	}
	return arrays(all...), nil
}

func arrays(all ...*npy.Array) *contents {
	c := &contents{meta: Metadata{}}
	for _, a := range all {
		c.stacks = append(c.stacks, stack{a.Name, a.Width, a.Height, a.Planes, a.Read})
	}
	return c
}
