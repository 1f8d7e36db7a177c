package main

import (
	"encoding/csv"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// records reads a table with a header line as maps by column, keyed by the column shot.
func records(t *testing.T, file string) map[string]map[string]string {
	t.Helper()
	f, err := os.Open(file)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	all, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	out := map[string]map[string]string{}
	for _, line := range all[1:] {
		r := map[string]string{}
		for i, name := range all[0] {
			r[name] = line[i]
		}
		if out[r["shot"]] != nil {
			t.Errorf("%s: two rows for %s", file, r["shot"])
		}
		out[r["shot"]] = r
	}
	return out
}

// Every kind of broken shot in one folder: each has its row and a reason that names the
// cause, the exit code says so, and the shots between them come out as in truth.
func TestBrokenShots(t *testing.T) {
	dir := t.TempDir()
	night, results := filepath.Join(dir, "wreck"), filepath.Join(dir, "r")
	if _, code := program(t, "simulate", night, "--preset", "wreck"); code != 0 {
		t.Fatalf("simulate ended with %d", code)
	}
	if _, code := program(t, "batch", night, "--out", results); code != exitSomeFailed {
		t.Errorf("exit code %d, want %d", code, exitSomeFailed)
	}
	cause := map[string]string{
		"missing-frame": "2 planes where the layout has 3",
		"truncated":     "truncated",
		"random-bytes":  "not supported",
		"zero":          "one and the same value",
		"saturated":     "saturated over a large part",
		"exchanged":     "exchanged",
		"wrong-size":    "differs in size",
	}
	rows := records(t, filepath.Join(results, "results.csv"))
	seen := 0
	for shot, truth := range records(t, filepath.Join(night, "truth.csv")) {
		row, damage := rows[shot], truth["damage"]
		switch {
		case damage == "absent":
			if row != nil {
				t.Errorf("%s has a row without a file", shot)
			}
			continue
		case row == nil:
			t.Errorf("%s (%s) has no row", shot, damage)
		case damage == "empty":
			if row["status"] != "ok" || row["model"] != "none" || row["flags"] == "" {
				t.Errorf("%s, an empty picture: %s, model %q, flags %q", shot, row["status"], row["model"], row["flags"])
			}
		case damage != "":
			if row["status"] != "failed" || !strings.Contains(row["reason"], cause[damage]) || cause[damage] == "" {
				t.Errorf("%s (%s): %s, %q, want a reason with %q", shot, damage, row["status"], row["reason"], cause[damage])
			}
		default:
			near(t, shot, row, "atoms", truth["N"], 0.05)
			near(t, shot, row, "condensate", truth["N0"], 0.05)
			continue
		}
		seen++
	}
	if seen != len(cause)+1 {
		t.Errorf("%d kinds of damage were looked at, want %d", seen, len(cause)+1)
	}
}

// near checks a cell against a truth, with a relative tolerance.
func near(t *testing.T, shot string, row map[string]string, column, truth string, tolerance float64) {
	t.Helper()
	got, err := strconv.ParseFloat(row[column], 64)
	want, err2 := strconv.ParseFloat(truth, 64)
	if err != nil || err2 != nil || !(math.Abs(got-want) <= tolerance*want) {
		t.Errorf("%s: %s is %s, want %s within %g", shot, column, row[column], truth, tolerance)
	}
}
