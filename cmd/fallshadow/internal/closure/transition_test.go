package closure

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/cmd/fallshadow/internal/simulate"
	"fallshadow/fit"
)

// at returns a change of a scenario to one number of atoms and a range of T/Tc⁰.
func at(atoms, from, to float64) func(*simulate.Scenario) {
	return func(s *simulate.Scenario) {
		s.Path.Atoms, s.Path.TReduced = [2]float64{atoms, atoms}, [2]float64{from, to}
	}
}

// sized returns a mistake of one part in ten, up or down.
func sized(q func(*settings.Settings) *settings.Quantity, by float64) func(*settings.Settings) {
	return func(s *settings.Settings) { q(s).Value *= by }
}

func alphaOf(s *settings.Settings) *settings.Quantity      { return &s.Probe.Alpha }
func resolutionOf(s *settings.Settings) *settings.Quantity { return &s.Camera.ResolutionUm }
func perIsatOf(s *settings.Settings) *settings.Quantity    { return &s.Probe.CountsPerIsat }

// condensed says whether a fit reports a condensate.
func condensed(s *shot) bool {
	return s.fit.Model == fit.ModelBimodal || s.fit.Model == fit.ModelCondensate
}

// TestClosureAtTc: at the transition, where a thermal cloud is as peaked as it can be, next to
// no shot is given a condensate, whatever is wrong with light and settings.
func TestClosureAtTc(t *testing.T) {
	n, every := form(t)
	full := every == 1
	if full {
		n *= 5
	} else {
		n = 16
	}
	atTc := at(110000, 1, 1)
	fringes := func(s *simulate.Scenario) {
		atTc(s)
		fringed, _, err := simulate.Preset("fringed")
		if err != nil {
			t.Fatal(err)
		}
		s.Fringes = fringed.Fringes
	}
	var table []string
	for _, c := range []struct {
		name     string
		draw     func(*simulate.Scenario)
		mistakes []func(*settings.Settings) // the shots are shared out among them
	}{
		{"settings right", atTc, []func(*settings.Settings){nil}},
		{"fringes", fringes, []func(*settings.Settings){nil}},
		{"alpha off by a tenth", atTc, []func(*settings.Settings){sized(alphaOf, 1.1), sized(alphaOf, 0.9)}},
		{"blur off by a tenth", atTc, []func(*settings.Settings){sized(resolutionOf, 1.1), sized(resolutionOf, 0.9)}},
		{"counts per Isat off by a tenth", atTc, []func(*settings.Settings){sized(perIsatOf, 1.1), sized(perIsatOf, 0.9)}},
	} {
		if !full && c.mistakes[0] != nil {
			continue // so few shots cannot tell
		}
		found, failed := 0, 0
		for _, mistake := range c.mistakes {
			for _, s := range (simulated{preset: "threshold", name: c.name, shots: n / len(c.mistakes), draw: c.draw, mistake: mistake, plain: true}).run(t) {
				if condensed(&s) {
					found++
				}
				if s.failure != nil {
					failed++
				}
			}
		}
		table = append(table, fmt.Sprintf("%-32s %d of %d, %d without a fit", c.name, found, n, failed))
		if found > int(0.003*float64(n)) || failed > 0 {
			t.Errorf("%s: condensates in %d of %d shots at Tc, want at most 3 in 1000; %d without a fit", c.name, found, n, failed)
		}
	}
	t.Logf("condensates reported at T/Tc0 = 1\n%s", strings.Join(table, "\n"))
}

// TestClosureDetection: a condensate of 5 % of the atoms in a cloud of peak σ0 n = 0.6, which
// α = 2 makes an optical density of 0.3, is found; the fraction is told at which half are.
func TestClosureDetection(t *testing.T) {
	n, every := form(t)
	if every > 1 {
		n = 16 // the short form
	}
	const atoms = 9800
	reduced := math.Cbrt(1 - 0.05)
	shots := simulated{preset: "threshold", shots: n, draw: at(atoms, reduced, reduced), plain: true}.run(t)
	found, peak := 0, 0.0
	for _, s := range shots {
		if condensed(&s) {
			found++
		}
		peak += s.truth.PeakOD / float64(n)
	}
	if !(math.Abs(peak-0.6) < 0.02) {
		t.Errorf("the mean peak is %.3f, not the 0.6 that is meant", peak)
	}
	t.Logf("fraction 0.05, peak σ0 n %.2f: found in %d of %d", peak, found, n)
	if !(float64(found) > 0.95*float64(n)) {
		t.Errorf("found in %d of %d shots, want more than 95 %%", found, n)
	}
	for _, c := range []struct{ atoms, to float64 }{{atoms, 0.99}, {110000, 0.998}} {
		if every > 1 {
			continue // so few shots cannot tell
		}
		shots := simulated{preset: "threshold", shots: n, draw: at(c.atoms, 1, c.to), plain: true}.run(t)
		half, last := halfFound(shots), shots[n-1].truth
		t.Logf("%.0f atoms: half of the condensates are found at a fraction of %.4f", c.atoms, half)
		if top := last.N0 / last.N; !(half > 0 && half < 0.5*top) {
			t.Errorf("%.0f atoms: half of the condensates are found at a fraction of %.4f, want below %.4f", c.atoms, half, 0.5*top)
		}
	}
}

// halfFound is the fraction at which half of the condensates are found, from shots whose
// fraction rises steadily from 0 to where all are found: the area above the curve of the
// part found, ∫(1 − p) df.
func halfFound(shots []shot) float64 {
	area, last := 0.0, 0.0
	for i := range shots {
		f := shots[i].truth.N0 / shots[i].truth.N
		if !condensed(&shots[i]) {
			area += f - last
		}
		last = f
	}
	return area
}
