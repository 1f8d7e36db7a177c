package imageio

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"

	"fallshadow/imageio/fault"
)

// maxSidecar is the size in bytes above which a side table is refused.
const maxSidecar = 64 << 20

// sidecar is a side table: its rows in order, and their places by the key and by the number
// that the key is.
type sidecar struct {
	file, key string // the table, and the name of its column of keys
	columns   []string
	rows      []sideRow
	byText    map[string]int
	byNumber  map[string]int
}

// sideRow is a row of a side table: the cell that says whose it is, and all cells.
type sideRow struct {
	key   string
	cells Metadata
}

// readSidecar reads the side table of a layout, nil where it has none: CSV with one
// header line, separated by the first of tab, semicolon and comma that the header
// contains. Empty cells say nothing. It fails on a row with a wrong number of cells and
// on a key that stands twice.
func readSidecar(dir string, layout Layout) (*sidecar, error) {
	if layout.Sidecar == "" {
		return nil, nil
	}
	table, err := sidecarBytes(filepath.Join(dir, filepath.FromSlash(layout.Sidecar)))
	if err != nil {
		return nil, fmt.Errorf("side table %s: %w", layout.Sidecar, err)
	}
	side, err := parseSidecar(table, layout.SidecarKey)
	if err != nil {
		return nil, fmt.Errorf("side table %s: %w", layout.Sidecar, err)
	}
	side.file = layout.Sidecar
	return side, nil
}

func sidecarBytes(file string) ([]byte, error) {
	f, err := os.Open(file)
	if err != nil {
		return nil, cause(err)
	}
	defer f.Close()
	all, err := io.ReadAll(io.LimitReader(f, maxSidecar+1))
	if err == nil && len(all) > maxSidecar {
		err = fmt.Errorf("%w: larger than %d bytes", fault.Unsupported, maxSidecar)
	}
	return all, err
}

func parseSidecar(all []byte, key string) (*sidecar, error) {
	all = bytes.TrimPrefix(all, []byte("\ufeff"))
	r := csv.NewReader(bytes.NewReader(all))
	line, _, _ := bytes.Cut(all, []byte("\n"))
	r.Comma = ','
	for _, c := range "\t;" {
		if bytes.ContainsRune(line, c) {
			r.Comma = c
			break
		}
	}
	r.TrimLeadingSpace = true
	return readRows(r, key)
}

func readRows(r *csv.Reader, key string) (*sidecar, error) {
	head, err := r.Read()
	if errors.Is(err, io.EOF) {
		return nil, fmt.Errorf("%w: no header line", fault.Truncated)
	} else if err != nil {
		return nil, fmt.Errorf("%w: %w", fault.Broken, err)
	}
	column := 0
	for i := range head {
		head[i] = strings.TrimSpace(head[i])
		if head[i] == key && key != "" {
			column = i
		}
	}
	if key != "" && head[column] != key {
		return nil, fmt.Errorf("no column %q among %s", key, strings.Join(head, ", "))
	}
	side := &sidecar{key: head[column], columns: head, byText: make(map[string]int), byNumber: make(map[string]int)}
	for {
		row, err := r.Read()
		if errors.Is(err, io.EOF) {
			return side, nil
		} else if err != nil {
			return nil, fmt.Errorf("%w: %w", fault.Broken, err)
		}
		if err := side.add(head, row, column); err != nil {
			line, _ := r.FieldPos(0)
			return nil, fmt.Errorf("line %d: %w", line, err)
		}
	}
}

// hasColumn reports whether a column is called so, in whatever case.
func (s *sidecar) hasColumn(name string) bool {
	return slices.ContainsFunc(s.columns, func(c string) bool { return strings.EqualFold(c, name) })
}

func (s *sidecar) add(head, row []string, column int) error {
	key := strings.TrimSpace(row[column])
	if key == "" {
		return fmt.Errorf("%w: the column %s is empty", fault.Broken, head[column])
	}
	m := Metadata{}
	for i, cell := range row {
		if cell = strings.TrimSpace(cell); cell != "" && head[i] != "" {
			m.first(head[i], cell)
		}
	}
	number := wholeNumber(key)
	_, twice := s.byText[key]
	if _, same := s.byNumber[number]; twice || same && number != "" {
		return fmt.Errorf("%w: a second row for %s", fault.Broken, key)
	}
	s.byText[key] = len(s.rows)
	if number != "" {
		s.byNumber[number] = len(s.rows)
	}
	s.rows = append(s.rows, sideRow{key, m})
	return nil
}

var wholeText = regexp.MustCompile(`^(\d+)(\.0*)?$`)

// wholeNumber returns the digits of a key that is nothing but a whole number, without
// leading zeros, else "".
func wholeNumber(key string) string {
	if m := wholeText.FindStringSubmatch(key); m != nil {
		return normal(m[1])
	}
	return ""
}

func normal(digits string) string {
	if t := strings.TrimLeft(digits, "0"); t != "" {
		return t
	}
	return "0"
}
