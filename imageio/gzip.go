package imageio

import (
	"compress/flate"
	"compress/gzip"
	"errors"
	"fmt"
	"io"
	"slices"

	"fallshadow/imageio/fault"
)

// openGzip reads a FITS file in gzip.
func openGzip(r io.ReaderAt, size int64) (*contents, error) {
	z, err := gzip.NewReader(io.NewSectionReader(r, 0, size))
	if err != nil {
		return nil, unpacking(err)
	}
	in := &inflated{from: z}
	start := make([]byte, sniffLength)
	n, err := in.ReadAt(start, 0)
	if err != nil && err != io.EOF {
		return nil, err
	}
	if format := Sniff(start[:n]); format != FITS {
		return nil, fmt.Errorf("%w: the gzip file holds %s, only FITS is read packed: unpack it first", fault.Unsupported, format)
	}
	return openFITS(in, -1)
}

// inflated is a packed file that can be read at any place. It is unpacked as far as it
// has been read, and kept; one that unpacks to more than fault.MaxInflated bytes is
// refused.
type inflated struct {
	from io.Reader
	buf  []byte
	end  error
}

func (f *inflated) ReadAt(p []byte, off int64) (int, error) {
	want := off + int64(len(p))
	if want > fault.MaxInflated {
		return 0, fmt.Errorf("%w: more than %d bytes when unpacked: unpack the file first", fault.Unsupported, fault.MaxInflated)
	}
	for f.end == nil && int64(len(f.buf)) < want {
		const chunk = 1 << 16
		f.buf = slices.Grow(f.buf, chunk)
		n, err := f.from.Read(f.buf[len(f.buf) : len(f.buf)+chunk])
		f.buf = f.buf[:len(f.buf)+n]
		if err != nil {
			f.end = unpacking(err)
		}
	}
	n := copy(p, f.buf[min(off, int64(len(f.buf))):])
	if n < len(p) {
		return n, f.end
	}
	return n, nil
}

// unpacking tells an archive cut short from a broken one.
func unpacking(err error) error {
	corrupt := flate.CorruptInputError(0)
	switch {
	case err == io.EOF:
		return err
	case errors.Is(err, io.ErrUnexpectedEOF):
		return fmt.Errorf("%w: the gzip file ends before its end mark", fault.Truncated)
	case errors.Is(err, gzip.ErrHeader), errors.Is(err, gzip.ErrChecksum), errors.As(err, &corrupt):
		return fmt.Errorf("%w: %w", fault.Broken, err)
	}
	return err
}
