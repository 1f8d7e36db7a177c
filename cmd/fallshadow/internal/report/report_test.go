package report

import (
	"bytes"
	"encoding/csv"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/fit"
	"fallshadow/model"
	"fallshadow/model/numbers"
)

// promised are the columns that users and their scripts rely on.
const promised = `shot, file, status, flags, model, form, flight_ms, atoms, atoms_err, atoms_cal,
	condensate, condensate_err, condensate_cal, thermal, thermal_err, fraction, fraction_err, fraction_cal,
	T_nK, T_nK_err, T_nK_cal, mu_nK, mu_nK_err, mu_nK_cal, mu_from_atoms_nK, Tc0_nK, t_reduced, fugacity,
	width1_um, width2_um, radius1_um, radius2_um, x_px, y_px, angle_deg, peak_od, chi2_per_dof, chi2_cloud,
	thermal_over_saturated, atoms_sum, atoms_sum_err`

func promisedNames() []string {
	return strings.FieldsFunc(promised, func(r rune) bool { return strings.ContainsRune(", \n\t", r) })
}

func TestPromisedColumnsStandFirst(t *testing.T) {
	var got []string
	for _, c := range Columns[:Promised] {
		got = append(got, c.Name)
	}
	if diff := cmp.Diff(promisedNames(), got); diff != "" {
		t.Error(diff)
	}
}

func TestColumnsAreDescribedOnce(t *testing.T) {
	seen := map[string]bool{}
	for _, c := range Columns {
		if seen[c.Name] {
			t.Errorf("two columns are called %s", c.Name)
		}
		seen[c.Name] = true
		if c.Meaning == "" {
			t.Errorf("%s has no meaning", c.Name)
		}
		for unit, suffix := range map[string]string{"nK": "_nK", "um": "_um", "ms": "_ms", "px": "_px", "deg": "_deg"} {
			if has := strings.Contains(c.Name+"_", suffix+"_"); has != (c.Unit == unit) {
				t.Errorf("%s has the unit %q", c.Name, c.Unit)
			}
		}
		getters := 0
		for _, is := range []bool{c.number != nil, c.word != nil, c.row != nil} {
			if is {
				getters++
			}
		}
		if getters != 1 {
			t.Errorf("%s has %d getters", c.Name, getters)
		}
	}
	for _, name := range []string{"reason", "T_nK_low", "T_nK_high", "condensate_high"} {
		if !seen[name] {
			t.Errorf("no column %s", name)
		}
	}
}

func facts() *Facts {
	nan := math.NaN()
	v := func(x float64) numbers.Value {
		return numbers.Value{V: x, Err: x / 100, Cal: x / 50, Low: nan, High: nan}
	}
	n := numbers.Nothing()
	n.Atoms, n.Condensate, n.Thermal, n.Fraction = v(3e5), v(1e5), v(2e5), v(1./3)
	n.T, n.Mu = v(200e-9), v(50e-9*model.KB)
	n.Mu.Cal = nan
	n.T.Low, n.T.High = 190e-9, math.Inf(1)
	n.Shifts = []numbers.Effect{{Name: "alpha", Known: true, Change: numbers.Derived{Atoms: 1e3, Mu: nan}}}
	return &Facts{
		Flight: 0.015, X: 160.5, Y: 12, Reference: "own", Notes: []string{"part_saturated"},
		Fit: &fit.Result{Model: "bimodal", Form: "bose+tf", Numbers: n, Width: [2]float64{1e-4, nan}, Angle: math.Pi / 45, Flags: []string{"dense", "misfit"}},
	}
}

func TestFillAndCell(t *testing.T) {
	r := ledger.Row{Shot: "a/1", Files: []string{"a/1.fits", "a/2.fits"}}
	Fill(&r, facts())
	r.Provisional, r.Duplicate, r.Stale, r.Bad = true, "a/0", true, "laser unlocked"
	cell := map[string]string{}
	for _, c := range Columns {
		cell[c.Name] = c.Cell(&r)
	}
	for name, want := range map[string]string{
		"shot": "a/1", "file": "a/1.fits;a/2.fits", "status": "ok", "reason": "",
		"flags": "part_saturated+dense+misfit+duplicate+provisional+stale+marked_bad", "bad": "laser unlocked",
		"model": "bimodal", "form": "bose+tf", "flight_ms": "15", "atoms": "300000", "atoms_err": "3000",
		"fraction": "0.3333333333333333", "mu_nK_cal": "", "fugacity": "", "T_nK_high": "", "width1_um": "100",
		"width2_um": "", "x_px": "160.5", "angle_deg": "4", "reference": "own",
	} {
		if cell[name] != want {
			t.Errorf("%s is %q, want %q", name, cell[name], want)
		}
	}
	for name, want := range map[string]float64{"T_nK": 200, "mu_nK": 50, "T_nK_low": 190, "T_nK_cal": 4} {
		got, err := strconv.ParseFloat(cell[name], 64)
		if err != nil || !(math.Abs(got-want) <= 1e-12*want) {
			t.Errorf("%s is %q, want %v", name, cell[name], want)
		}
	}
	want := map[string]ledger.Shift{"alpha": {Known: true, Change: map[string]float64{"atoms": 1e3}}}
	for name := range r.Shifts["alpha"].Change {
		if r.Shifts["alpha"].Change[name] == 0 {
			delete(r.Shifts["alpha"].Change, name)
		}
	}
	if diff := cmp.Diff(want, r.Shifts); diff != "" {
		t.Error(diff)
	}
}

