package main

import (
	"bytes"
	"context"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/cmd/fallshadow/internal/simulate"
)

// camera simulates a night of a camera in the layout of one file a frame and calibrates
// it under the settings that edit makes of those it was drawn with.
func camera(t *testing.T, gain, read float64, shots int, edit ...string) (string, error) {
	t.Helper()
	scenario, lab, err := simulate.Preset("fringed")
	if err != nil {
		t.Fatal(err)
	}
	text := strings.NewReplacer("electrons_per_count = 1.0", fmt.Sprintf("electrons_per_count = %g", gain),
		"read_noise_electrons = 6.0", fmt.Sprintf("read_noise_electrons = %g", read),
		"planes = ", "layout = \"files\"\nsuffixes = [\"_a\", \"_l\", \"_d\"]\nplanes = ").Replace(string(lab))
	n, err := simulate.New(scenario.WithShots(shots), []byte(text), "test")
	if err != nil {
		t.Fatal(err)
	}
	dir := filepath.Join(t.TempDir(), "night")
	if err := n.Write(context.Background(), dir, 2, nil); err != nil {
		t.Fatal(err)
	}
	file := filepath.Join(t.TempDir(), "lab.toml")
	if err := os.WriteFile(file, []byte(strings.NewReplacer(edit...).Replace(text)), 0o644); err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	err = (&calibrateCameraCmd{Night: dir, Settings: file}).Run(context.Background(), terminal{out: &out, err: &bytes.Buffer{}})
	return out.String(), err
}

// TestCalibrateCamera finds the cameras that nights were drawn with, moving fringes and
// unsteady power included, whatever the settings say: gain within two percent, read noise
// within ten. What it prints can be pasted. Rounding to counts is noise too, 1/12 of a
// squared count.
func TestCalibrateCamera(t *testing.T) {
	for _, c := range []struct{ gain, read float64 }{{1, 6}, {0.4, 2.5}, {2.2, 12}} {
		out, err := camera(t, c.gain, c.read, 10, fmt.Sprintf("electrons_per_count = %g", c.gain), "electrons_per_count = 7",
			fmt.Sprintf("read_noise_electrons = %g", c.read), "")
		if err != nil {
			t.Fatal(err)
		}
		t.Log("\n" + out)
		s, err := settings.Parse([]byte(out+rest), "pasted")
		if err != nil {
			t.Fatal(err)
		}
		read := math.Hypot(c.read, c.gain/math.Sqrt(12))
		if g := s.Camera.ElectronsPerCount.Value; !(math.Abs(g/c.gain-1) <= 0.02) {
			t.Errorf("gain %g, want %g within 2 %%", g, c.gain)
		}
		if r := s.Camera.ReadNoise.Value; !(math.Abs(r/read-1) <= 0.1) {
			t.Errorf("read noise %g, want %g within 10 %%", r, read)
		}
		for _, want := range []string{"over 9 pairs", "electrons a count, the settings say 7\n", "electrons rms\n"} {
			if !strings.Contains(out, want) {
				t.Errorf("no %q in\n%s", want, out)
			}
		}
	}
}

// rest completes settings of which only the camera was pasted.
const rest = `pixel_um = 6.45
magnification = 2.0
[atom]
species = "87Rb"
[trap]
axis1_hz = 20.0
axis2_hz = 120.0
sight_hz = 120.0
[flight]
fixed_ms = 20.0
`

// TestCalibrateCameraFromDarkFiles lends the night's darks, of one for each shot or fewer, to
// shots without their own.
func TestCalibrateCameraFromDarkFiles(t *testing.T) {
	planes := func(darks string) []string {
		return []string{`planes = ["atoms", "light", "dark"]`, "planes = [\"atoms\", \"light\"]\ndark_files = [\"" + darks + "\"]", `"_l", "_d"]`, `"_l"]`}
	}
	out, err := camera(t, 1, 6, 6, planes("*_000[1234]_d.fits")...)
	if err == nil || !strings.Contains(err.Error(), "needs two shots") {
		t.Errorf("no dark file is found: %v\n%s", err, out)
	}
	for _, darks := range []string{"*_d.fits", "*_000?_d.fits"} {
		out, err = camera(t, 1, 6, 12, planes(darks)...)
		if err != nil || !strings.Contains(out, "over 11 pairs") {
			t.Errorf("%s: %v\n%s", darks, err, out)
		}
	}
}

func TestCalibrateCameraRefuses(t *testing.T) {
	if _, err := camera(t, 1, 6, 1); err == nil || !strings.Contains(err.Error(), "needs two shots") {
		t.Errorf("one shot: %v", err)
	}
	_, err := camera(t, 1, 6, 2, `["atoms", "light", "dark"]`, `["atoms", "light", "dark", "dark_of_light"]`, `"_d"]`, `"_d", "_e"]`)
	if err == nil || !strings.Contains(err.Error(), "2 of 2 shots could not be read, such as ") {
		t.Errorf("another layout: %v", err)
	}
	if _, err := camera(t, 1, 6, 2, `"_a"`, `"_b"`, `"_l"`, `"_m"`, `"_d"`, `"_e"`); err == nil || !strings.Contains(err.Error(), "no shots in ") {
		t.Errorf("other names: %v", err)
	}
}

func TestDecimal(t *testing.T) {
	for _, c := range []struct {
		x, step float64
		want    string
	}{{0.99768, 0.00024, "0.9977"}, {6.0061, 0.0016, "6.006"}, {12, 3, "12.0"}, {1, 0, "1.0"}, {0.25, 0.1, "0.2"}} {
		if got := decimal(c.x, c.step); got != c.want {
			t.Errorf("%g to %g: %s, want %s", c.x, c.step, got, c.want)
		}
	}
}
