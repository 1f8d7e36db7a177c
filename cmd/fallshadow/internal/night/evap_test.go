package night

import (
	"context"
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"

	"fallshadow/cmd/fallshadow/internal/settings"
)

// quietProgress shows nothing.
type quietProgress struct{}

func (quietProgress) Begin(string, int) {}
func (quietProgress) Step(string, bool) {}
func (quietProgress) End()              {}

// row is one line of a table by its column names.
type row map[string]string

func (r row) number(name string) float64 {
	v, err := strconv.ParseFloat(r[name], 64)
	if err != nil {
		return math.NaN()
	}
	return v
}

func readTable(t *testing.T, path string) []row {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	lines, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []row
	for _, l := range lines[1:] {
		r := row{}
		for i, name := range lines[0] {
			r[name] = l[i]
		}
		out = append(out, r)
	}
	return out
}

// evapTables runs the night and returns results, truth and bound. The bound is that of one light
// frame as reference and of a picture without blur.
func evapTables(t *testing.T, reference string) (got, truth, bound []row) {
	t.Helper()
	dir := os.Getenv("FALLSHADOW_NIGHT_EVAP")
	if dir == "" {
		t.Skip("FALLSHADOW_NIGHT_EVAP does not name the folder of the night")
	}
	ref := filepath.Join("..", "..", "..", "..", "testdata", "reference")
	text, err := os.ReadFile(filepath.Join(ref, "evap_settings.toml"))
	if err != nil {
		t.Fatal(err)
	}
	s, err := settings.Parse(fmt.Appendf(text, "[fit]\nreference = %q\n", reference), "evap_settings.toml")
	if err != nil {
		t.Fatal(err)
	}
	out := t.TempDir()
	if _, err := Batch(context.Background(), Options{Dir: dir, Out: out, Settings: s}, quietProgress{}); err != nil {
		t.Fatal(err)
	}
	got = readTable(t, filepath.Join(out, "results.csv"))
	truth, bound = readTable(t, filepath.Join(ref, "evap_truth.csv")), readTable(t, filepath.Join(ref, "evap_bound.csv"))
	if len(got) != 16 || len(truth) != 16 {
		t.Fatalf("%d shots, want 16", len(got))
	}
	return got, truth, bound
}

// TestEvapNight holds the table of an independent night against its truth: every shot fitted
// without help. The comparison is printed. With each shot's own light frame the errors are held
// against the bound, which is for that; with the basis of the night the intervals of poorly
// known temperatures must hold the truth (fringes are in no error of a single light frame).
func TestEvapNight(t *testing.T) {
	for _, reference := range []string{"own", "basis"} {
		t.Run(reference, func(t *testing.T) {
			got, truth, bound := evapTables(t, reference)
			var sumN, sumT float64
			for i, g := range got {
				n := i + 1
				w, b := truth[i], bound[i]
				t.Log(evapLine(n, g, w, b))
				at := func(what string, v, want, tol float64) {
					if !(math.Abs(v-want) <= tol) {
						t.Errorf("shot %d: %s is %g, want %g within %g", n, what, v, want, tol)
					}
				}
				at("atoms", g.number("atoms"), w.number("N"), 0.015*w.number("N"))
				T, sT := w.number("T_nK"), b.number("sT_nK")
				switch {
				case n <= 5:
					if g["model"] != "thermal" {
						t.Errorf("shot %d: model %s", n, g["model"])
					}
					at("T", g.number("T_nK"), T, math.Max(0.04*T, 3*sT))
				case g["model"] == "condensate":
					if high := g.number("T_nK_high"); n < 16 || !(high > T) {
						t.Errorf("shot %d: condensate with T below %g", n, high)
					}
				default:
					at("T", g.number("T_nK"), T, math.Max(0.05*T, 3*sT))
				}
				if n > 5 {
					at("fraction", g.number("fraction"), w.number("f0"), 0.02)
					mu := w.number("mu_nK")
					at("mu", g.number("mu_nK"), mu, math.Max(0.007*mu, 3*b.number("smu_nK")))
				}
				if n <= 13 {
					sumN += math.Pow((g.number("atoms")-w.number("N"))/b.number("sN"), 2) / 13
					sumT += math.Pow((g.number("T_nK")-T)/sT, 2) / 13
				} else if high, low := g.number("T_nK_high"), g.number("T_nK_low"); reference == "basis" && high == high && !(high > T && !(low > T)) {
					t.Errorf("shot %d: T from %g to %g does not hold %g", n, low, high, T)
				}
				if reference == "own" && n <= 13 {
					at("error of N over the bound", g.number("atoms_err")/b.number("sN"), 1.1, 0.3)
					at("error of T over the bound", g.number("T_nK_err")/sT, 1.1, 0.3)
				}
			}
			t.Logf("rms of (value - truth)/bound, shots 1-13: N %.2f, T %.2f", math.Sqrt(sumN), math.Sqrt(sumT))
			if !(math.Sqrt(sumN) < 1.2 && math.Sqrt(sumT) < 1.2) {
				t.Errorf("rms of N %.2f and T %.2f bounds, want below 1.2", math.Sqrt(sumN), math.Sqrt(sumT))
			}
		})
	}
}

func evapLine(n int, g, w, b row) string {
	z := func(name, truth, sigma string) string {
		d := g.number(name) - w.number(truth)
		return fmt.Sprintf("%s %+6.2f%% %+5.2f bounds", name, 100*d/w.number(truth), d/b.number(sigma))
	}
	return fmt.Sprintf("%2d %-10s %s (err/bound %.2f)  %s (%.2f)  %s  %s  chi2_cloud %.2f %s", n, g["model"],
		z("atoms", "N", "sN"), g.number("atoms_err")/b.number("sN"), z("T_nK", "T_nK", "sT_nK"), g.number("T_nK_err")/b.number("sT_nK"),
		z("condensate", "N0", "sN0"), z("mu_nK", "mu_nK", "smu_nK"), g.number("chi2_cloud"), g["flags"])
}
