// Package fits reads and writes images in FITS, the Flexible Image Transport System
// (FITS standard 4.0, IAU FITS Working Group, 2018). Headers are scanned and sizes
// checked here, in bounded memory, before a byte of pixels is handed to
// github.com/astrogo/fitsio, which trusts what a header says.
package fits

import (
	"bytes"
	"errors"
	"fmt"
	"io"

	"fallshadow/imageio/fault"
)

// maxHeader bounds the headers of one file together: 26,214 cards.
const maxHeader = 2 << 20

// File is an open FITS file: its header-data units in order. Trailing is the number of
// bytes behind the last of them, which the standard lets a reader ignore; it is 0 where
// the size of the file is not known.
type File struct {
	HDUs     []*HDU
	Trailing int64
}

// Open scans all headers of r, which holds size bytes (-1: unknown, r ends where it
// ends), and checks that the data which they declare are there. Only missing padding at
// the end of the file is forgiven. Errors wrap fault.Truncated, fault.Broken or
// fault.Unsupported and say where.
func Open(r io.ReaderAt, size int64) (*File, error) {
	s := scanner{r: r, size: size}
	if err := s.signature(); err != nil {
		return nil, err
	}
	f := new(File)
	for more := true; more; {
		h, err := s.unit(len(f.HDUs))
		if err != nil {
			return nil, err
		}
		f.HDUs = append(f.HDUs, h)
		if more, err = s.extension(); err != nil {
			return nil, err
		}
	}
	if size > s.at {
		f.Trailing = size - s.at
	}
	return f, nil
}

// scanner walks a file from unit to unit.
type scanner struct {
	r      io.ReaderAt
	size   int64
	at     int64
	header int64 // bytes of headers so far
}

func (s *scanner) read(p []byte, at int64) (int, error) {
	n, err := s.r.ReadAt(p, at)
	if errors.Is(err, io.EOF) {
		err = nil
	}
	return n, err
}

func (s *scanner) signature() error {
	var start [9]byte
	n, err := s.read(start[:], 0)
	switch {
	case err != nil:
		return err
	case n == 0:
		return fmt.Errorf("%w: the file is empty", fault.Truncated)
	case n < len(start) && bytes.HasPrefix([]byte("SIMPLE  ="), start[:n]):
		return fmt.Errorf("%w: the file ends after %d bytes, inside the first card", fault.Truncated, n)
	case string(start[:]) != "SIMPLE  =":
		return fmt.Errorf("%w: not FITS: starts with %q instead of SIMPLE", fault.Broken, start[:n])
	}
	return nil
}

// extension reports whether another unit follows. Anything but an XTENSION card is
// trailing matter.
func (s *scanner) extension() (bool, error) {
	var start [8]byte
	n, err := s.read(start[:], s.at)
	return err == nil && n == len(start) && string(start[:]) == "XTENSION", err
}

// unit reads the header at the present position and moves behind its data.
func (s *scanner) unit(index int) (*HDU, error) {
	h := &HDU{r: s.r}
	where := func(err error) error {
		return fmt.Errorf("%w (header-data unit %d)", err, index)
	}
	if err := s.cards(h); err != nil {
		return nil, where(err)
	}
	if err := h.geometry(); err != nil {
		return nil, where(err)
	}
	h.offset = s.at
	if err := s.present(h); err != nil {
		return nil, where(err)
	}
	s.at += (h.length + blockSize - 1) / blockSize * blockSize
	return h, nil
}

// present checks that the data of h are in the file.
func (s *scanner) present(h *HDU) error {
	end := h.offset + h.length
	size := s.size
	if size < 0 && h.length > 0 {
		var last [1]byte
		n, err := s.read(last[:], end-1)
		if err != nil {
			return err
		}
		if n == 0 {
			return fmt.Errorf("%w: the header declares %d bytes of data from byte %d on, the file ends before",
				fault.Truncated, h.length, h.offset)
		}
		return nil
	}
	if h.length > 0 && end > size {
		return fmt.Errorf("%w: the header declares %d bytes of data, the file has %d",
			fault.Truncated, h.length, max(0, size-h.offset))
	}
	return nil
}

// cards reads blocks until END.
func (s *scanner) cards(h *HDU) error {
	var block [blockSize]byte
	for start := s.at; ; {
		n, err := s.read(block[:], s.at)
		if err != nil {
			return err
		}
		for i := 0; i+cardSize <= n; i += cardSize {
			if bytes.Equal(bytes.TrimRight(block[i:i+cardSize], " \x00"), []byte("END")) {
				s.at += blockSize
				return nil
			}
			h.add(parseCard(block[i : i+cardSize]))
		}
		s.at, s.header = s.at+blockSize, s.header+blockSize
		if n < blockSize {
			return fmt.Errorf("%w: the header from byte %d on has no END card", fault.Truncated, start)
		}
		if s.header > maxHeader {
			return fmt.Errorf("%w: no END card within %d bytes of header", fault.Broken, maxHeader)
		}
	}
}