func TestCSV(t *testing.T) {
	good := ledger.Row{Shot: "a,\"1\"", Meta: map[string]string{"evap": "1.50", "OTHER": "x"}}
	Fill(&good, facts())
	bad := ledger.Row{Shot: "b", Reason: "b.fits: truncated"}
	var out bytes.Buffer
	if err := WriteCSV(&out, []ledger.Row{good, bad}, []string{"EVAP"}); err != nil {
		t.Fatal(err)
	}
	if bytes.Contains(out.Bytes(), []byte("\r")) || bytes.Contains(out.Bytes(), []byte("NaN")) {
		t.Error("the file holds a carriage return or NaN")
	}
	lines, err := csv.NewReader(&out).ReadAll()
	if err != nil || len(lines) != 3 {
		t.Fatalf("%d lines (%v)", len(lines), err)
	}
	if diff := cmp.Diff(promisedNames(), lines[0][:Promised]); diff != "" {
		t.Error(diff)
	}
	at := func(name string) int { return slices.Index(lines[0], name) }
	for _, c := range []struct {
		line       int
		name, want string
	}{
		{1, "shot", "a,\"1\""}, {1, "EVAP", "1.50"}, {1, "status", "ok"}, {2, "status", "failed"},
		{2, "reason", "b.fits: truncated"}, {2, "atoms", ""}, {2, "EVAP", ""},
	} {
		if got := lines[c.line][at(c.name)]; got != c.want {
			t.Errorf("line %d, %s is %q, want %q", c.line, c.name, got, c.want)
		}
	}
	for i, c := range Columns {
		if c.IsNumber() && lines[1][i] != "" {
			v, err := strconv.ParseFloat(lines[1][i], 64)
			if err != nil || v != good.Numbers[c.Name] {
				t.Errorf("%s reads back as %v (%v), was %v", c.Name, v, err, good.Numbers[c.Name])
			}
		}
	}
}

func TestCheckScan(t *testing.T) {
	for _, test := range []struct {
		scan []string
		ok   bool
	}{{nil, true}, {[]string{"EVAP", "HOLD"}, true}, {[]string{"T_nK"}, false}, {[]string{"A", "A"}, false}} {
		if err := CheckScan(test.scan); (err == nil) != test.ok {
			t.Errorf("%v: %v", test.scan, err)
		}
	}
}

