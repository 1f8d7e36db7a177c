package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"iter"
	"os"
	"path/filepath"
	"slices"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/imageio"
)

// CSVName is the name of the table in the folder of a night's results.
const CSVName = "results.csv"

// CheckScan fails when a scan variable has the name of a column or stands twice.
func CheckScan(scan []string) error {
	for i, name := range scan {
		if slices.ContainsFunc(Columns, func(c Column) bool { return c.Name == name }) {
			return fmt.Errorf("the scan variable %s has the name of a column of the table: give it another name in the header or the side table", name)
		}
		if slices.Contains(scan[:i], name) {
			return fmt.Errorf("the scan variable %s stands twice in the settings", name)
		}
	}
	return nil
}

// WriteCSV writes the table of rows with the scan variables behind the columns: UTF-8,
// comma, one header line, an empty cell where there is nothing.
func WriteCSV(w io.Writer, rows []ledger.Row, scan []string) error {
	return writeTable(csv.NewWriter(w), all(rows), scan)
}

// all yields rows without an error.
func all(rows []ledger.Row) iter.Seq2[*ledger.Row, error] {
	return func(yield func(*ledger.Row, error) bool) {
		for i := range rows {
			if !yield(&rows[i], nil) {
				return
			}
		}
	}
}

func writeTable(out *csv.Writer, rows iter.Seq2[*ledger.Row, error], scan []string) error {
	line := make([]string, 0, len(Columns)+len(scan))
	for _, c := range Columns {
		line = append(line, c.Name)
	}
	out.Write(append(line, scan...))
	for r, err := range rows {
		if err != nil {
			return err
		}
		line = line[:0]
		for _, c := range Columns {
			line = append(line, c.Cell(r))
		}
		for _, name := range scan {
			text, _ := imageio.Metadata(r.Meta).Get(name)
			line = append(line, text)
		}
		out.Write(line)
	}
	out.Flush()
	return out.Error()
}

// SaveCSV writes results.csv in the folder dir, whole or not at all.
func SaveCSV(dir string, rows []ledger.Row, scan []string) error {
	return SaveEach(dir, all(rows), scan)
}

// SaveEach is SaveCSV of rows that come one after another; an error among them leaves the
// file as it was.
func SaveEach(dir string, rows iter.Seq2[*ledger.Row, error], scan []string) error {
	err := Replace(filepath.Join(dir, CSVName), func(w io.Writer) error { return writeTable(csv.NewWriter(w), rows, scan) })
	if err != nil {
		return fmt.Errorf("write the table: %w", err)
	}
	return nil
}

// Replace writes a file under a temporary name, syncs it and renames it.
func Replace(file string, write func(io.Writer) error) (err error) {
	temporary := file + ".tmp"
	f, err := os.Create(temporary)
	if err != nil {
		return err
	}
	err = write(f)
	if err == nil {
		err = f.Sync()
	}
	if closed := f.Close(); err == nil {
		err = closed
	}
	if err == nil {
		err = os.Rename(temporary, file)
	}
	if err != nil {
		os.Remove(temporary)
		return err
	}
	return syncFolder(filepath.Dir(file))
}
