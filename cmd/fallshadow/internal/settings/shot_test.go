package settings

import (
	"context"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"fallshadow/imageio"
)

func TestFlight(t *testing.T) {
	from := func(lines string) string { return strings.Replace(base, "from = \"TOF\"\n", lines, 1) }
	for _, c := range []struct {
		flight, tof string
		want        float64
		problem     string
	}{
		{"from = 'TOF'\n", "15", 0.015, ""},
		{"from = 'TOF'\n", "1.5D1", 0.015, ""}, // the exponent of FITS
		{"from = 'tof'\n", "15.5", 0.0155, ""},
		{"from = 'TOF'\nunit = 'us'\n", "15000", 0.015, ""},
		{"from = 'TOF'\nunit = 's'\n", "0.015", 0.015, ""},
		{"from = 'TOF'\nzero_ms = 0.25\n", "15", 0.01525, ""},
		{"fixed_ms = 12.0\nzero_ms = -0.5\n", "15", 0.0115, ""},
		{"from = 'TOF'\n", "0", 0, ""},
		{"from = 'TOF'\nzero_ms = -1.0\n", "0.5", 0, "gives -0.5 ms with zero_ms added"},
		{"from = 'TOF'\nunit = 's'\n", "15", 0, "gives 15000 ms"},
		{"from = 'TOF'\n", "15 ms", 0, "not a number"},
		{"from = 'TOF'\n", "NaN", 0, "expected 0 to 10 s"},
		{"from = 'DELAY'\n", "15", 0, "no DELAY"},
	} {
		got, err := parse(t, from(c.flight)).Flight(imageio.Metadata{"TOF": c.tof})
		if c.problem == "" && err == nil {
			near(t, c.flight+c.tof, got, c.want, 1e-12)
		} else if err == nil || c.problem == "" || !strings.Contains(err.Error(), c.problem) {
			t.Errorf("%s%s: got %g, %v", c.flight, c.tof, got, err)
		}
	}
}

func TestScan(t *testing.T) {
	s := parse(t, base+"[shots]\nscan = ['EVAP', 'B', 'op']\n")
	got := s.Scan(imageio.Metadata{"EVAP": "812.5", "OP": "late"})
	want := []Scanned{{"EVAP", "812.5"}, {"B", ""}, {"op", "late"}}
	if !slices.Equal(got, want) {
		t.Errorf("got %v, want %v", got, want)
	}
}

