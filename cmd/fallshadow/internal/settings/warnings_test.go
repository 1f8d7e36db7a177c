package settings

import (
	"strings"
	"testing"

	"fallshadow/imageio/light"
)

func TestWarnings(t *testing.T) {
	const axis1, axis2, sight = "\naxis1_hz = { value = 20.0, err = 0.1 }", "\naxis2_hz = { value = 120.0, err = 0.5 }", "\nsight_hz = { value = 120.0, err = 0.5 }"
	const resolution, isat = "\nresolution_um = { value = 3.0, err = 0.5 }", "\ncounts_per_isat = { value = 9000.0, err = 300.0 }"
	for _, c := range []struct {
		edits []string // of the template, old and new by turns
		want  string
	}{
		{[]string{axis1, "\naxis1_hz = 125.664", axis2, "\naxis2_hz = 753.98", sight, "\nsight_hz = 753.98"}, "divided by 2 pi they are 20, 120, 120"},
		{[]string{"magnification = { value = 2.0, err = 0.02 }", "magnification = 0.04"}, "was its inverse 25 meant?"},
		{[]string{"magnification = { value = 2.0, err = 0.02 }", "magnification = 100"}, "a pixel covers 0.0645 um"},
		{[]string{"electrons_per_count = 1.0", "electrons_per_count = 0.01"}, "was its inverse"},
		{[]string{resolution, ""}, "resolution_um is not given"},
		{[]string{resolution, "\nresolution_um = 3e-6"}, "it is in um"},
		{[]string{resolution, "\nresolution_um = 60"}, "not on the sensor"},
		{[]string{"alpha = { value = 2.0, err = 0.1 }", "alpha = 0.5"}, "was its inverse 2 meant?"},
		{[]string{"#detuning_gamma = 0.0", "detuning_gamma = 6.0"}, "not in MHz"},
		{[]string{isat, ""}, "taken as weak"},
		{[]string{isat, "\ncounts_per_isat = 90000"}, "3.3 electrons for a photon"},
		{[]string{isat, "\ncounts_per_isat = 900"}, "0.033 electrons for a photon that passes the atoms, where 0.05 to 0.95 is plausible"},
		{[]string{"from = \"TOF\"", "fixed_ms = 0.015"}, "it is in ms, not in s"},
		{[]string{"#scattering_length_a0 = { value = 100.4, err = 0.1 }", "scattering_length_a0 = 5.3e-9"}, "not in m"},
	} {
		text := string(Template())
		for i := 0; i < len(c.edits); i += 2 {
			if !strings.Contains(text, c.edits[i]) {
				t.Fatalf("%q is not in the template", c.edits[i])
			}
			text = strings.Replace(text, c.edits[i], c.edits[i+1], 1)
		}
		if got := parse(t, text).Warnings(); !strings.Contains(strings.Join(got, "\n"), c.want) {
			t.Errorf("%q: warned %q, want %q", c.edits[1], got, c.want)
		}
	}
}

// TestLogRatio: at a tenth of Isat and alpha = 2 a thin cloud loses 0.1/2.1 of its atoms.
func TestLogRatio(t *testing.T) {
	warned := func(unit string) string {
		text := strings.Replace(evap, "[shots]", "", 1) + "\n[shots]\nlayout = \"density\"\ndensity_unit = \"" + unit + "\"\n"
		return strings.Join(parse(t, text).Warnings(), "\n")
	}
	if got := warned("log_ratio"); !strings.Contains(got, "such as 4.8 % at s = 0.1") {
		t.Errorf("warned %q", got)
	}
	if got := warned("sigma0_n"); strings.Contains(got, "saturation out") {
		t.Errorf("warned %q", got)
	}
}

// TestNoGain: a gain that nobody entered is nobody's slip, whatever was measured in its place;
// nor is one of the frames that density images do not have.
func TestNoGain(t *testing.T) {
	without := strings.Replace(evap, "electrons_per_count = 1.5\n", "", 1)
	density := evap + "\n[shots]\nlayout = \"density\"\ndensity_unit = \"sigma0_n\"\n"
	small := strings.Replace(evap, "electrons_per_count = 1.5", "electrons_per_count = 0.01", 1)
	for _, c := range []struct {
		text string
		gain float64
		want bool
	}{
		{without, 0, false}, {without, 0.01, false}, {small, 0.01, true},
		{strings.Replace(density, "electrons_per_count = 1.5\n", "", 1), 0, false},
		{strings.Replace(density, "electrons_per_count = 1.5", "electrons_per_count = 0.01", 1), 0.01, false},
	} {
		s := parse(t, c.text)
		once := s.WithCamera(light.Camera{ElectronsPerCount: c.gain})
		for _, s := range []*Settings{s, once, once.WithCamera(light.Camera{ElectronsPerCount: c.gain})} {
			if got := strings.Contains(strings.Join(s.Warnings(), "\n"), "was its inverse"); got != c.want {
				t.Errorf("gain %g, warned: %v, in\n%s", c.gain, got, c.text)
			}
		}
	}
}

func TestMisplaced(t *testing.T) {
	var s Settings
	s.Camera.BadPixels = [][2]int{{3, 4}, {10, 4}, {3, 8}}
	for _, c := range []struct {
		width, height int
		want          string
	}{{11, 9, ""}, {10, 9, "lists 1 outside of the frames of 10 x 9 pixels, such as [10, 4]"}, {10, 8, "lists 2 "}} {
		if got := s.Misplaced(c.width, c.height); (got == "") != (c.want == "") || !strings.Contains(got, c.want) {
			t.Errorf("%d x %d: %q, want %q", c.width, c.height, got, c.want)
		}
	}
}

// TestAngular: frequencies in Hz as they come from a spectrum analyser are not suspected.
func TestAngular(t *testing.T) {
	for _, c := range []struct {
		hz   [3]float64
		want bool
	}{
		{[3]float64{125.66, 753.98, 753.98}, true},
		{[3]float64{125.7, 754.0, 754.0}, true},
		{[3]float64{20, 120, 120}, false},
		{[3]float64{18.37, 117.2, 119.9}, false},
		{[3]float64{6.8, 17.35, 17.35}, false},
		{[3]float64{125.66, 117.2, 119.9}, false},
	} {
		var s Settings
		s.Trap.Axis1Hz.Value, s.Trap.Axis2Hz.Value, s.Trap.SightHz.Value = c.hz[0], c.hz[1], c.hz[2]
		if s.angular() != c.want {
			t.Errorf("%v: angular is %v", c.hz, s.angular())
		}
	}
}
