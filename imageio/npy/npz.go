package npy

import (
	"archive/zip"
	"errors"
	"fmt"
	"io"
	"strings"

	"fallshadow/imageio/fault"
)

// maxArrays is more than any shot has.
const maxArrays = 4096

// OpenArchive reads the headers of the arrays in an NPZ file of size bytes, in the order
// of its directory. Members that do not end in .npy are passed over. Errors are those of
// Open, and name the array.
func OpenArchive(r io.ReaderAt, size int64) ([]*Array, error) {
	z, err := zip.NewReader(r, size)
	if errors.Is(err, zip.ErrFormat) {
		return nil, fmt.Errorf("%w: the directory at the end of the archive is missing", fault.Truncated)
	} else if err != nil {
		return nil, fmt.Errorf("%w: %w", fault.Broken, err)
	}
	if len(z.File) > maxArrays {
		return nil, fmt.Errorf("%w: more than %d members", fault.Unsupported, maxArrays)
	}
	var all []*Array
	var pixels int64
	for _, m := range z.File {
		name, ok := strings.CutSuffix(m.Name, ".npy")
		if !ok {
			continue
		}
		a, err := member(m, name, size)
		if err != nil {
			return nil, fmt.Errorf("array %q: %w", name, err)
		}
		if pixels += int64(a.Width) * int64(a.Height) * int64(a.Planes); pixels > fault.MaxPixels {
			return nil, fmt.Errorf("%w: %d pixels up to array %q, the limit is %d", fault.Unsupported, pixels, name, fault.MaxPixels)
		}
		all = append(all, a)
	}
	if len(all) == 0 {
		return nil, fmt.Errorf("%w: an archive (zip) without .npy arrays", fault.Unsupported)
	}
	return all, nil
}

// member reads the header of an array in an archive of size bytes.
func member(m *zip.File, name string, size int64) (*Array, error) {
	a := &Array{Name: name, open: func() (io.ReadCloser, error) {
		r, err := m.Open()
		if err != nil {
			return nil, fmt.Errorf("%w: %w", fault.Broken, err)
		}
		return marked{r}, nil
	}}
	if err := a.header(); err != nil {
		return nil, err
	}
	if want := a.offset + a.bytes(); m.UncompressedSize64 != uint64(want) {
		return nil, fmt.Errorf("%w: the header declares %d bytes, the archive %d", fault.Broken, want, m.UncompressedSize64)
	}
	return a, fault.Packed(a.bytes(), int64(min(m.CompressedSize64, uint64(size))))
}

// marked calls what the archive finds wrong broken.
type marked struct{ io.ReadCloser }

func (m marked) Read(p []byte) (int, error) {
	n, err := m.ReadCloser.Read(p)
	if err != nil && err != io.EOF && err != io.ErrUnexpectedEOF {
		err = fmt.Errorf("%w: %w", fault.Broken, err)
	}
	return n, err
}
