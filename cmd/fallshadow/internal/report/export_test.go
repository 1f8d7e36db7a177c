package report

import (
	"bytes"
	"encoding/csv"
	"math"
	"strconv"
	"strings"
	"testing"

	"github.com/astrogo/fitsio"

	"fallshadow/cmd/fallshadow/internal/ledger"
)

func exported() []ledger.Row {
	a := ledger.Row{Shot: "a", Flags: []string{"dense", "cut"}, Meta: map[string]string{"RAMP": "3.5", "WORD": "up"}}
	a.SetNumber("T_nK", 123.25)
	a.SetNumber("peak_density_um3", 7)
	a.SetWord("model", "bimodal")
	b := ledger.Row{Shot: "b, \"c\"", Reason: "no\nlight", Meta: map[string]string{"WORD": "12"}}
	return []ledger.Row{a, b}
}

// TestExports reads every form back, FITS with another implementation, and compares cells.
func TestExports(t *testing.T) {
	scan := []string{"RAMP", "WORD"}
	var c, f bytes.Buffer
	if err := exportCSV(&c, exported(), scan); err != nil {
		t.Fatal(err)
	}
	if err := exportFITS(&f, exported(), scan); err != nil {
		t.Fatal(err)
	}
	if !strings.Contains(c.String(), "\r\n\"b, \"\"c\"\"\"") {
		t.Error("CSV has no CR LF or doubled quotes")
	}
	lines, err := csv.NewReader(&c).ReadAll()
	if err != nil || len(lines) != 3 {
		t.Fatalf("%d lines, %v", len(lines), err)
	}
	file, err := fitsio.Open(&f)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	table := file.HDU(1).(*fitsio.Table)
	if table.NumCols() != len(lines[0]) || table.NumRows() != 2 {
		t.Fatalf("%d columns, %d rows", table.NumCols(), table.NumRows())
	}
	units := map[string]string{"T_nK": "nK", "x_px": "pixel", "peak_density_um3": "um**(-3)", "entropy_per_atom": "", "width1_um": "um"}
	rows, err := table.Read(0, 2)
	if err != nil {
		t.Fatal(err)
	}
	defer rows.Close()
	for i := 0; rows.Next(); i++ {
		got := map[string]any{}
		if err := rows.Scan(&got); err != nil {
			t.Fatal(err)
		}
		for k, name := range lines[0] {
			if want, ok := units[name]; ok && table.Col(k).Unit != want {
				t.Errorf("unit of %s is %q, want %q", name, table.Col(k).Unit, want)
			}
			same(t, name, got[name], lines[i+1][k])
		}
	}
}

// same compares a cell of the FITS table with that of the CSV one.
func same(t *testing.T, name string, got any, want string) {
	t.Helper()
	switch v := got.(type) {
	case float64:
		w, err := strconv.ParseFloat(want, 64)
		if want == "" {
			w, err = math.NaN(), nil
		}
		if err != nil || v != w && !(math.IsNaN(v) && math.IsNaN(w)) {
			t.Errorf("%s is %g, want %q", name, v, want)
		}
	case string:
		if strings.TrimRight(v, " ") != strings.ReplaceAll(want, "\n", `\n`) {
			t.Errorf("%s is %q, want %q", name, v, want)
		}
	default:
		t.Errorf("%s is a %T", name, got)
	}
}

func TestExportFor(t *testing.T) {
	if e, err := ExportFor("a/B.FITS"); err != nil || e.Ending != ".fits" {
		t.Errorf("%+v, %v", e, err)
	}
	if _, err := ExportFor("a.xlsx"); err == nil || !strings.Contains(err.Error(), ".jsonl") {
		t.Error(err)
	}
}
