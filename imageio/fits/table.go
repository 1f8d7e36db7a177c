package fits

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
)

// TableColumn is a column of a binary table: numbers (NaN where there is none), or words
// where Words is not nil.
type TableColumn struct {
	Name    string // printable ASCII
	Unit    string // in the grammar of the FITS standard, section 4.3; empty: none
	Comment string // cut where the card is full
	Numbers []float64
	Words   []string
}

// WriteTable writes a file with one binary table of the given name (FITS standard 4.0,
// section 7.3): numbers as 64-bit floats (TFORM D), words as ASCII padded with blanks
// (TFORM A), letters outside of ASCII as \u escapes. It fails before the first byte on
// columns of different length and on names, units and cards that FITS cannot hold.
func WriteTable(w io.Writer, name string, columns []TableColumn, cards []Card) error {
	fields, rows, err := layOut(columns)
	if err != nil {
		return fmt.Errorf("write fits table: %w", err)
	}
	cards = append([]Card{Text("EXTNAME", name, "")}, cards...)
	for i, c := range columns {
		n := strconv.Itoa(i + 1)
		cards = append(cards, Text("TTYPE"+n, c.Name, c.Comment), Text("TFORM"+n, fields[i].form(), ""))
		if c.Unit != "" {
			cards = append(cards, Text("TUNIT"+n, c.Unit, ""))
		}
	}
	for i := range cards {
		cards[i].Comment = printable(cards[i].Comment)
		if err := check(cards[i]); err != nil {
			return fmt.Errorf("write fits table: %w", err)
		}
	}
	size := 0
	for _, f := range fields {
		size += f.size
	}
	var buf bytes.Buffer
	buf.Write(header([]Card{{Key: "SIMPLE", Value: "T"}, Integer("BITPIX", 8, ""), Integer("NAXIS", 0, ""), {Key: "EXTEND", Value: "T"}}))
	buf.Write(header(slices.Concat([]Card{
		Text("XTENSION", "BINTABLE", ""), Integer("BITPIX", 8, ""), Integer("NAXIS", 2, ""), Integer("NAXIS1", size, "bytes of a row"),
		Integer("NAXIS2", rows, "rows"), Integer("PCOUNT", 0, ""), Integer("GCOUNT", 1, ""), Integer("TFIELDS", len(columns), "")}, cards)))
	for row := range rows {
		for _, f := range fields {
			buf.Write(f.cell(row))
		}
	}
	pad(&buf, 0)
	_, err = w.Write(buf.Bytes())
	return err
}

// field is a column as it is stored.
type field struct {
	isText  bool
	numbers []float64
	words   []string // in ASCII
	size    int      // bytes
}

// layOut returns the fields of columns and their number of rows.
func layOut(columns []TableColumn) (fields []field, rows int, err error) {
	if len(columns) == 0 || len(columns) > 999 {
		return nil, 0, fmt.Errorf("%d columns: 1 to 999 can be written", len(columns))
	}
	for i, c := range columns {
		f := field{numbers: c.Numbers, size: 8}
		length := len(c.Numbers)
		if c.Words != nil {
			length, f.size, f.isText = len(c.Words), 1, true
			for _, w := range c.Words {
				f.words = append(f.words, printable(w))
				f.size = max(f.size, len(printable(w)))
			}
		}
		if i > 0 && length != rows {
			return nil, 0, fmt.Errorf("column %s has %d rows, the one before %d", c.Name, length, rows)
		}
		rows = length
		fields = append(fields, f)
	}
	return fields, rows, nil
}

func (f *field) form() string {
	if f.isText {
		return strconv.Itoa(f.size) + "A"
	}
	return "1D"
}

// cell returns the bytes of a row.
func (f *field) cell(row int) []byte {
	if f.isText {
		return fmt.Appendf(nil, "%-*s", f.size, f.words[row])
	}
	return binary.BigEndian.AppendUint64(nil, math.Float64bits(f.numbers[row]))
}

// printable returns text in the letters that FITS allows.
func printable(text string) string {
	quoted := strconv.QuoteToASCII(text)
	return strings.NewReplacer(`\"`, `"`, `\\`, `\`).Replace(quoted[1 : len(quoted)-1])
}
