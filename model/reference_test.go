package model_test

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"

	"fallshadow/model"
)

// record is one line of a table: its numeric cells by column name, and its first cell.
type record struct {
	name string
	cell map[string]float64
}

// records reads testdata/reference/name; cells that are no numbers are left out.
func records(t testing.TB, name string) []record {
	t.Helper()
	f, err := os.Open("../testdata/reference/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	reader := csv.NewReader(f)
	reader.Comment = '#'
	lines, err := reader.ReadAll()
	if err != nil || len(lines) < 2 {
		t.Fatalf("%s: %d lines, %v", name, len(lines), err)
	}
	var out []record
	for _, line := range lines[1:] {
		r := record{line[0], map[string]float64{}}
		for i, text := range line {
			if v, err := strconv.ParseFloat(text, 64); err == nil {
				r.cell[lines[0][i]] = v
			}
		}
		out = append(out, r)
	}
	return out
}

// worked returns the published number of a worked example and its tolerance.
func worked(t testing.TB, id string) (expected, tolerance float64) {
	t.Helper()
	for _, r := range records(t, "worked_examples.csv") {
		if r.name == id {
			return r.cell["expected"], r.cell["tolerance"]
		}
	}
	t.Fatalf("no worked example %s", id)
	return
}

// within passes only if got is at most tol from want, absolutely; NaN fails.
func within(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.12g, want %.12g, off by %.2g > %.2g", what, got, want, got-want, tol)
	}
}

// unitTrap has ω̄ = 1/s and the ratios of the given frequencies.
func unitTrap(w1, w2, w3 float64) model.Trap {
	mean := math.Cbrt(w1 * w2 * w3)
	return model.Trap{Omega: [3]float64{w1 / mean, w2 / mean, w3 / mean}}
}

const rubidium = 86.909180529 * model.U
