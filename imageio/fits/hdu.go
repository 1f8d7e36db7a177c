package fits

import (
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"fallshadow/imageio/fault"
)

// HDU is a header-data unit. Axes are NAXIS1 (the fastest, to the right), NAXIS2, ...
type HDU struct {
	Cards  []Card
	Bitpix int
	Axes   []int

	kind           string // XTENSION, or "" for the primary unit
	index          map[string]int
	r              io.ReaderAt
	offset, length int64
	scale, zero    float64
	blank          int64
	hasBlank       bool
}

// add appends a card that is not blank. Of a keyword that is repeated the first one
// counts.
func (h *HDU) add(c Card) {
	if c == (Card{}) {
		return
	}
	if n := len(h.Cards); n > 0 && continued(&h.Cards[n-1], c) {
		return
	}
	if h.index == nil {
		h.index = make(map[string]int)
	}
	if _, ok := h.index[c.Key]; !ok {
		h.index[c.Key] = len(h.Cards)
	}
	h.Cards = append(h.Cards, c)
}

// Get returns the value of a keyword as text, and whether it is there.
func (h *HDU) Get(key string) (string, bool) {
	i, ok := h.index[key]
	if !ok {
		return "", false
	}
	return h.Cards[i].Value, true
}

// Name returns EXTNAME, empty where there is none.
func (h *HDU) Name() string {
	name, _ := h.Get("EXTNAME")
	return name
}

// Image returns the size of the pictures in the unit and their number: every axis beyond
// the second counts planes. A unit without pixels has 0 planes. It fails where the unit
// holds a picture that cannot be read as it stands: one axis only, random groups, tile
// compression, more than fault.MaxPixels pixels.
func (h *HDU) Image() (width, height, planes int, err error) {
	if v, _ := h.Get("ZIMAGE"); v == "T" {
		how, _ := h.Get("ZCMPTYPE")
		return 0, 0, 0, fmt.Errorf("%w: the image is tile-compressed (ZIMAGE = T, ZCMPTYPE = %s); uncompress the file first",
			fault.Unsupported, how)
	}
	if h.kind != "" && h.kind != "IMAGE" || h.length == 0 {
		return 0, 0, 0, nil
	}
	if v, _ := h.Get("GROUPS"); v == "T" {
		return 0, 0, 0, fmt.Errorf("%w: random groups (GROUPS = T) are no image", fault.Unsupported)
	}
	if len(h.Axes) < 2 {
		return 0, 0, 0, fmt.Errorf("%w: the array has one axis (NAXIS = 1), an image has two or more", fault.Unsupported)
	}
	planes = 1
	for _, n := range h.Axes[2:] {
		planes *= n
	}
	if err := fault.Size(int64(h.Axes[0]), int64(h.Axes[1]), int64(planes)); err != nil {
		return 0, 0, 0, err
	}
	return h.Axes[0], h.Axes[1], planes, nil
}

func (h *HDU) pixelSize() int { return max(h.Bitpix, -h.Bitpix) / 8 }

// geometry reads the keywords that decide where the data are and how to decode them
// (FITS standard 4.0, sections 4.4.1, 4.4.2.5 and 7.1).
func (h *HDU) geometry() error {
	if h.kind, _ = h.Get("XTENSION"); h.kind == "" {
		if v, _ := h.Get("SIMPLE"); v != "T" {
			return fmt.Errorf("%w: SIMPLE is %q, a file that follows the standard has T", fault.Broken, v)
		}
	}
	bitpix, err := h.integer("BITPIX", math.MinInt32, math.MaxInt32)
	if err != nil {
		return err
	}
	switch h.Bitpix = int(bitpix); h.Bitpix {
	case 8, 16, 32, 64, -32, -64:
	default:
		return fmt.Errorf("%w: BITPIX is %d, not 8, 16, 32, 64, -32 or -64", fault.Broken, h.Bitpix)
	}
	if err := h.axes(); err != nil {
		return err
	}
	if err := h.dataLength(); err != nil {
		return err
	}
	return h.scaling()
}

func (h *HDU) axes() error {
	n, err := h.integer("NAXIS", 0, 999)
	if err != nil {
		return err
	}
	for i := range int(n) {
		d, err := h.integer("NAXIS"+strconv.Itoa(i+1), 0, math.MaxInt32)
		if err != nil {
			return err
		}
		h.Axes = append(h.Axes, int(d))
	}
	return nil
}

// dataLength is |BITPIX|/8 · GCOUNT · (PCOUNT + NAXIS1·...·NAXISn) bytes.
func (h *HDU) dataLength() error {
	if len(h.Axes) == 0 {
		return nil
	}
	product, axes := int64(1), h.Axes
	if v, _ := h.Get("GROUPS"); v == "T" && axes[0] == 0 {
		axes = axes[1:]
	}
	counts := [2]int64{0, 1}
	for i, key := range []string{"PCOUNT", "GCOUNT"} {
		if _, ok := h.Get(key); ok {
			var err error
			if counts[i], err = h.integer(key, 0, math.MaxInt32*int64(math.MaxInt32)); err != nil {
				return err
			}
		}
	}
	times := func(n int64) bool {
		if n > 0 && product > math.MaxInt64/2/n {
			return false
		}
		product *= n
		return true
	}
	ok := true
	for _, n := range axes {
		ok = ok && times(int64(n))
	}
	product += counts[0]
	if !ok || !times(counts[1]) || !times(int64(h.pixelSize())) {
		return fmt.Errorf("%w: the axes %v declare more bytes than a file can hold", fault.Broken, h.Axes)
	}
	h.length = product
	return nil
}

func (h *HDU) scaling() (err error) {
	if h.scale, err = h.number("BSCALE", 1); err != nil {
		return err
	}
	if h.zero, err = h.number("BZERO", 0); err != nil {
		return err
	}
	if h.scale == 0 && h.kind == "" || h.scale == 0 && h.kind == "IMAGE" {
		return fmt.Errorf("%w: BSCALE is 0, which makes all pixels equal", fault.Broken)
	}
	if _, h.hasBlank = h.Get("BLANK"); h.hasBlank && h.Bitpix > 0 {
		h.blank, err = h.integer("BLANK", math.MinInt64, math.MaxInt64)
	}
	return err
}

func (h *HDU) integer(key string, low, high int64) (int64, error) {
	text, ok := h.Get(key)
	if !ok {
		return 0, fmt.Errorf("%w: the header has no %s card", fault.Broken, key)
	}
	v, err := strconv.ParseInt(strings.TrimSpace(text), 10, 64)
	if err != nil {
		return 0, fmt.Errorf("%w: %s is %q, not a whole number", fault.Broken, key, text)
	}
	if v < low || v > high {
		return 0, fmt.Errorf("%w: %s is %d, out of range", fault.Broken, key, v)
	}
	return v, nil
}

func (h *HDU) number(key string, absent float64) (float64, error) {
	text, ok := h.Get(key)
	if !ok || text == "" {
		return absent, nil
	}
	v, err := ParseNumber(text)
	if err != nil || math.IsNaN(v) || math.IsInf(v, 0) {
		return 0, fmt.Errorf("%w: %s is %q, not a number", fault.Broken, key, text)
	}
	return v, nil
}

// ParseNumber reads a number as FITS writes it: as Go does, and with D for the exponent.
func ParseNumber(text string) (float64, error) {
	text = strings.Map(func(r rune) rune {
		switch r {
		case 'D', 'd':
			return 'E'
		case '_':
			return '?'
		}
		return r
	}, strings.TrimSpace(text))
	return strconv.ParseFloat(text, 64)
}
