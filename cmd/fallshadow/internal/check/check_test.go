package check

import (
	"bytes"
	"context"
	"fmt"
	"io/fs"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/cmd/fallshadow/internal/simulate"
	"fallshadow/imageio/fits"
)

type silent struct{}

func (silent) Begin(string, int) {}
func (silent) Step(string, bool) {}
func (silent) End()              {}

// simulated writes a night of a preset, the settings changed by edits (old, new).
func simulated(t *testing.T, preset string, shots int, edits ...string) string {
	t.Helper()
	scenario, lab, err := simulate.Preset(preset)
	if err != nil {
		t.Fatal(err)
	}
	n, err := simulate.New(scenario.WithShots(shots), []byte(edited(t, string(lab), edits)), "test")
	if err != nil {
		t.Fatal(err)
	}
	dir := filepath.Join(t.TempDir(), "night")
	if err := n.Write(context.Background(), dir, 2, nil); err != nil {
		t.Fatal(err)
	}
	return dir
}

func edited(t *testing.T, text string, edits []string) string {
	t.Helper()
	for i := 0; i < len(edits); i += 2 {
		if !strings.Contains(text, edits[i]) {
			t.Fatalf("the settings hold no %q", edits[i])
		}
		text = strings.Replace(text, edits[i], edits[i+1], 1)
	}
	return text
}

// look checks a night under its own settings, changed by edits, and returns the text.
func look(t *testing.T, dir string, fits int, edits ...string) (*Outcome, string) {
	t.Helper()
	file := filepath.Join(dir, settings.FileName)
	data, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	return lookAs(t, dir, fits, edited(t, string(data), edits))
}

// lookAs checks a night under any settings.
func lookAs(t *testing.T, dir string, fits int, text string) (*Outcome, string) {
	t.Helper()
	file := filepath.Join(dir, settings.FileName)
	lab, err := settings.Parse([]byte(text), file)
	if err != nil {
		t.Fatal(err)
	}
	out, err := Night(context.Background(), Options{Dir: dir, File: file, Settings: lab, Fits: fits}, silent{})
	if err != nil {
		t.Fatal(err)
	}
	var said bytes.Buffer
	if _, err := out.WriteTo(&said); err != nil {
		t.Fatal(err)
	}
	for _, line := range strings.Split(said.String(), "\n") {
		if n := len([]rune(line)); n > 104 && !strings.Contains(line, dir) {
			t.Errorf("a line of %d characters: %s", n, line)
		}
	}
	return out, said.String()
}

// says looks for expressions in a text, blanks in them standing for any white space.
func says(t *testing.T, text string, wanted ...string) {
	t.Helper()
	for _, w := range wanted {
		if !regexp.MustCompile(`(?m)` + strings.ReplaceAll(w, " ", `\s+`)).MatchString(text) {
			t.Errorf("nothing like %q in\n%s", w, text)
		}
	}
}

// section returns a titled part of the text.
func section(text, title string) string {
	_, part, _ := strings.Cut(text, "\n"+title)
	part, _, _ = strings.Cut(part, "\n\n")
	return part
}

// TestSoundNight looks for every figure of a simulated night. Isat of 87Rb is
// 1.66933 mW/cm², its wavelength 780.241 nm, its linewidth 38.117e6/s, its shift 7.542 kHz
// a recoil (Steck, Rubidium 87 D line data): 40 us and 3.225 um a pixel are 27280 photons,
// and s = 0.35 at alpha = 2 scatters 114 of them, 0.86 MHz.
func TestSoundNight(t *testing.T) {
	dir := simulated(t, "rubidium", 9)
	before := listing(t, dir)
	out, text := look(t, dir, 3)
	if out.Usable != 9 || out.Unusable != 0 || out.Problems != 0 {
		t.Errorf("%d usable, %d unusable, %d problems", out.Usable, out.Unusable, out.Problems)
	}
	says(t, text, "night: 9 shots$", "^settings: .*fallshadow.toml$", "layout cube: atoms, light, dark", "shots 9 in 9 files\n",
		"27 of 256 x 256 pixels", "825.6 x 825.6 um in the plane of the atoms, 3.225 um a pixel", "flight 24 ms, from TOF in the header",
		"passed over truth.csv: no camera frames", "rubidium_0001 1 3 256x256 24 ", "SHOT 9 values, 1 to 9, from the header", "TOF = 24.0",
		`gain 1 electrons a count, from the settings; (1\.0|0\.99)\d*\(\d+\) measured from 8 pairs`, `the darks have [56]\.?9?`,
		"9 in the master dark", "full_scale_counts is not given", "Isat x exposure x pixel area is 27[23].0 photons",
		"efficiency 0.33 electrons a photon", `I/Isat 0\.3[45]\d* in the cloud`, `photons 11\d scattered`, "Doppler shift 0.14 of the linewidth",
		"no uncertainty atom.scattering_length_a0", "No problems found", `1\. an atom scatters 11\d photons`)
	if after := listing(t, dir); after != before {
		t.Errorf("the folder held\n%s\nand holds\n%s", before, after)
	}
}

