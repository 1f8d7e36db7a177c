package simulate

import (
	"bytes"
	"context"
	"encoding/csv"
	"errors"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"strconv"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/model"
)

// near fails unless got lies within tol of want; NaN fails.
func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.9g, want %.9g within %.2g", what, got, want, tol)
	}
}

// preset returns a night of a preset over some shots.
func preset(t testing.TB, name string, shots int) *Night {
	t.Helper()
	s, lab, err := Preset(name)
	if err != nil {
		t.Fatal(err)
	}
	n, err := New(s.WithShots(shots), lab, name)
	if err != nil {
		t.Fatal(err)
	}
	return n
}

// tree reads a folder with all that is below it.
func tree(t *testing.T, dir string) map[string][]byte {
	t.Helper()
	files := map[string][]byte{}
	err := filepath.WalkDir(dir, func(path string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		name, _ := filepath.Rel(dir, path)
		files[filepath.ToSlash(name)], err = os.ReadFile(path)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return files
}

func write(t *testing.T, n *Night, workers int) map[string][]byte {
	t.Helper()
	dir := filepath.Join(t.TempDir(), "night")
	if err := n.Write(context.Background(), dir, workers, nil); err != nil {
		t.Fatal(err)
	}
	return tree(t, dir)
}

func TestSameSeedSameBytes(t *testing.T) {
	one, two := write(t, preset(t, "wreck", 14), 1), write(t, preset(t, "wreck", 14), 2)
	if len(one) != 13+3 {
		t.Errorf("%d files, want 13 shots, settings, scenario and truth", len(one))
	}
	for name, data := range one {
		if !bytes.Equal(data, two[name]) {
			t.Errorf("%s differs between one worker and two", name)
		}
	}
	other := preset(t, "demo", 2)
	other.Scenario.Seed++
	a, _, _ := preset(t, "demo", 2).Draw(0)
	b, _, _ := other.Draw(0)
	if same := countSame(a.Light, b.Light); same > len(a.Light)/20 {
		t.Errorf("another seed left %d of %d pixels as they were", same, len(a.Light))
	}
}

func countSame(a, b []uint16) (same int) {
	for i := range a {
		if a[i] == b[i] {
			same++
		}
	}
	return same
}

func TestNightIsWrittenOnceAndWhole(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "a", "night")
	n := preset(t, "demo", 2)
	calls := 0
	if err := n.Write(context.Background(), dir, 2, func() { calls++ }); err != nil {
		t.Fatal(err)
	}
	if calls != 2 {
		t.Errorf("told of %d shots, want 2", calls)
	}
	before := tree(t, dir)
	err := n.Write(context.Background(), dir, 1, nil)
	if err == nil || !strings.Contains(err.Error(), "not empty") {
		t.Errorf("a night was written over: %v", err)
	}
	for name, data := range tree(t, dir) {
		if !bytes.Equal(data, before[name]) {
			t.Errorf("%s was changed", name)
		}
	}
	stopped, cancel := context.WithCancel(context.Background())
	cancel()
	if err := n.Write(stopped, dir+"2", 1, nil); !errors.Is(err, context.Canceled) {
		t.Errorf("a stopped night: %v", err)
	}
	entries, _ := os.ReadDir(filepath.Dir(dir))
	if len(entries) != 1 {
		t.Errorf("left behind: %v", entries)
	}
}

// The written settings and scenario make the same night again.
func TestNightReadsItselfBack(t *testing.T) {
	n := preset(t, "potassium-flight", 2)
	files := write(t, n, 1)
	s, err := Parse(files[ScenarioFile], ScenarioFile)
	if err != nil {
		t.Fatal(err)
	}
	again, err := New(s, files[settings.FileName], settings.FileName)
	if err != nil {
		t.Fatal(err)
	}
	for i := range s.Shots {
		a, _, err := n.Draw(i)
		if err != nil {
			t.Fatal(err)
		}
		b, _, err := again.Draw(i)
		if err != nil || countSame(a.Atoms, b.Atoms) != len(a.Atoms) {
			t.Errorf("shot %d differs when drawn from its own papers: %v", i, err)
		}
	}
}

// A plain sum over the mean frames finds the atoms of every preset: no fit, no model.
func TestPlainSumFindsTheTruth(t *testing.T) {
	for _, name := range presetNames() {
		s, lab, err := Preset(name)
		if err != nil {
			t.Fatal(err)
		}
		s.Probe.PowerNoise, s.Probe.SlopeNoise, s.Fringes.Count, s.Damage = 0, 0, 0, nil
		n, err := New(s.WithShots(2), lab, name)
		if err != nil {
			t.Fatal(err)
		}
		n.scene.Blur = 0 // it takes up to 4 % off the sum over a steep cloud
		for i := range 2 {
			e, truth, err := n.Expect(i)
			if err != nil {
				t.Fatal(err)
			}
			law := n.scene.Law
			sum, mx, my := 0.0, 0.0, 0.0
			for j, a := range e.Atoms {
				b := e.Light[j]
				od := law.Alpha*math.Log(b/a) + (b-a)/law.Saturation
				sum += od
				mx += od * float64(j%e.Width)
				my += od * float64(j/e.Width)
			}
			atoms := sum * n.machine.pixel * n.machine.pixel / n.machine.species.Sigma0()
			// The mean over a pixel still takes some 0.3 %; wings end at the frame.
			near(t, name+" atoms", atoms/truth.N, 0.997, 0.003)
			near(t, name+" x", mx/sum, truth.X, 0.05)
			near(t, name+" y", my/sum, truth.Y, 0.05)
		}
	}
}

func TestTruthObeysTheGas(t *testing.T) {
	for _, law := range []string{"ideal", "finite", "semi-ideal"} {
		n := preset(t, "mean-field", 6)
		n.Scenario.Gas.Law = law
		for i := range 6 {
			truth, err := n.Truth(i)
			if err != nil {
				t.Fatal(err)
			}
			m := n.machine
			reduced := truth.T / truth.Tc0
			near(t, "number", truth.N0+truth.Thermal, truth.N, 1e-9*truth.N)
			near(t, "Tc0", truth.Tc0, model.HBar*m.trap.GeometricMean()/model.KB*math.Cbrt(truth.N/1.2020569031595942), 1e-9*truth.Tc0)
			switch {
			case reduced > 1:
				near(t, "condensate", truth.N0, 0, 0)
				near(t, "thermal number", model.ThermalNumber(truth.T, truth.Alpha, m.trap)/truth.N, 1, 1e-9)
			case law == "ideal":
				near(t, "fraction", truth.N0/truth.N, 1-reduced*reduced*reduced, 1e-12)
				near(t, "saturated number", truth.Thermal/model.ThermalNumber(truth.T, 0, m.trap), 1, 1e-9)
			case law == "finite":
				near(t, "fraction", truth.N0/truth.N, model.FiniteSizeFraction(reduced, truth.N, m.trap), 1e-12)
			default:
				gas, err := model.SemiIdealAt(truth.T, truth.Mu, m.species.Mass, m.species.ScatteringLength, m.trap)
				near(t, "thermal number", truth.Thermal/gas.Thermal, 1, 1e-6)
				if err != nil || !(truth.N0 < truth.N*model.IdealFraction(reduced)) {
					t.Errorf("interaction does not deplete: %g of %g, %v", truth.N0, truth.N, err)
				}
			}
		}
	}
}

// An attractive gas condenses into a gaussian and refuses to grow beyond collapse.
func TestAttractiveGas(t *testing.T) {
	s, lab, err := Preset("demo")
	if err != nil {
		t.Fatal(err)
	}
	lab = bytes.Replace(lab, []byte("value = 54.54, err = 0.2"), []byte("value = -27.3, err = 0.8"), 1)
	s.Path.TReduced = [2]float64{0.5, 0.5}
	s.Path.Atoms = [2]float64{300, 300}
	n, err := New(s.WithShots(1), lab, "lab")
	if err != nil {
		t.Fatal(err)
	}
	truth, err := n.Truth(0)
	if err != nil || !(truth.Mu > 0) {
		t.Errorf("small condensate: %+v, %v", truth, err)
	}
	scene, drawn, err := n.sceneOf(0)
	if err != nil {
		t.Fatal(err)
	}
	sum := 0.0
	for y := range 144 {
		for x := range 160 {
			sum += scene.Cloud(float64(x), float64(y))
		}
	}
	area := n.machine.pixel * n.machine.pixel
	near(t, "atoms", sum*area/n.machine.species.Sigma0(), truth.N, 0.01*truth.N)
	near(t, "peak", scene.Cloud(drawn.X, drawn.Y), drawn.PeakOD, 1e-12)
	n.Scenario.Path.Atoms = [2]float64{1e6, 1e6}
	if _, err := n.Truth(0); !errors.Is(err, model.ErrCollapse) {
		t.Errorf("beyond collapse: %v", err)
	}
}

func TestTruthTable(t *testing.T) {
	files := write(t, preset(t, "wreck", 14), 2)
	rows, err := csv.NewReader(bytes.NewReader(files[TruthFile])).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(rows) != 15 {
		t.Fatalf("%d rows, want a header and 14 shots", len(rows))
	}
	at := map[string]int{}
	for i, name := range rows[0] {
		at[name] = i
	}
	for _, row := range rows[1:] {
		name := row[at["shot"]] + ".fits"
		if _, there := files[name]; there == (row[at["damage"]] == absent) {
			t.Errorf("%s is %q but its file: %v", name, row[at["damage"]], there)
		}
		n, _ := strconv.ParseFloat(row[at["N"]], 64)
		if (n == 0) != (row[at["damage"]] == empty) || (row[at["T_nK"]] == "") != (n == 0) {
			t.Errorf("%s: N %s, T %q, damage %q", name, row[at["N"]], row[at["T_nK"]], row[at["damage"]])
		}
		f, _ := strconv.ParseFloat(row[at["fraction"]], 64)
		if (row[at["mu_nK"]] == "") != !(f > 0) {
			t.Errorf("%s: fraction %g with mu %q", name, f, row[at["mu_nK"]])
		}
	}
}

// The night in testdata is what its preset makes. Other processors round some products
// otherwise, so the comparison is made where the night was drawn.
func TestDemoNightIsThePreset(t *testing.T) {
	if runtime.GOARCH != "amd64" {
		t.Skip("drawn on amd64")
	}
	kept := tree(t, filepath.Join("..", "..", "..", "..", "testdata", "night"))
	total := 0
	for name, data := range write(t, preset(t, "demo", 9), 2) {
		if !bytes.Equal(data, kept[name]) {
			t.Errorf("testdata/night/%s is not what the preset makes: see its README", name)
		}
		total += len(data)
	}
	if total > 3<<20 {
		t.Errorf("the demo night has %d bytes, at most 3 MB", total)
	}
}

func BenchmarkDraw(b *testing.B) {
	for _, name := range []string{"demo", "rubidium", "fringed", "mean-field"} {
		b.Run(name, func(b *testing.B) {
			n := preset(b, name, 9)
			for b.Loop() {
				if _, _, err := n.Draw(6); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