func TestSaveCSVIsWholeOrNot(t *testing.T) {
	dir := t.TempDir()
	if err := SaveCSV(dir, []ledger.Row{{Shot: "a"}}, nil); err != nil {
		t.Fatal(err)
	}
	before, err := os.ReadFile(filepath.Join(dir, CSVName))
	if err != nil {
		t.Fatal(err)
	}
	// A folder in the place of the temporary file makes the next writing fail.
	if err := os.Mkdir(filepath.Join(dir, CSVName+".tmp"), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := SaveCSV(dir, []ledger.Row{{Shot: "b"}}, nil); err == nil {
		t.Error("no error")
	}
	if after, _ := os.ReadFile(filepath.Join(dir, CSVName)); !bytes.Equal(before, after) {
		t.Error("the table is not what it was")
	}
}

func TestConcise(t *testing.T) {
	nan := math.NaN()
	tests := []struct {
		v, err, low, high float64
		want              string
	}{
		{123.4, 1.2, nan, nan, "123.4(1.2)"},
		{0.345, 0.012, nan, nan, "0.345(12)"},
		{1.234e5, 1.2e3, nan, nan, "1.234(12)e5"},
		{99999, 3, nan, nan, "99999.0(3.0)"},
		{1234, 123, nan, nan, "1234(123)"},
		{10, 0.0996, nan, nan, "10.00(10)"},
		{10, 0.996, nan, nan, "10.0(1.0)"},
		{0, 0.5, nan, nan, "0.00(50)"},
		{-2.5e-5, 1e-6, nan, nan, "-2.50(10)e-5"},
		{12.3, 1.5, 11.4, 13.8, "12.3+1.5-0.9"},
		{1.2e6, nan, 1.1e6, 1.5e6, "(1.20+0.30-0.10)e6"},
		{nan, nan, nan, 1234, "<1.23e3"},
		{0, nan, nan, 55, "<55"},
		{15, nan, nan, nan, "15"},
		{0.98765432, nan, nan, nan, "0.9877"},
		{nan, nan, nan, nan, ""},
	}
	for _, test := range tests {
		var r ledger.Row
		for name, v := range map[string]float64{"q": test.v, "q_err": test.err, "q_low": test.low, "q_high": test.high} {
			r.SetNumber(name, v)
		}
		if got := Concise(&r, "q"); got != test.want {
			t.Errorf("%v ± %v (%v, %v) is %q, want %q", test.v, test.err, test.low, test.high, got, test.want)
		}
	}
}

func TestSummary(t *testing.T) {
	good := ledger.Row{Shot: "shot_1"}
	Fill(&good, facts())
	good.Flags = []string{"dense"}
	bad := ledger.Row{Shot: "b\x1b[2J", Reason: "b.fits: truncated", Duplicate: "shot_1"}
	var out bytes.Buffer
	if err := Summary(&out, []ledger.Row{good, bad}); err != nil {
		t.Fatal(err)
	}
	want := `shot    flight/ms            N           N0    fraction  T/nK      mu/nK  T/Tc0  flags
shot_1         15  3.000(30)e5  1.000(10)e5  0.3333(33)  >190  50.00(50)         dense
b?[2J                                                                            duplicate failed: b.fits: truncated
`
	table, legend, _ := strings.Cut(out.String(), "\n\n")
	if diff := cmp.Diff(want, table+"\n"); diff != "" {
		t.Error(diff)
	}
	if !strings.HasPrefix(legend, "dense (1): ") || !strings.Contains(legend, "\nduplicate (1): ") || strings.Count(legend, "\n") != 2 {
		t.Errorf("the legend is %q", legend)
	}
}

// TestNoiseOfDensityImages: nobody is sent to settings of a camera that density images lack.
func TestNoiseOfDensityImages(t *testing.T) {
	for _, density := range []bool{false, true} {
		r := ledger.Row{Shot: "a", Flags: []string{fit.FlagNoise}}
		if density {
			r.Flags = append(r.Flags, fit.FlagDensityNoReference)
		}
		var out bytes.Buffer
		if err := Summary(&out, []ledger.Row{r}); err != nil {
			t.Fatal(err)
		}
		if got := out.String(); strings.Contains(got, "electrons_per_count") == density || strings.Contains(got, "neighbouring pixels") != density {
			t.Errorf("density %v:\n%s", density, got)
		}
	}
}

func TestFlagsAreOneTable(t *testing.T) {
	seen := map[string]bool{}
	for _, f := range AllFlags() {
		if seen[f.Name] || f.Sentence == "" || strings.ContainsAny(f.Name, "+ ,") {
			t.Errorf("flag %q", f.Name)
		}
		seen[f.Name] = true
	}
	for _, name := range []string{FlagDuplicate, FlagProvisional, FlagStale, FlagMarkedBad} {
		if !seen[name] {
			t.Errorf("no flag %s", name)
		}
	}
}

func TestMarkdownNamesAll(t *testing.T) {
	text := string(Markdown())
	for _, c := range Columns {
		if !strings.Contains(text, "| `"+c.Name+"` | "+c.Unit+" | "+c.Meaning+" |\n") {
			t.Errorf("no line for the column %s", c.Name)
		}
	}
	for _, f := range AllFlags() {
		if !strings.Contains(text, "| `"+f.Name+"` | "+f.Sentence+" |\n") {
			t.Errorf("no line for the flag %s", f.Name)
		}
	}
}

// TestDepthWords: sigma0 n and the optical density of a weak resonant probe, sigma0 n/alpha, are
// told apart where the one or the other is meant.
func TestDepthWords(t *testing.T) {
	found := 0
	for _, c := range Columns {
		if c.Name == "peak_od" && strings.HasPrefix(c.Meaning, "sigma0 n at the peak") && strings.Contains(c.Meaning, "sigma0 n/alpha") {
			found++
		} else if strings.Contains(c.Meaning, "optical density") {
			t.Errorf("column %s: %q", c.Name, c.Meaning)
		}
	}
	for _, f := range AllFlags() {
		if f.Name == fit.FlagDense && strings.Contains(f.Sentence, "optical density (sigma0 n/alpha") {
			found++
		} else if strings.Contains(f.Sentence, "optical density") {
			t.Errorf("flag %s: %q", f.Name, f.Sentence)
		}
	}
	if found != 2 {
		t.Errorf("%d of column and flag say what they mean", found)
	}
}