// TestInteracting: a gas whose thermal atoms felt the condensate is told so when it is fitted
// as an ideal one, and only then.
func TestInteracting(t *testing.T) {
	dir := simulated(t, "mean-field", 9)
	const caution = "thermal atoms than an ideal gas holds"
	_, text := look(t, dir, 3)
	says(t, text, `Nth/Nsat is [12]\.\d\d in the median of 3 trial fits with a condensate, more `+caution, "No problems found")
	if strings.Contains(text, "suspect_thermal_form") {
		t.Errorf("said twice:\n%s", text)
	}
	file, err := os.ReadFile(filepath.Join(dir, "fallshadow.toml"))
	if err != nil {
		t.Fatal(err)
	}
	_, text = lookAs(t, dir, 3, string(file)+"\n[fit]\nthermal = \"semi-ideal\"\n")
	if strings.Contains(strings.Join(strings.Fields(text), " "), caution) {
		t.Errorf("a semi-ideal fit is told to be one:\n%s", text)
	}
}

// TestNumberOff: a cross-section too little off for the flags of a single shot is seen where
// all fits agree on it, and the right one is not.
func TestNumberOff(t *testing.T) {
	dir := simulated(t, "rubidium", 9)
	for alpha, cautions := range map[string]int{"1.7": 1, "2.0": 0, "2.35": 1} {
		_, text := look(t, dir, 3, "alpha = { value = 2.0,", "alpha = { value = "+alpha+",", "[shots]", "[fit]\nrebin = 2\n[shots]")
		text = strings.Join(strings.Fields(text), " ")
		if n := len(regexp.MustCompile(`mu\(R\)/mu\(N0\) is (1\.0[6-9]|0\.9[0-4])\d in the median of \d trial fits .*calibrate number`).FindAllString(text, -1)); n != cautions {
			t.Errorf("alpha %s: %d cautions, want %d, in\n%s", alpha, n, cautions, text)
		}
	}
}

