package simulate

import (
	"bytes"
	"strings"
	"testing"
)

func TestScenarioRefusesNonsense(t *testing.T) {
	s, lab, err := Preset("demo")
	if err != nil {
		t.Fatal(err)
	}
	s.Damage = Damage{absent: {9}}
	text, err := s.TOML()
	if err != nil {
		t.Fatal(err)
	}
	cases := []struct{ old, new, want string }{
		{"shots = 9", "shots = 0", "shots is 0"},
		{"shots = 9", "shots = 9\nshot = 3", "shot"},
		{"shots = 9", "shots = 'nine'", "shots"},
		{"name = 'ramp'", "name = '../x'", "name"},
		{"law = 'ideal'", "law = 'real'", "gas.law"},
		{"T_nK = [0.0, 0.0]", "T_nK = [90.0, 80.0]", "one of path.t_reduced and path.T_nK"},
		{"\nelectrons = 0.0", "\nelectrons = 500.0", "one of probe.intensity_isat and probe.electrons"},
		{"atoms = [160000.0, 60000.0]", "atoms = [0.0, 60000.0]", "path.atoms"},
		{"atoms_jitter = 0.04", "atoms_jitter = nan", "path.atoms_jitter"},
		{"period_px = [9.0, 40.0]", "period_px = [40.0, 9.0]", "fringes.period_px"},
		{"[damage]", "[damage]\nlost = [1]", "damage.lost is unknown"},
		{"[damage]", "[damage]\nzero = [10]", "shot 10 of 9"},
		{"[damage]", "[damage]\nzero = [2]\nempty = [2]", "shot 2 twice"},
	}
	for _, c := range cases {
		changed := bytes.Replace(text, []byte(c.old), []byte(c.new), 1)
		if bytes.Equal(changed, text) {
			t.Errorf("nothing to change: %q", c.old)
		}
		if _, err := Parse(changed, "x.toml"); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: want an error about %q, got %v", c.new, c.want, err)
		}
	}
	if back, err := Parse(text, "x.toml"); err != nil || back.Name != s.Name {
		t.Errorf("the scenario does not read back: %v", err)
	}
	for _, c := range []struct{ old, new, want string }{
		{`layout = "cube"`, `layout = "extensions"`, "not written by simulate"},
		{`planes = ["atoms", "light", "dark"]`, `planes = ["atoms", "light"]`, "dark"},
		{"[shots]", "[shots]\nside_table = \"log.csv\"", "no side table"},
		{"[shots]", "[shots]\npattern = 'tof(\\d+)'", "does not match ramp_0001.fits"},
		{`"FLIGHT"`, `"flight (ms)"`, "1 to 8 letters"},
		{`"RAMPEND"`, `"evaporation"`, "1 to 8 letters"},
		{`"dark"]`, `"dark", "unused"]`, "unused"},
		{"counts_per_isat", "#", "intensity_isat needs"},
		{"electrons_per_count", "#", "electrons_per_count"},
	} {
		changed := bytes.Replace(lab, []byte(c.old), []byte(c.new), 1)
		if _, err := New(s, changed, "lab.toml"); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: want an error about %q, got %v", c.new, c.want, err)
		}
	}
	if _, _, err := Preset("nothing"); err == nil || !strings.Contains(err.Error(), "demo") {
		t.Errorf("an unknown preset: %v", err)
	}
}

// TestNamesInLowerCase: what the settings call by other letters than a header may hold is
// found there.
func TestNamesInLowerCase(t *testing.T) {
	s, lab, err := Preset("demo")
	if err != nil {
		t.Fatal(err)
	}
	lab = bytes.Replace(lab, []byte(`"FLIGHT"`), []byte(`"tof"`), 1)
	lab = bytes.Replace(lab, []byte(`"RAMPEND"`), []byte(`"evap_MHz"`), 1)
	lab = bytes.Replace(lab, []byte("[shots]"), []byte("[shots]\npattern = '^ramp_(?P<nr>\\d+)'"), 1)
	n, err := New(s.WithShots(1), lab, "lab.toml")
	if err != nil {
		t.Fatal(err)
	}
	file := write(t, n, 1)["ramp_0001.fits"]
	for _, want := range []string{"TOF     =                 16.0 /", "EVAP_MHZ=                310.0 /"} {
		if !bytes.Contains(file, []byte(want)) {
			t.Errorf("no %q in the header: %.1000s", want, file)
		}
	}
}

func TestLayoutOfFiles(t *testing.T) {
	s, lab, err := Preset("demo")
	if err != nil {
		t.Fatal(err)
	}
	lab = bytes.Replace(lab, []byte(`layout = "cube"`), []byte("layout = \"files\"\nsuffixes = [\"_atoms\", \"_light\", \"dark/\", \"_dark2\"]"), 1)
	lab = bytes.Replace(lab, []byte(`"dark"]`), []byte(`"dark", "dark_of_light"]`), 1)
	s.Damage = Damage{missingFrame: {2}}
	n, err := New(s.WithShots(2), lab, "lab.toml")
	if err != nil {
		t.Fatal(err)
	}
	files := write(t, n, 1)
	for _, name := range []string{"ramp_0001_atoms.fits", "ramp_0001_light.fits", "dark/ramp_0001.fits", "ramp_0001_dark2.fits", "ramp_0002_light.fits"} {
		if len(files[name]) == 0 {
			t.Errorf("%s is missing", name)
		}
	}
	if _, there := files["ramp_0002_dark2.fits"]; there {
		t.Error("the missing frame is there")
	}
	if bytes.Equal(files["dark/ramp_0001.fits"], files["ramp_0001_dark2.fits"]) {
		t.Error("two darks are one exposure")
	}
}
