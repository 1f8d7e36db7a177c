package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"path/filepath"
	"strings"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/imageio"
	"fallshadow/imageio/fits"
)

// Export is a form in which the table can be had: its columns in their order, then the
// scan variables.
type Export struct {
	Ending, Meaning string
	Write           func(w io.Writer, rows []ledger.Row, scan []string) error
}

// Exports is the one table of forms.
var Exports = []Export{
	{".csv", "comma-separated values as RFC 4180 has them, lines ending in CR LF", exportCSV},
	{".fits", "a FITS file with a binary table, units in TUNIT, empty numbers as NaN", exportFITS},
	{".jsonl", "one JSON object a line, empty cells left out", exportJSON},
}

// ExportFor returns the form that the name of a file asks for.
func ExportFor(file string) (Export, error) {
	ending := strings.ToLower(filepath.Ext(file))
	var known []string
	for _, e := range Exports {
		if e.Ending == ending {
			return e, nil
		}
		known = append(known, e.Ending)
	}
	return Export{}, fmt.Errorf("%s: a table is exported as %s", file, strings.Join(known, ", "))
}

func exportCSV(w io.Writer, rows []ledger.Row, scan []string) error {
	out := csv.NewWriter(w)
	out.UseCRLF = true
	return writeTable(out, all(rows), scan)
}

func exportJSON(w io.Writer, rows []ledger.Row, scan []string) error {
	for i := range rows {
		line, err := Record(&rows[i], scan)
		if err != nil {
			return err
		}
		if _, err := w.Write(append(line, '\n')); err != nil {
			return err
		}
	}
	return nil
}

// fitsUnits are the units of columns in the grammar of the FITS standard, where they
// differ; k, the constant, is no unit there.
var fitsUnits = map[string]string{"px": "pixel", "1/um^3": "um**(-3)", "k": ""}

func exportFITS(w io.Writer, rows []ledger.Row, scan []string) error {
	var columns []fits.TableColumn
	for _, c := range Columns {
		t := fits.TableColumn{Name: c.Name, Unit: c.Unit, Comment: c.Meaning}
		if u, ok := fitsUnits[c.Unit]; ok {
			t.Unit = u
		}
		if c.IsNumber() {
			for i := range rows {
				t.Numbers = append(t.Numbers, rows[i].Number(c.Name))
			}
		} else {
			t.Words = []string{}
			for i := range rows {
				t.Words = append(t.Words, c.Cell(&rows[i]))
			}
		}
		columns = append(columns, t)
	}
	for _, name := range scan {
		columns = append(columns, scanColumn(rows, name))
	}
	return fits.WriteTable(w, "SHOTS", columns, nil)
}

// scanColumn returns a scan variable, as numbers where every shot that has it has one.
func scanColumn(rows []ledger.Row, name string) fits.TableColumn {
	t := fits.TableColumn{Name: name, Comment: "scan variable", Words: []string{}}
	numbers := true
	for i := range rows {
		meta := imageio.Metadata(rows[i].Meta)
		text, has := meta.Get(name)
		v, err := meta.Number(name)
		if err != nil {
			v = math.NaN()
		}
		numbers = numbers && (!has || err == nil)
		t.Words, t.Numbers = append(t.Words, text), append(t.Numbers, v)
	}
	if numbers {
		t.Words = nil
		return t
	}
	t.Numbers = nil
	return t
}
