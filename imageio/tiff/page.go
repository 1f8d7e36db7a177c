package tiff

import (
	"fmt"
	"image"
	"io"
	"strings"

	"golang.org/x/image/tiff"

	"fallshadow/imageio/fault"
)

// The tags that are looked at (TIFF revision 6.0, section 8).
const (
	tagSubfileType     = 254
	tagWidth           = 256
	tagHeight          = 257
	tagBits            = 258
	tagCompression     = 259
	tagPhotometric     = 262
	tagStripOffsets    = 273
	tagSamples         = 277
	tagRowsPerStrip    = 278
	tagStripByteCounts = 279
	tagTileWidth       = 322
	tagTileHeight      = 323
	tagTileOffsets     = 324
	tagTileByteCounts  = 325
	tagSampleFormat    = 339
)

// Page is one picture of a file. Tags are its texts (ImageDescription, DateTime, ...) by
// the names of the standard.
type Page struct {
	Width, Height int
	Tags          map[string]string

	directory *directory
	inverted  bool // photometric 0: the decoder turns the values round
}

// directory is the table of tags of a page.
type directory struct {
	*walker
	at      int64
	entries map[uint16][]byte
}

const entrySize = 12

var widths = map[uint16]int64{1: 1, 2: 1, 3: 2, 4: 4} // byte, text, short, long

// bytes returns the value of a tag as it stands in the file, cut to limit values.
func (d *directory) bytes(tag uint16, limit int64) (raw []byte, width int64, err error) {
	e, ok := d.entries[tag]
	if !ok {
		return nil, 0, fmt.Errorf("%w: no tag %d", fault.Broken, tag)
	}
	width = widths[d.order.Uint16(e[2:])]
	if width == 0 {
		return nil, 0, fmt.Errorf("%w: tag %d is of type %d", fault.Broken, tag, d.order.Uint16(e[2:]))
	}
	all := int64(d.order.Uint32(e[4:]))
	n := min(all, limit) * width
	if all*width <= 4 {
		return e[8 : 8+n], width, nil
	}
	at := int64(d.order.Uint32(e[8:]))
	if at+n > d.size {
		return nil, 0, fmt.Errorf("%w: tag %d has %d bytes from byte %d on, the file ends before", fault.Truncated, tag, n, at)
	}
	raw = make([]byte, n)
	if _, err := d.r.ReadAt(raw, at); err != nil && err != io.EOF {
		return nil, 0, err
	}
	return raw, width, nil
}

// values returns the first values of a tag.
func (d *directory) values(tag uint16, limit int64) ([]int64, error) {
	raw, width, err := d.bytes(tag, limit)
	if err != nil {
		return nil, err
	}
	all := make([]int64, 0, int64(len(raw))/width)
	for ; int64(len(raw)) >= width; raw = raw[width:] {
		switch width {
		case 1:
			all = append(all, int64(raw[0]))
		case 2:
			all = append(all, int64(d.order.Uint16(raw)))
		default:
			all = append(all, int64(d.order.Uint32(raw)))
		}
	}
	return all, nil
}

// value returns the first value of a tag, and absent where it has none.
func (d *directory) value(tag uint16, absent int64) int64 {
	if all, err := d.values(tag, 1); err == nil && len(all) > 0 {
		return all[0]
	}
	return absent
}

// page judges a directory.
func (d *directory) page() (*Page, error) {
	width, height := d.value(tagWidth, 0), d.value(tagHeight, 0)
	if err := fault.Size(width, height, 1); err != nil {
		return nil, err
	}
	if err := d.supported(); err != nil {
		return nil, err
	}
	if err := d.present(width, height); err != nil {
		return nil, err
	}
	return &Page{
		Width: int(width), Height: int(height), Tags: d.texts(),
		directory: d, inverted: d.value(tagPhotometric, 1) == 0,
	}, nil
}

// supported refuses, by tag, what is not a grey picture of 8 or 16 unsigned bits.
func (d *directory) supported() error {
	const way = "save as unsigned 16-bit grey, or as FITS or NPY"
	bits := d.value(tagBits, 1)
	switch format := d.value(tagSampleFormat, 1); {
	case format == 3:
		return fmt.Errorf("%w: %d-bit floating pixels (tag 339 SampleFormat = 3): %s", fault.Unsupported, bits, way)
	case format == 2:
		return fmt.Errorf("%w: signed pixels (tag 339 SampleFormat = 2): %s", fault.Unsupported, way)
	case format != 1:
		return fmt.Errorf("%w: tag 339 SampleFormat = %d: %s", fault.Unsupported, format, way)
	}
	if n := d.value(tagSamples, 1); n != 1 {
		return fmt.Errorf("%w: %d values a pixel (tag 277 SamplesPerPixel): %s", fault.Unsupported, n, way)
	}
	if p := d.value(tagPhotometric, 1); p > 1 {
		return fmt.Errorf("%w: colour (tag 262 PhotometricInterpretation = %d): %s", fault.Unsupported, p, way)
	}
	if bits != 8 && bits != 16 {
		return fmt.Errorf("%w: %d-bit pixels (tag 258 BitsPerSample): %s", fault.Unsupported, bits, way)
	}
	switch c := d.value(tagCompression, 1); c {
	case 1, 5, 8, 32773, 32946:
		return nil
	default:
		return fmt.Errorf("%w: compression %d (tag 259): save without compression, with LZW or deflate", fault.Unsupported, c)
	}
}

