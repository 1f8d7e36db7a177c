package night

import (
	"context"
	"math"
	"path/filepath"
	"testing"

	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/cmd/fallshadow/internal/simulate"
)

// The condensation of 87Rb as J. R. Ensher, D. S. Jin, M. R. Matthews, C. E. Wieman, E. A.
// Cornell, Phys. Rev. Lett. 77, 4984 (1996) measured it: 40,000 atoms in a trap with f_z =
// 373 Hz and f_z/√8 across (from memory) condense at 280 nK (from memory), which is 0.94(5)
// of Tc⁰ (abstract).
const (
	publishedAtoms    = 40000
	publishedT        = 280.0 // nK
	publishedRatio    = 0.94
	publishedRatioErr = 0.05
	publishedMachine  = `
[atom]
species = "87Rb"
[trap]
axis1_hz = { value = 131.87, err = 0.5 }
axis2_hz = { value = 373.0, err = 1.0 }
sight_hz = { value = 131.87, err = 0.5 }
[camera]
pixel_um = 6.0
magnification = { value = 1.5, err = 0.01 }
electrons_per_count = 1.0
read_noise_electrons = 6.0
resolution_um = { value = 4.0, err = 0.2 }
[probe]
alpha = { value = 1.0, err = 0.02 }
counts_per_isat = { value = 20000.0, err = 500.0 }
[flight]
from = "FLIGHT"
zero_ms = { value = 0.0, err = 0.02 }
[shots]
planes = ["atoms", "light", "dark"]
`
	publishedNight = `
name = "published"
about = "a published condensation, drawn at its transition"
seed = 7
shots = 6
[gas]
law = "ideal"
[path]
atoms = [40000, 40000]
T_nK = [280, 280]
[flight]
ms = [18]
[picture]
width_px = 192
height_px = 176
x_px = 95
y_px = 88
jitter_px = 1
[camera]
offset_counts = 100
[probe]
intensity_isat = 0.1
x_px = 96
y_px = 88
waist_px = 400
power_noise = 0.01
`
)

// TestPublishedCase draws the frames of the published cloud, runs the night and holds the table
// against the published numbers: N and T come back, and with them Tc⁰ = 280 nK/0.94(5) and the
// ratio of the transition to it.
func TestPublishedCase(t *testing.T) {
	scenario, err := simulate.Parse([]byte(publishedNight), "published")
	if err != nil {
		t.Fatal(err)
	}
	drawn, err := simulate.New(scenario, []byte(publishedMachine), "published")
	if err != nil {
		t.Fatal(err)
	}
	dir := filepath.Join(t.TempDir(), "published")
	if err := drawn.Write(context.Background(), dir, 2, nil); err != nil {
		t.Fatal(err)
	}
	s, err := settings.Parse([]byte(publishedMachine), "published")
	if err != nil {
		t.Fatal(err)
	}
	out := t.TempDir()
	if _, err := Batch(context.Background(), Options{Dir: dir, Out: out, Settings: s}, quietProgress{}); err != nil {
		t.Fatal(err)
	}
	table := readTable(t, filepath.Join(out, "results.csv"))
	var atoms, temperature, tc, ratio float64
	for _, r := range table {
		n := float64(len(table))
		atoms += r.number("atoms") / n
		temperature += r.number("T_nK") / n
		tc += r.number("Tc0_nK") / n
		ratio += r.number("t_reduced") / n
	}
	t.Logf("N %.0f, T %.1f nK, Tc0 %.1f nK, T/Tc0 %.3f", atoms, temperature, tc, ratio)
	near := func(what string, got, want, tol float64) {
		if !(math.Abs(got-want) <= tol) {
			t.Errorf("%s is %g, published %g within %g", what, got, want, tol)
		}
	}
	near("N", atoms, publishedAtoms, 0.01*publishedAtoms)
	near("T", temperature, publishedT, 0.015*publishedT)
	near("Tc0", tc, publishedT/publishedRatio, publishedT/publishedRatio*publishedRatioErr/publishedRatio)
	near("T/Tc0 of the transition", ratio, publishedRatio, publishedRatioErr)
}