// TestLayoutsAreTaken lets imageio find the shots of a folder by each kind of layout.
func TestLayoutsAreTaken(t *testing.T) {
	for _, c := range []struct {
		shots        string
		files, names []string
		darks        int
	}{
		{"", []string{"a1.fits", "a2.fits"}, []string{"a1", "a2"}, 0},
		{"layout = 'files'\nsuffixes = ['_a', '_l', '_d']\n", []string{"x_a.fits", "x_l.fits", "x_d.fits"}, []string{"x"}, 0},
		{"layout = 'files'\nsuffixes = [' atoms', ' light', ' dark']\n", []string{"run 1 ä atoms.fits", "run 1 ä light.fits", "run 1 ä dark.fits"}, []string{"run 1 ä"}, 0},
		{"layout = 'files'\nplanes = ['atoms', 'light']\nsuffixes = ['atoms/', 'light/']\ndark_files = ['dark/*.fits', 'd?.fits']\n",
			[]string{"atoms/1.fits", "light/1.fits", "dark/7.fits", "d1.fits"}, []string{"1"}, 2},
		{"layout = 'extensions'\nsuffixes = ['A', 'L', 'D']\n", []string{"1.fits"}, []string{"1"}, 0},
		{"planes = ['atoms', 'light', 'dark', 'dark_of_light', 'unused']\npattern = '^run(?P<run>\\d+)'\n", []string{"run7.fits"}, []string{"run7"}, 0},
		{"layout = 'density'\ndensity_unit = 'log_ratio'\n", []string{"1.fits"}, []string{"1"}, 0},
	} {
		dir := t.TempDir()
		for _, f := range c.files {
			full := filepath.Join(dir, filepath.FromSlash(f))
			if err := os.MkdirAll(filepath.Dir(full), 0o755); err != nil {
				t.Fatal(err)
			}
			if err := os.WriteFile(full, []byte("SIMPLE"), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		night, err := imageio.Scan(context.Background(), dir, parse(t, base+"[shots]\n"+c.shots).Layout())
		if err != nil {
			t.Errorf("%s: %v", c.shots, err)
			continue
		}
		var names []string
		for _, shot := range night.Shots {
			names = append(names, shot.Name)
			if shot.Problem != nil {
				t.Errorf("%s: %v", c.shots, shot.Problem)
			}
		}
		if !slices.Equal(names, c.names) || len(night.Darks) != c.darks || len(night.Strays) != 0 {
			t.Errorf("%s: shots %v, darks %v, strays %v", c.shots, names, night.Darks, night.Strays)
		}
	}
}

func TestCameraAndOptions(t *testing.T) {
	s := parse(t, evap+"[region]\nx = 10\ny = 20\nwidth = 100\nheight = 50\n[fit]\nrebin = 2\nthermal = 'gauss'\ntie = 'free'\nangle = 'free'\ncondensate_chi2 = 25.0\n")
	s.Camera.BadPixels = [][2]int{{1, 2}}
	c := s.LightCamera()
	if c.Region.Min.X != 10 || c.Region.Min.Y != 20 || c.Region.Dx() != 100 || c.Region.Dy() != 50 || c.Bin != 2 || c.ElectronsPerCount != 1.5 || len(c.BadPixels) != 1 {
		t.Errorf("camera %+v", c)
	}
	if !parse(t, evap).LightCamera().Region.Empty() {
		t.Error("a region where none is given")
	}
	o := s.Options()
	if !o.Gaussian || !o.Free || !o.FreeAngle || o.CondensateChi2 != 25 {
		t.Errorf("options %+v", o)
	}
	if o := parse(t, evap).Options(); o.Gaussian || o.Free || o.FreeAngle || o.CondensateChi2 != 0 {
		t.Errorf("default options %+v", o)
	}
}

func TestBadPixelsAreSortedOnce(t *testing.T) {
	s := parse(t, with(t, "camera.bad_pixels", "[[5, 1], [3, 9], [2, 1], [5, 1]]"))
	if want := [][2]int{{2, 1}, {5, 1}, {3, 9}}; !slices.Equal(s.Camera.BadPixels, want) {
		t.Errorf("got %v", s.Camera.BadPixels)
	}
}

func TestFindAndLoad(t *testing.T) {
	dir := t.TempDir()
	if _, err := Find(dir); err == nil || !strings.Contains(err.Error(), "fallshadow init --write") {
		t.Errorf("no settings: %v", err)
	}
	spaced := filepath.Join(dir, "30 Nov")
	if _, err := Find(spaced); err == nil || !strings.Contains(err.Error(), `--write "`+filepath.Join(spaced, FileName)+"\"`") {
		t.Errorf("a command that a shell takes apart: %v", err)
	}
	path := filepath.Join(dir, FileName)
	if err := os.WriteFile(path, Template(), 0o644); err != nil {
		t.Fatal(err)
	}
	got, err := Find(dir)
	if err != nil || got != path {
		t.Fatalf("found %q, %v", got, err)
	}
	if s, err := Load(path); err != nil || s.Digest() != parse(t, string(Template())).Digest() {
		t.Errorf("load: %v", err)
	}
	if _, err := Load(filepath.Join(dir, "none.toml")); err == nil || !strings.Contains(err.Error(), "none.toml") {
		t.Errorf("no file: %v", err)
	}
	folder := t.TempDir()
	if err := os.Mkdir(filepath.Join(folder, FileName), 0o755); err != nil {
		t.Fatal(err)
	}
	if _, err := Find(folder); err == nil {
		t.Error("a folder was taken for settings")
	}
}
