package bound

import (
	"context"
	"encoding/binary"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"fallshadow/model"
)

// evap is the experiment of the simulated night that testdata/reference/evap_truth.csv
// belongs to: settings exact, one light frame as the reference, an offset known apart. Its
// light is a gaussian measured from the night's light frames; see TestProbeOfTheNight.
func evap(t testing.TB, row tableRow) (Experiment, Cloud) {
	rb, err := model.LookupSpecies("87Rb")
	if err != nil {
		t.Fatal(err)
	}
	e := Experiment{
		Species: rb, Trap: model.TrapHz(20, 120, 120), View: model.View(4*math.Pi/180, 0, 0),
		Flight: row.num(t, "tof_ms") * 1e-3,
		Optics: Optics{Pixel: 6.45e-6 / 2, Blur: 3e-6, Alpha: 2, Saturation: 9000},
		Width:  320, Height: 320, X: row.num(t, "cx_px"), Y: row.num(t, "cy_px"),
		Light: probe, Noise: Noise{Read: 6, LightShot: 1, LightRead: 36},
	}
	c := Cloud{
		T: row.num(t, "T_nK") * 1e-9, ThermalAtoms: row.num(t, "Nth"), CondensateAtoms: row.num(t, "N0"),
		Mu: row.num(t, "mu_nK") * 1e-9 * model.KB, Alpha: -math.Log(row.num(t, "z")),
	}
	return e, c
}

// probe is the mean light of the night in electrons: 1360 at its centre (171, 153) px, 200 px rms.
func probe(x, y float64) float64 {
	return 1360 * math.Exp(-(math.Pow(x-171, 2)+math.Pow(y-153, 2))/(2*200*200))
}

// TestEvapBound compares with a table of bounds made by a program written apart from this
// one. The table belongs to a sharp picture: with the night's resolution of 3 µm in the
// model the bound of μ is 9 to 15 % and that of N0 2 to 5 % above it.
func TestEvapBound(t *testing.T) {
	want := readTable(t, "evap_bound.csv")
	for i, row := range readTable(t, "evap_truth.csv") {
		e, c := evap(t, row)
		blurred := bound(t, e, c)
		e.Optics.Blur = 0
		got := bound(t, e, c)
		line := fmt.Sprintf("shot %2s", row["shot"])
		for _, q := range []struct {
			column       string
			got, blurred float64
		}{
			{"sT_nK", got.T * 1e9, blurred.T * 1e9},
			{"sNth", got.Thermal, blurred.Thermal},
			{"sN0", got.Condensate, blurred.Condensate},
			{"sN", got.Atoms, blurred.Atoms},
			{"sf0", got.Fraction, blurred.Fraction},
			{"smu_nK", got.Mu / model.KB * 1e9, blurred.Mu / model.KB * 1e9},
		} {
			if want[i][q.column] == "nan" {
				if !math.IsNaN(q.got) {
					t.Errorf("shot %s: %s is %g, the cloud has none", row["shot"], q.column, q.got)
				}
				continue
			}
			w := want[i].num(t, q.column)
			near(t, "shot "+row["shot"]+" "+q.column, q.got, w, 0.02)
			if !(q.blurred >= q.got) {
				t.Errorf("shot %s: blur improves %s from %g to %g", row["shot"], q.column, q.got, q.blurred)
			}
			line += fmt.Sprintf("  %s %.4f (%.4f)", q.column, q.got/w, q.blurred/w)
		}
		t.Log(line)
	}
	t.Log("ratio to the table without blur (with 3 µm)")
}

// TestProbeOfTheNight compares the gaussian that stands for the light with the mean of the
// night's light frames, block by block.
func TestProbeOfTheNight(t *testing.T) {
	night := os.Getenv("FALLSHADOW_NIGHT_EVAP")
	if night == "" {
		t.Skip("FALLSHADOW_NIGHT_EVAP names no folder")
	}
	files, err := filepath.Glob(filepath.Join(night, "*.fits"))
	if err != nil || len(files) == 0 {
		t.Fatalf("no FITS files in %s: %v", night, err)
	}
	const side, block = 320, 32
	mean := make([]float64, side*side)
	for _, name := range files {
		light, dark := plane(t, name, 1, side), plane(t, name, 2, side)
		slices.Sort(dark)
		for i, v := range light {
			mean[i] += (v - dark[len(dark)/2]) / float64(len(files))
		}
	}
	for y := 0; y < side; y += block {
		for x := 0; x < side; x += block {
			var ratios []float64
			for j := y; j < y+block; j++ {
				for i := x; i < x+block; i++ {
					ratios = append(ratios, mean[j*side+i]/probe(float64(i), float64(j)))
				}
			}
			slices.Sort(ratios) // the median ignores hot pixels
			near(t, fmt.Sprintf("light at (%d, %d)", x, y), ratios[len(ratios)/2], 1, 0.01)
		}
	}
}

// plane reads a plane of a cube of 16-bit unsigned integers behind one header block.
func plane(t *testing.T, name string, k, side int) []float64 {
	b, err := os.ReadFile(name)
	if err != nil || len(b) < 2880+2*(k+1)*side*side {
		t.Fatalf("%s: %d bytes, %v", name, len(b), err)
	}
	b = b[2880+2*k*side*side:]
	v := make([]float64, side*side)
	for i := range v {
		v[i] = float64(int16(binary.BigEndian.Uint16(b[2*i:]))) + 32768
	}
	return v
}

func bound(t testing.TB, e Experiment, c Cloud) Errors {
	t.Helper()
	got, err := Bound(context.Background(), e, c)
	if err != nil {
		t.Fatal(err)
	}
	return got
}

func BenchmarkBound(b *testing.B) {
	for _, i := range []int{0, 7} {
		row := readTable(b, "evap_truth.csv")[i]
		e, c := evap(b, row)
		b.Run("shot"+row["shot"], func(b *testing.B) {
			for b.Loop() {
				bound(b, e, c)
			}
		})
	}
}
