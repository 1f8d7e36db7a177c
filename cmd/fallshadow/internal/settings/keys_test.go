package settings

import (
	"strconv"
	"strings"
	"testing"
)

// with returns base with one key set, in its table.
func with(t *testing.T, full, value string) string {
	t.Helper()
	table, name, _ := strings.Cut(full, ".")
	var out strings.Builder
	found := false
	for _, line := range strings.SplitAfter(base, "\n") {
		if strings.HasPrefix(line, name+" =") {
			continue
		}
		out.WriteString(line)
		if line == "["+table+"]\n" {
			found = true
			out.WriteString(name + " = " + value + "\n")
		}
	}
	if !found {
		out.WriteString("[" + table + "]\n" + name + " = " + value + "\n")
	}
	return out.String()
}

func parse(t *testing.T, text string) *Settings {
	t.Helper()
	s, err := Parse([]byte(text), FileName)
	if err != nil {
		t.Fatalf("%v\nin\n%s", err, text)
	}
	return s
}

// company are the keys that a key needs beside it.
var company = map[string]string{
	"trap.release_ms":    "release = \"linear\"\n",
	"shots.suffixes":     "layout = \"files\"\n",
	"shots.side_key":     "side_table = \"log.csv\"\n",
	"shots.density_unit": "layout = \"density\"\n",
	"region.x":           "y = 0\nwidth = 100\nheight = 100\n",
	"region.y":           "x = 0\nwidth = 100\nheight = 100\n",
	"region.width":       "x = 0\ny = 0\nheight = 100\n",
	"region.height":      "x = 0\ny = 0\nwidth = 100\n",
}

// withKey is with, and with the company that the key needs.
func withKey(t *testing.T, full, value string) string {
	t.Helper()
	text := with(t, full, value)
	table, name, _ := strings.Cut(full, ".")
	if full == "flight.fixed_ms" {
		text = strings.Replace(text, "from = \"TOF\"\n", "", 1)
	}
	return strings.Replace(text, "["+table+"]\n"+name, "["+table+"]\n"+company[full]+name, 1)
}

func TestTableOfKeys(t *testing.T) {
	seen := map[string]bool{}
	for i := range keys {
		k := &keys[i]
		if seen[k.full()] || !isTable(k.table) || !strings.HasSuffix(k.doc, ".") {
			t.Errorf("%s: there twice, in no table, or without a sentence", k.full())
		}
		seen[k.full()] = true
		if k.def == "" && k.sample == "" {
			t.Errorf("%s has neither default nor sample", k.full())
		}
		if !k.isText() && !(k.low < k.high) {
			t.Errorf("%s has no range", k.full())
		}
		if k.required && (k.def != "" || !k.shown) {
			t.Errorf("%s must be given: it has no default and is shown", k.full())
		}
		if m := meant(k.table, k.name); m != k {
			t.Errorf("%s is not its own meaning", k.full())
		}
		for _, a := range k.also {
			if m := meant(k.table, a); m != k {
				t.Errorf("%s: the other name %s leads elsewhere", k.full(), a)
			}
		}
	}
}

// TestSamples sets every key to its sample and, where it has a range, to both its ends
// and a step beyond.
func TestSamples(t *testing.T) {
	for i := range keys {
		k := &keys[i]
		if k.sample != "" {
			parse(t, withKey(t, k.full(), k.sample))
		}
		if k.isText() || k.name == "bad_pixels" {
			continue
		}
		write := func(x float64) string {
			if k.whole() {
				return strconv.Itoa(int(x))
			}
			return strconv.FormatFloat(x, 'e', -1, 64)
		}
		step := 1.0
		if !k.whole() {
			step = (k.high - k.low) * 1e-9
		}
		for _, c := range []struct {
			x    float64
			fits bool
		}{{k.low, true}, {k.high, true}, {k.low - step, false}, {k.high + step, false}} {
			_, err := Parse([]byte(withKey(t, k.full(), write(c.x))), FileName)
			outside := err != nil && strings.Contains(err.Error(), "out of range")
			if outside == c.fits {
				t.Errorf("%s = %s: %v", k.full(), write(c.x), err)
			}
		}
	}
}

// TestDefaults holds the defaults against the data sheet of the design: no correction
// where none is stated.
func TestDefaults(t *testing.T) {
	s := parse(t, base)
	if s.Probe.Alpha != (Quantity{Value: 1}) || s.Probe.DetuningGamma != (Quantity{}) || s.Probe.StrayFraction != (Quantity{}) ||
		s.Probe.CountsPerIsat.Given || s.Camera.Binning != 1 || s.Camera.ElectronsPerCount.Given || s.Camera.ResolutionUm != (Quantity{}) ||
		s.Trap.Release != "sudden" || s.Trap.AngleDeg != (Quantity{}) || s.Clock.Unit != "ms" || s.Clock.ZeroMs != (Quantity{}) ||
		s.Shots.Layout != "cube" || len(s.Shots.Planes) != 3 || !s.Region.Auto() ||
		s.Fit.Thermal != "bose" || s.Fit.Tie != "tied" || s.Fit.Angle != "fixed" || s.Fit.Reference != "auto" || s.Fit.Rebin != 1 {
		t.Errorf("defaults are not what the design says: %+v", s)
	}
	doc := newDocument("defaults", []byte(defaultText()))
	newBinder(doc, &Settings{}).bind(doc.read())
	if len(doc.problems) > 0 {
		t.Error(doc.report())
	}
}

func TestQuantity(t *testing.T) {
	for _, c := range []struct {
		in   string
		want Quantity
	}{
		{"20.0", Quantity{20, 0, true, false}},
		{"20", Quantity{20, 0, true, false}},
		{"2_0e0", Quantity{20, 0, true, false}},
		{"{ value = 20.0, err = 0.1 }", Quantity{20, 0.1, true, true}},
		{"{ err = 0, value = 20.0 }", Quantity{20, 0, true, true}},
		{"{ value = 20.0 }", Quantity{20, 0, true, false}},
	} {
		if s := parse(t, with(t, "trap.axis1_hz", c.in)); s.Trap.Axis1Hz != c.want {
			t.Errorf("%s: got %+v", c.in, s.Trap.Axis1Hz)
		}
	}
}

func TestOtherSpellingsOfTOML(t *testing.T) {
	want := parse(t, base).Digest()
	for name, text := range map[string]string{
		"byte-order mark": "\xef\xbb\xbf" + base,
		"CRLF":            strings.ReplaceAll(base, "\n", "\r\n"),
		"dotted keys":     "atom.species = '87Rb'\ntrap.axis1_hz = 2e1\ntrap.axis2_hz = 120\ntrap.sight_hz = {value=120,err=0.5}\ncamera = {pixel_um = 6.45, magnification = 2}\nflight.from = \"TOF\"",
		"other order":     "[flight]\nfrom = 'TOF'\n[camera]\nmagnification = +2.0\npixel_um = 6.45 # um\n[trap]\nsight_hz = { err = 0.5, value = 120.0 }\n'axis2_hz' = 120.0\naxis1_hz = 20.0\n\n[atom]\nspecies = \"rb87\"",
	} {
		if parse(t, text).Digest() != want {
			t.Errorf("%s: another digest", name)
		}
	}
}
