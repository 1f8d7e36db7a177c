package bound

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"
)

// tableRow is a line of a table of testdata/reference by column name.
type tableRow map[string]string

// readTable reads testdata/reference/name; lines from # are comments, the first other line
// names the columns.
func readTable(t testing.TB, name string) []tableRow {
	t.Helper()
	f, err := os.Open("../../testdata/reference/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	lines, err := r.ReadAll()
	if err != nil || len(lines) < 2 {
		t.Fatalf("%s: %d lines, %v", name, len(lines), err)
	}
	rows := make([]tableRow, len(lines)-1)
	for i, line := range lines[1:] {
		rows[i] = tableRow{}
		for j, cell := range line {
			rows[i][lines[0][j]] = cell
		}
	}
	return rows
}

// num returns a column as a number; a missing or unreadable one ends the test.
func (r tableRow) num(t testing.TB, column string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(r[column], 64)
	if err != nil {
		t.Fatalf("column %s: %v", column, err)
	}
	return v
}

// near fails unless got lies within tol of want, relative to want. NaN fails.
func near(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if d := math.Abs(got - want); !(d <= tol*math.Abs(want)) {
		t.Errorf("%s: got %.8g, want %.8g, relative error %.2g > %.2g", what, got, want, d/math.Abs(want), tol)
	}
}

// within fails unless |got − want| ≤ tol. NaN fails.
func within(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if d := math.Abs(got - want); !(d <= tol) {
		t.Errorf("%s: got %.8g, want %.8g, error %.2g > %.2g", what, got, want, d, tol)
	}
}
