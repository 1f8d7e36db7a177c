package fits

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"io"
	"math"
	"regexp"
	"slices"
	"strconv"
	"strings"
)

// Text, Integer and Number make cards for a writer.
func Text(key, value, comment string) Card {
	return Card{Key: key, Value: value, Comment: comment, Text: true}
}

// Integer makes a card with a whole number.
func Integer(key string, value int, comment string) Card {
	return Card{Key: key, Value: strconv.Itoa(value), Comment: comment}
}

// Number makes a card with a real number, with as many digits as it takes to read the
// same number back. Not a number and infinity are refused when the card is written.
func Number(key string, value float64, comment string) Card {
	text := strconv.FormatFloat(value, 'G', -1, 64)
	if strings.Trim(text, "-0123456789") == "" {
		text += ".0"
	}
	return Card{Key: key, Value: text, Comment: comment}
}

// WriteCube writes planes of width·height unsigned 16-bit counts as one primary image
// (BITPIX 16, BZERO 32768; NAXIS 2 for a single plane, else 3), with the given cards
// behind the mandatory ones. It fails before the first byte on a plane of another size
// or a card that FITS cannot hold.
func WriteCube(w io.Writer, width, height int, planes [][]uint16, cards []Card) error {
	scale := []Card{Integer("BSCALE", 1, ""), Integer("BZERO", 1<<15, "unsigned 16-bit counts")}
	return write(w, 16, width, height, planes, scale, cards,
		func(b []byte, v uint16) []byte { return binary.BigEndian.AppendUint16(b, v^1<<15) })
}

// WriteFloats is WriteCube for float32 pixels (BITPIX -32), not a number and infinities
// included.
func WriteFloats(w io.Writer, width, height int, planes [][]float32, cards []Card) error {
	return write(w, -32, width, height, planes, nil, cards,
		func(b []byte, v float32) []byte { return binary.BigEndian.AppendUint32(b, math.Float32bits(v)) })
}

func write[T any](w io.Writer, bitpix, width, height int, planes [][]T, scale, cards []Card, put func([]byte, T) []byte) error {
	axes := []int{width, height}
	if len(planes) != 1 {
		axes = append(axes, len(planes))
	}
	for i, p := range planes {
		if len(p) != width*height || len(p) == 0 {
			return fmt.Errorf("write fits: plane %d has %d pixels, not %d x %d", i, len(p), width, height)
		}
	}
	for _, c := range cards {
		if err := check(c); err != nil {
			return fmt.Errorf("write fits: %w", err)
		}
	}
	var buf bytes.Buffer
	buf.Write(header(slices.Concat(structure(bitpix, axes...), scale, cards)))
	row := make([]byte, 0, 8*width)
	for _, p := range planes {
		for y := range height {
			row = row[:0]
			for _, v := range p[y*width : (y+1)*width] {
				row = put(row, v)
			}
			buf.Write(row)
		}
	}
	pad(&buf, 0)
	_, err := w.Write(buf.Bytes())
	return err
}

// structure makes the mandatory cards of a primary image.
func structure(bitpix int, axes ...int) []Card {
	cards := []Card{{Key: "SIMPLE", Value: "T"}, Integer("BITPIX", bitpix, ""), Integer("NAXIS", len(axes), "")}
	for i, n := range axes {
		cards = append(cards, Integer("NAXIS"+strconv.Itoa(i+1), n, ""))
	}
	return cards
}

// header formats cards, END and the padding.
func header(cards []Card) []byte {
	var buf bytes.Buffer
	for _, c := range cards {
		buf.WriteString(record(c))
	}
	fmt.Fprintf(&buf, "%-80s", "END")
	pad(&buf, ' ')
	return buf.Bytes()
}

// pad fills up the last block.
func pad(buf *bytes.Buffer, with byte) {
	buf.Write(bytes.Repeat([]byte{with}, (blockSize-buf.Len()%blockSize)%blockSize))
}

// record formats a card in the fixed format (FITS standard 4.0, section 4.2). The
// comment gives way where the card is full.
func record(c Card) string {
	value := fmt.Sprintf("%20s", c.Value)
	if c.Text {
		value = fmt.Sprintf("%-20s", fmt.Sprintf("'%-8s'", strings.ReplaceAll(c.Value, "'", "''")))
	}
	line := fmt.Sprintf("%-8s= %s", c.Key, value)
	if c.Comment != "" {
		line += " / " + c.Comment
	}
	return fmt.Sprintf("%-80.80s", line)
}

// reserved are the keywords that the writer itself sets.
var reserved = regexp.MustCompile(`^(SIMPLE|XTENSION|BITPIX|NAXIS\d*|BSCALE|BZERO|BLANK|GROUPS|PCOUNT|GCOUNT|CONTINUE|END)$`)

// check says whether a card can be written: its keyword is 1-8 of A-Z 0-9 - _ and not
// one that decides the layout, its text printable ASCII of at most 68 characters with
// quotes doubled, and a value that is no text is a finite number or a logical.
func check(c Card) error {
	const letters = "ABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789-_"
	if c.Key == "" || len(c.Key) > 8 || strings.Trim(c.Key, letters) != "" {
		return fmt.Errorf("keyword %q is not 1 to 8 of %s", c.Key, letters)
	}
	if reserved.MatchString(c.Key) {
		return fmt.Errorf("keyword %s is set by the writer", c.Key)
	}
	for _, s := range []string{c.Value, c.Comment} {
		if strings.IndexFunc(s, func(r rune) bool { return r < ' ' || r > '~' }) >= 0 {
			return fmt.Errorf("card %s: %q is not printable ASCII", c.Key, s)
		}
	}
	if n := len(strings.ReplaceAll(c.Value, "'", "''")); n > 68 {
		return fmt.Errorf("card %s: the value has %d characters, 68 fit", c.Key, n)
	}
	if c.Text || c.Value == "T" || c.Value == "F" {
		return nil
	}
	if v, err := ParseNumber(c.Value); err != nil || math.IsNaN(v) || math.IsInf(v, 0) {
		return fmt.Errorf("card %s: %q is neither text, number nor logical", c.Key, c.Value)
	}
	return nil
}
