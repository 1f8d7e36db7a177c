// Package tiff reads the pages of grey camera pictures in TIFF (TIFF revision 6.0, Adobe,
// 1992). The chain of pages is walked and judged here, in bounded memory; the pixels are
// decoded by golang.org/x/image/tiff, which sees the first page of a file only.
package tiff

import (
	"encoding/binary"
	"errors"
	"fmt"
	"io"

	"fallshadow/imageio/fault"
)

// maxPages is more than any shot has.
const maxPages = 4096

// File is an open TIFF file: its pages in order, reduced copies (thumbnails) left out.
type File struct {
	Pages []*Page
}

// Open walks the chain of pages of r, which holds size bytes, and checks of every page
// that it can be read and that its bytes are there. Errors wrap fault.Truncated,
// fault.Broken or fault.Unsupported, name the page and, for what is not supported, the
// tag and the way round.
func Open(r io.ReaderAt, size int64) (*File, error) {
	var head [8]byte
	if _, err := r.ReadAt(head[:], 0); err != nil {
		return nil, ended(err, "inside its first 8 bytes")
	}
	w := walker{r: r, size: size}
	switch string(head[:4]) {
	case "II*\x00":
		w.order = binary.LittleEndian
	case "MM\x00*":
		w.order = binary.BigEndian
	case "II+\x00", "MM\x00+":
		return nil, fmt.Errorf("%w: BigTIFF: save as a classic TIFF below 4 GB, FITS or NPY", fault.Unsupported)
	default:
		return nil, fmt.Errorf("%w: not TIFF: starts with %q", fault.Broken, head[:4])
	}
	at := int64(w.order.Uint32(head[4:]))
	if at == 0 {
		return nil, fmt.Errorf("%w: the first page is not written yet", fault.Truncated)
	}
	return w.walk(at)
}

func ended(err error, where string) error {
	if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
		return fmt.Errorf("%w: the file ends %s", fault.Truncated, where)
	}
	return err
}

// walker follows the chain of pages.
type walker struct {
	r     io.ReaderAt
	size  int64
	order binary.ByteOrder
}

func (w *walker) walk(at int64) (*File, error) {
	f := new(File)
	seen := make(map[int64]bool)
	var pixels int64
	for number := 1; at != 0; number++ {
		if seen[at] {
			return nil, fmt.Errorf("%w: the chain of pages returns to byte %d", fault.Broken, at)
		}
		if number > maxPages {
			return nil, fmt.Errorf("%w: more than %d pages", fault.Unsupported, maxPages)
		}
		seen[at] = true
		d, next, err := w.directory(at)
		if err != nil {
			return nil, fmt.Errorf("page %d: %w", number, err)
		}
		if at = next; d.value(tagSubfileType, 0)&1 != 0 {
			continue
		}
		p, err := d.page()
		if err != nil {
			return nil, fmt.Errorf("page %d: %w", number, err)
		}
		if pixels += int64(p.Width) * int64(p.Height); pixels > fault.MaxPixels {
			return nil, fmt.Errorf("%w: %d pixels up to page %d, the limit is %d", fault.Unsupported, pixels, number, fault.MaxPixels)
		}
		f.Pages = append(f.Pages, p)
	}
	if len(f.Pages) == 0 {
		return nil, fmt.Errorf("%w: no page but thumbnails", fault.Broken)
	}
	return f, nil
}

// directory reads the directory of a page at byte at, and where the next one is.
func (w *walker) directory(at int64) (d *directory, next int64, err error) {
	var head [4]byte
	if _, err := w.r.ReadAt(head[:2], at); err != nil {
		return nil, 0, ended(err, fmt.Sprintf("before the directory at byte %d", at))
	}
	n := int64(w.order.Uint16(head[:]))
	if at+2+n*entrySize > w.size {
		return nil, 0, fmt.Errorf("%w: the directory at byte %d has %d entries, the file ends before", fault.Truncated, at, n)
	}
	raw := make([]byte, n*entrySize)
	if _, err := w.r.ReadAt(raw, at+2); err != nil && err != io.EOF {
		return nil, 0, err
	}
	d = &directory{walker: w, at: at, entries: make(map[uint16][]byte, n)}
	for ; len(raw) > 0; raw = raw[entrySize:] {
		d.entries[w.order.Uint16(raw)] = raw[:entrySize]
	}
	// Some writers leave out the empty link behind the last directory.
	if _, err := w.r.ReadAt(head[:], at+2+n*entrySize); err == io.EOF {
		return d, 0, nil
	} else if err != nil {
		return nil, 0, err
	}
	return d, int64(w.order.Uint32(head[:])), nil
}
