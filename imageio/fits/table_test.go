package fits

import (
	"bytes"
	"io"
	"math"
	"strings"
	"testing"

	"github.com/astrogo/fitsio"
)

func sampleTable() []TableColumn {
	return []TableColumn{
		{Name: "shot", Comment: "path of the shot", Words: []string{"ramp_1", "", "größe 'a'"}},
		{Name: "T_nK", Unit: "nK", Comment: "temperature", Numbers: []float64{123.456, math.NaN(), -1e-300}},
		{Name: "atoms", Numbers: []float64{1e5, 0, 3}},
	}
}

// TestTableReadBack reads the table with another implementation.
func TestTableReadBack(t *testing.T) {
	var b bytes.Buffer
	if err := WriteTable(&b, "RESULTS", sampleTable(), []Card{Text("NIGHT", "a night", "")}); err != nil {
		t.Fatal(err)
	}
	if b.Len()%blockSize != 0 {
		t.Errorf("%d bytes are no whole blocks", b.Len())
	}
	f, err := fitsio.Open(bytes.NewReader(b.Bytes()))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	table, ok := f.HDU(1).(*fitsio.Table)
	if !ok || table.NumRows() != 3 || table.NumCols() != 3 {
		t.Fatalf("HDU 1 is %T", f.HDU(1))
	}
	h := table.Header()
	for key, want := range map[string]any{"EXTNAME": "RESULTS", "NIGHT": "a night", "TUNIT2": "nK", "TFORM1": "19A", "TFORM2": "1D"} {
		if c := h.Get(key); c == nil || c.Value != want {
			t.Errorf("%s is %v, want %v", key, c, want)
		}
	}
	if h.Get("TUNIT3") != nil {
		t.Error("a pure number has a unit")
	}
	rows, err := table.Read(0, table.NumRows())
	if err != nil {
		t.Fatal(err)
	}
	defer rows.Close()
	for i := 0; rows.Next(); i++ {
		got := map[string]any{}
		if err := rows.Scan(&got); err != nil {
			t.Fatal(err)
		}
		want := sampleTable()
		for _, c := range want[1:] {
			v, ok := got[c.Name].(float64)
			if !ok || v != c.Numbers[i] && !(math.IsNaN(v) && math.IsNaN(c.Numbers[i])) {
				t.Errorf("row %d: %s is %v, want %v", i, c.Name, got[c.Name], c.Numbers[i])
			}
		}
		words := []string{"ramp_1", "", `gr\u00f6\u00dfe 'a'`}
		if s := strings.TrimRight(got["shot"].(string), " "); s != words[i] {
			t.Errorf("row %d: shot is %q, want %q", i, s, words[i])
		}
	}
}

func TestTableRefused(t *testing.T) {
	for what, c := range map[string][]TableColumn{
		"no columns":     {},
		"two lengths":    {{Name: "a", Numbers: []float64{1}}, {Name: "b", Numbers: []float64{1, 2}}},
		"name not ASCII": {{Name: "größe", Numbers: []float64{1}}},
		"unit not ASCII": {{Name: "a", Unit: "µm", Numbers: []float64{1}}},
		"name too long":  {{Name: strings.Repeat("x", 69), Numbers: []float64{1}}},
	} {
		var b bytes.Buffer
		if err := WriteTable(&b, "X", c, nil); err == nil || b.Len() > 0 {
			t.Errorf("%s: %v, %d bytes", what, err, b.Len())
		}
	}
	if err := WriteTable(io.Discard, "X", sampleTable(), []Card{Integer("PCOUNT", 3, "")}); err == nil {
		t.Error("a card of the writer's own is taken")
	}
}