// listing tells of the files below a folder, with size and time.
func listing(t *testing.T, dir string) string {
	t.Helper()
	var all strings.Builder
	err := filepath.WalkDir(dir, func(path string, d fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		info, err := d.Info()
		if err == nil {
			fmt.Fprintln(&all, path, info.Size(), info.ModTime(), info.Mode())
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return all.String()
}

// The wrong settings and the flags that must name them; that the ratios follow a pattern
// which names the setting is common practice.
var wrongSettings = []struct {
	name, flag string
	edits      func(flightErr string) []string
}{
	{"angular frequencies", "suspect_frequency_unit", func(string) []string {
		return []string{"axis1_hz = { value = 20.0", "axis1_hz = { value = 125.66", "axis2_hz = { value = 120.0", "axis2_hz = { value = 753.98", "sight_hz = { value = 120.0", "sight_hz = { value = 753.98"}
	}},
	{"axes exchanged", "suspect_axes", func(string) []string {
		return []string{"axis1_hz = { value = 20.0", "axis1_hz = { value = 120.0", "axis2_hz = { value = 120.0", "axis2_hz = { value = 20.0"}
	}},
	{"sight halved", "suspect_sight", func(string) []string { return []string{"sight_hz = { value = 120.0", "sight_hz = { value = 60.0"} }},
	{"flight long", "suspect_flight", func(tenth string) []string {
		return []string{"zero_ms = { value = 0.0", "zero_ms = { value = " + tenth}
	}},
	{"binning not told", "suspect_pixel", func(string) []string { return []string{"pixel_um = 6.45", "pixel_um = 3.225"} }},
	{"alpha 1 for 2", "suspect_cross_section", func(string) []string { return []string{"alpha = { value = 2.0", "alpha = { value = 1.0"} }},
}

func TestWrongSettings(t *testing.T) {
	_, lab, err := simulate.Preset("rubidium")
	if err != nil {
		t.Fatal(err)
	}
	checkWrong(t, simulated(t, "rubidium", 9), string(lab)+"\n[fit]\nrebin = 2\n", "2.4")
}

// TestWrongSettingsEvap does the same on the night of testdata/reference/evap_truth.csv,
// which other code drew with the same camera and trap as the preset.
func TestWrongSettingsEvap(t *testing.T) {
	dir := os.Getenv("FALLSHADOW_NIGHT_EVAP")
	if dir == "" {
		t.Skip("FALLSHADOW_NIGHT_EVAP is not set")
	}
	_, lab, err := simulate.Preset("rubidium")
	if err != nil {
		t.Fatal(err)
	}
	text := edited(t, string(lab), []string{"exposure_us = 40.0\n", ""}) // nobody told the exposure
	if _, said := lookAs(t, dir, 3, text); !strings.Contains(said, "No problems found") {
		t.Errorf("under the right settings:\n%s", said)
	}
	checkWrong(t, dir, text, "2.8")
}

func checkWrong(t *testing.T, dir, lab, tenth string) {
	t.Helper()
	for _, c := range wrongSettings {
		out, text := lookAs(t, dir, 3, edited(t, lab, c.edits(tenth)))
		named := regexp.MustCompile(`suspect_\w+:`).FindAllString(section(text, "Problems"), -1)
		if out.Problems == 0 || len(named) != 1 || named[0] != c.flag+":" {
			t.Errorf("%s: %q is named, want %s, in\n%s", c.name, named, c.flag, text)
		}
	}
}

// TestFoldersInDisorder mixes two layouts, files of other kinds and shots that are not
// whole, and reads the folder both ways.
func TestFoldersInDisorder(t *testing.T) {
	dir := simulated(t, "rubidium", 9)
	files := simulated(t, "rubidium", 3, `planes = `, "layout = \"files\"\nsuffixes = [\"_probe_atoms\", \"_probe_light\", \"_probe_dark\"]\nplanes = ")
	others, err := filepath.Glob(filepath.Join(files, "*.fits"))
	if err != nil || len(others) != 9 {
		t.Fatal(others, err)
	}
	for _, f := range others {
		copyFile(t, f, filepath.Join(dir, "b_"+filepath.Base(f)), 1<<30)
	}
	whole := filepath.Join(dir, "rubidium_0005.fits")
	copyFile(t, whole, filepath.Join(dir, "rubidium_0010.fits"), 200000)
	copyFile(t, whole, filepath.Join(dir, "rubidium_0011.fits"), 0)
	copyFile(t, whole, filepath.Join(dir, "rubidium_0012.fits.part"), 3000)
	if err := os.WriteFile(filepath.Join(dir, "notes.txt"), []byte("dear diary"), 0o644); err != nil {
		t.Fatal(err)
	}

	out, text := look(t, dir, 1)
	if out.Usable != 9 || out.Unusable != 11 || out.Problems != 3 {
		t.Errorf("%d usable, %d unusable, %d problems", out.Usable, out.Unusable, out.Problems)
	}
	says(t, text, "20 in 20 files, 11 of which a batch would fail", "notes.txt, truth.csv: no camera frames",
		"rubidium_0012.fits.part: unfinished, by its ending", "b_rubidium_0001_probe_atoms 1 not read", "rubidium_0010 1 unfinished",
		"b_rubidium_0001_probe_atoms, .* and 6 more: 1 plane where the layout has 3",
		"rubidium_0010, rubidium_0011: the file is not whole: wait until it is written, or copy it again",
		`look like one file a frame: layout = "files" with suffixes = \["_atoms", "_dark", "_light"\]`)

	out, text = look(t, dir, 1, `planes = `, "layout = \"files\"\nsuffixes = [\"_probe_atoms\", \"_probe_light\", \"_probe_dark\"]\nplanes = ")
	if out.Usable != 3 || out.Unusable != 0 || out.Problems != 1 {
		t.Errorf("%d usable, %d unusable, %d problems", out.Usable, out.Unusable, out.Problems)
	}
	says(t, text, "3 in 9 files\n", `files: atoms "_probe_atoms", light`, "rubidium_0001.fits, .* the name fits no frame",
		`rubidium_0001.fits holds 3 frames, as with layout = "cube"`)

	if err := os.Remove(filepath.Join(dir, "b_rubidium_0002_probe_dark.fits")); err != nil {
		t.Fatal(err)
	}
	out, text = look(t, dir, 1, `planes = `, "layout = \"files\"\nsuffixes = [\"_probe_atoms\", \"_probe_light\", \"_probe_dark\"]\nplanes = ")
	if out.Unusable != 1 {
		t.Errorf("%d unusable", out.Unusable)
	}
	says(t, text, "b_rubidium_0002 2 incomplete", "b_rubidium_0002: .*the dark frame is missing")
}

// copyFile copies at most so many bytes.
func copyFile(t *testing.T, from, to string, most int) {
	t.Helper()
	data, err := os.ReadFile(from)
	if err == nil {
		err = os.WriteFile(to, data[:min(len(data), most)], 0o644)
	}
	if err != nil {
		t.Fatal(err)
	}
}

// TestSlips goes through slips of settings that shots, not ratios, give away.
func TestSlips(t *testing.T) {
	dir := simulated(t, "rubidium", 4)
	for _, c := range []struct {
		name     string
		edits    []string
		problems int
		want     []string
	}{
		{"name of the flight", []string{`"TOF"`, `"TOFF"`}, 1, []string{"TOFF is in no header", "no TOFF in the header", "these hold numbers: TOF, SHOT", "rubidium_0001 .*no flight"}},
		{"order of the planes", []string{`["atoms", "light"`, `["light", "atoms"`}, 1, []string{"rubidium_0001, .*", "the two are exchanged: correct the order of the planes"}},
		{"unit of the flight", []string{`"TOF"`, "\"TOF\"\nunit = \"us\""}, 1, []string{"the longest flight is 0.024 ms"}},
		{"region", []string{"[shots]", "[region]\nx = 100\ny = 100\nwidth = 200\nheight = 200\n[shots]"}, 1, []string{"none of which a batch can fit", "columns 100 to 299", "is not inside a frame of 256x256 pixels"}},
		{"scan variable", []string{"[shots]", "[shots]\nscan = [\"EVAP\", \"SHOT\"]"}, 0, []string{"EVAP is nowhere", "SHOT: 4 values", "scan: EVAP is in no header"}},
		{"gain and full scale", []string{"electrons_per_count = 1.0", "electrons_per_count = 0.5\nfull_scale_counts = 3500"}, 2,
			[]string{`electrons_per_count = 0.5, but light and dark frames give`, "frames hold up to .* counts, above full_scale_counts = 3500"}},
		{"read noise", []string{"read_noise_electrons = 6.0", "read_noise_electrons = 12.0"}, 0, []string{"read_noise_electrons = 12, but the darks have"}},
		{"counts per Isat", []string{"counts_per_isat = { value = 9000.0", "counts_per_isat = { value = 900.0"}, 1,
			[]string{"counts_per_isat = 900 means 0.033 electrons .* 0.05 to 0.95 is plausible: .*at 0.5 it would be 136.0"}},
		{"no gain", []string{"electrons_per_count = 1.0", "", "read_noise_electrons = 6.0", ""}, 0, []string{`electrons a count, measured from 3 pairs`, "rms, measured from the darks"}},
		{"no exposure", []string{"exposure_us = 40.0", ""}, 0, []string{"exposure_us is not given, so that they cannot be recomputed"}},
		{"weak probe", []string{"counts_per_isat = { value = 9000.0, err = 300.0 }", ""}, 0, []string{"counts at Isat not given; Isat x exposure x pixel area is 27[23].0 photons"}},
	} {
		out, text := look(t, dir, 0, c.edits...)
		if out.Problems != c.problems {
			t.Errorf("%s: %d problems, want %d", c.name, out.Problems, c.problems)
		}
		says(t, text, c.want...)
	}
}

// TestSideTable: where metadata come from, and shots that the table does not name.
func TestSideTable(t *testing.T) {
	dir := simulated(t, "rubidium", 3)
	for name, text := range map[string]string{"log.csv": "shot,tof,power\n1,25,0.5\n2,26,0.6\n", "other.csv": "shot,power\nrun7,0.5\n"} {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	pattern := "[shots]\npattern = '_0*(?P<nr>\\d+)'\nscan = [\"nr\", \"power\"]\nside_table = "
	_, text := look(t, dir, 0, "[shots]", pattern+`"log.csv"`)
	says(t, text, "flight 3 values, 24 to 26 ms, from tof in log.csv and the header", "nr: 3 values, 1 to 3, from the file name",
		"power: 2 values, 0.5 to 0.6, from log.csv", "power 2 values, .* in 2 of 3 shots", "log.csv has a row for 2 of 3 shots", "log.csv has no row for rubidium_0003", "rubidium_0002 1 3 256x256 26 2 0.6 ")
	out, text := look(t, dir, 0, "[shots]", pattern+`"other.csv"`)
	if out.Problems != 1 {
		t.Errorf("%d problems", out.Problems)
	}
	says(t, text, "other.csv names no shot", "such as rubidium_0001", "other.csv has rows that fit no shot: run7")
}

// TestDetunedDensity: the optical density is that at the detuning, alpha (1 + 4 0.5^2) below
// sigma0 n.
func TestDetunedDensity(t *testing.T) {
	dir := simulated(t, "rubidium", 5, "exposure_us", "detuning_gamma = 0.5\nexposure_us")
	_, text := look(t, dir, 1)
	found := regexp.MustCompile(`peak sigma0 n\s+(\S+) in \S+\s+optical\s+density\s+\(sigma0\s+n/a,\s+a\s+=\s+alpha\s+\(1\s+\+\s+4\s+detuning_gamma\^2\)\)\s+(\S+),`).FindStringSubmatch(text)
	if found == nil {
		t.Fatalf("no optical density in\n%s", text)
	}
	peak, err := strconv.ParseFloat(found[1], 64)
	density, err2 := strconv.ParseFloat(found[2], 64)
	if err != nil || err2 != nil || !(math.Abs(density/peak*4-1) <= 0.01) {
		t.Errorf("sigma0 n is %s, the optical density %s", found[1], found[2])
	}
}

// TestDecimalComma: a table of a country that writes one is told of, scan variable and flight.
func TestDecimalComma(t *testing.T) {
	dir := simulated(t, "rubidium", 3)
	if err := os.WriteFile(filepath.Join(dir, "log.csv"), []byte("nr;late;power\n1;24,0;0,5\n2;24,0;0,6\n3;24,0;0,7\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	const table = "[shots]\nside_table = \"log.csv\"\nscan = [\"power\"]"
	_, text := look(t, dir, 0, "[shots]", table)
	says(t, text, "scan: power holds 0,5, from log.csv, which is no number but text: the decimal sign is a point", "No problems found")
	_, text = look(t, dir, 0, "[shots]", table, `from = "TOF"`, `from = "late"`)
	says(t, text, `time of flight: late is "24,0": the decimal sign is a point`)
}

// TestSideTableTwice: a row that fits two shots serves none.
func TestSideTableTwice(t *testing.T) {
	dir := simulated(t, "rubidium", 3)
	if err := os.Mkdir(filepath.Join(dir, "b"), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.Rename(filepath.Join(dir, "rubidium_0003.fits"), filepath.Join(dir, "b", "rubidium_0001.fits")); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(dir, "log.csv"), []byte("shot,tof\n1,25\n2,26\n3,27\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	out, text := look(t, dir, 0, "[shots]", "[shots]\nside_table = \"log.csv\"")
	if out.Unusable != 2 {
		t.Errorf("%d unusable shots, want 2", out.Unusable)
	}
	says(t, text, "log.csv has a row for 1 of 3 shots", "log.csv has rows that fit no shot: 3", "no row of its own: row 1 fits b/rubidium_0001 too", "no row of its own: row 1 fits rubidium_0001 too")
	if strings.Contains(text, "has no row for") {
		t.Errorf("a row that is not told is called missing:\n%s", text)
	}
}

func TestStrayLight(t *testing.T) {
	dir := simulated(t, "rubidium", 7, "exposure_us", "stray_fraction = 0.2\nexposure_us")
	_, text := look(t, dir, 1)
	says(t, text, `stray light caps ln\(I0/I\) at 1.61`, "rubidium_0004: ceiling: in the middle of the cloud most of the counted light is the stray light")
	dir = simulated(t, "rubidium", 7, "exposure_us", "stray_fraction = 0.001\nexposure_us")
	if _, text = look(t, dir, 1); strings.Contains(text, "ceiling:") {
		t.Errorf("a thousandth of stray light is taken for most of it:\n%s", text)
	}
}

// TestDensityImages reads a night without camera frames.
func TestDensityImages(t *testing.T) {
	dir := t.TempDir()
	lab := edited(t, sodium(t), []string{`planes = ["atoms", "light", "dark"]`, "layout = \"density\"\ndensity_unit = \"log_ratio\"", `from = "TOF"`, "fixed_ms = 14.0"})
	if err := os.WriteFile(filepath.Join(dir, settings.FileName), []byte(lab), 0o644); err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(3, 5))
	for i := range 3 {
		pix := make([]float32, 64*48)
		for k := range pix {
			x, y := (float64(k%64)-31)/9, (float64(k/64)-22)/9
			pix[k] = float32(1.5*math.Exp(-(x*x+y*y)/2) + 0.02*rng.NormFloat64())
		}
		var data bytes.Buffer
		if err := fits.WriteFloats(&data, 64, 48, [][]float32{pix}, nil); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(filepath.Join(dir, fmt.Sprintf("od_%d.fits", i)), data.Bytes(), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	out, text := look(t, dir, 1)
	if out.Usable != 3 {
		t.Errorf("%d usable", out.Usable)
	}
	says(t, text, "density: one density image a shot, of log_ratio", "3 of 64 x 48 pixels", "flight 14 ms for all shots", "frames none: density images say nothing of saturated",
		"od_0 1 1 64x48", `peak sigma0 n [123]\.\d+ in od_\d, optical density \(sigma0 n/alpha\) [01]\.\d+`, "density_image", "the optics blur light")
	if _, text = look(t, dir, 1, "electrons_per_count = ", "# "); strings.Contains(text, "electrons_per_count") {
		t.Errorf("a gain that is not given is spoken of:\n%s", text)
	}
}

func sodium(t *testing.T) string {
	t.Helper()
	_, lab, err := simulate.Preset("sodium-bright")
	if err != nil {
		t.Fatal(err)
	}
	return string(lab)
}

func parsed(t *testing.T) *settings.Settings {
	t.Helper()
	lab, err := settings.Parse([]byte(sodium(t)), "sodium")
	if err != nil {
		t.Fatal(err)
	}
	return lab
}

func TestNothingThere(t *testing.T) {
	dir := t.TempDir()
	o := Options{Dir: dir, Settings: parsed(t), Fits: 3}
	if _, err := Night(context.Background(), o, silent{}); err == nil || !strings.Contains(err.Error(), "it holds no camera files") {
		t.Errorf("an empty folder: %v", err)
	}
	if err := os.WriteFile(filepath.Join(dir, "diary.txt"), []byte("dear diary"), 0o644); err != nil {
		t.Fatal(err)
	}
	out, err := Night(context.Background(), o, silent{})
	if err != nil || out.Usable != 0 || out.Problems != 1 {
		t.Errorf("a folder of other things: %+v, %v", out, err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	o.Dir = simulated(t, "rubidium", 1)
	if _, err := Night(ctx, o, silent{}); err == nil {
		t.Error("went on after it was stopped")
	}
}