// present checks that the strips or tiles of a page lie inside the file and can hold its
// pixels.
func (d *directory) present(width, height int64) error {
	offsets, counts, blocks := uint16(tagStripOffsets), uint16(tagStripByteCounts), height
	rows := min(max(d.value(tagRowsPerStrip, height), 1), height)
	blocks = (height + rows - 1) / rows
	if w := d.value(tagTileWidth, 0); w > 0 {
		h := max(d.value(tagTileHeight, 0), 1)
		offsets, counts = tagTileOffsets, tagTileByteCounts
		blocks = ((width + w - 1) / w) * ((height + h - 1) / h)
	}
	at, err := d.values(offsets, blocks)
	if err != nil {
		return err
	}
	n, err := d.values(counts, blocks)
	if err != nil {
		return err
	}
	if int64(len(at)) < blocks || int64(len(n)) < blocks {
		return fmt.Errorf("%w: %d strips or tiles declared, %d needed", fault.Broken, min(len(at), len(n)), blocks)
	}
	var total int64
	for i := range at {
		if at[i]+n[i] > d.size {
			return fmt.Errorf("%w: pixels up to byte %d, the file has %d", fault.Truncated, at[i]+n[i], d.size)
		}
		total += n[i]
	}
	total = min(total, d.size) // strips may overlap
	pixels := width * height * d.value(tagBits, 1) / 8
	if d.value(tagCompression, 1) == 1 && total < pixels {
		return fmt.Errorf("%w: strips of %d bytes for %d bytes of pixels", fault.Broken, total, pixels)
	}
	return fault.Packed(pixels, total)
}

// texts returns the tags that say something about the picture.
func (d *directory) texts() map[string]string {
	names := map[uint16]string{
		270: "ImageDescription", 271: "Make", 272: "Model", 305: "Software", 306: "DateTime", 315: "Artist",
	}
	all := make(map[string]string)
	for tag, name := range names {
		const limit = 1 << 16
		if raw, _, err := d.bytes(tag, limit); err == nil {
			all[name] = strings.ToValidUTF8(strings.TrimRight(string(raw), "\x00 \r\n"), "?")
		}
	}
	return all
}

// Read decodes the page into dst, which holds Width·Height pixels, as the numbers that
// are stored, whatever the file says of black and white.
func (p *Page) Read(dst []float32) (err error) {
	defer func() {
		if r := recover(); r != nil {
			err = fmt.Errorf("%w: decoding the pixels: %v", fault.Broken, r)
		}
	}()
	d := p.directory
	alone := io.NewSectionReader(first{d}, 0, d.size)
	img, err := tiff.Decode(alone)
	if err != nil {
		return fmt.Errorf("%w: decoding the pixels: %w", fault.Broken, err)
	}
	if b := img.Bounds(); b.Dx() != p.Width || b.Dy() != p.Height || len(dst) != p.Width*p.Height {
		return fmt.Errorf("decoding the pixels: %v where room was made for %d x %d", b, p.Width, p.Height)
	}
	switch img := img.(type) {
	case *image.Gray16:
		for i := range dst {
			v := uint16(img.Pix[2*i])<<8 | uint16(img.Pix[2*i+1])
			if p.inverted {
				v = ^v
			}
			dst[i] = float32(v)
		}
	case *image.Gray:
		for i := range dst {
			v := img.Pix[i]
			if p.inverted {
				v = ^v
			}
			dst[i] = float32(v)
		}
	default:
		return fmt.Errorf("%w: decoding the pixels gave %T", fault.Unsupported, img)
	}
	return nil
}

// first is a file whose first page is the directory's.
type first struct{ *directory }

func (f first) ReadAt(p []byte, off int64) (int, error) {
	n, err := f.r.ReadAt(p, off)
	var link [4]byte
	f.order.PutUint32(link[:], uint32(f.at))
	for i, c := range link {
		if at := int64(4+i) - off; at >= 0 && at < int64(n) {
			p[at] = c
		}
	}
	return n, err
}
