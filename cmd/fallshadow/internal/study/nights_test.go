package study

import (
	"bytes"
	"context"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/cmd/fallshadow/internal/simulate"
	"fallshadow/fit/curve"
)

// silent is the progress of a run that nobody watches.
type silent struct{}

func (silent) Begin(string, int) {}
func (silent) Step(string, bool) {}
func (silent) End()              {}

// fitted fits the night in a folder and analyses it.
func fitted(t *testing.T, dir, text string) (*Night, *Analysis) {
	t.Helper()
	ctx := context.Background()
	s, err := settings.Parse([]byte(text), "test.toml")
	if err != nil {
		t.Fatal(err)
	}
	out := t.TempDir()
	if _, err := night.Batch(ctx, night.Options{Dir: dir, Out: out, Settings: s}, silent{}); err != nil {
		t.Fatal(err)
	}
	n, err := Load(ctx, dir, out, s)
	if err != nil {
		t.Fatal(err)
	}
	return n, analysed(t, n)
}

// TestEvapNight: a night that another program drew condenses by 1 − t³ at Tc0.
func TestEvapNight(t *testing.T) {
	dir := os.Getenv("FALLSHADOW_NIGHT_EVAP")
	if dir == "" {
		t.Skip("FALLSHADOW_NIGHT_EVAP does not name the folder of the night")
	}
	text, err := os.ReadFile(filepath.Join("..", "..", "..", "..", "testdata", "reference", "evap_settings.toml"))
	if err != nil {
		t.Fatal(err)
	}
	_, a := fitted(t, dir, string(text))
	c := a.Comparisons[0]
	t.Logf("chi2 a point %.3f, Tc/Tc0 %s", c.PerDof(), format(*a.Measured()))
	if c.Law.Name != curve.Ideal || !(c.PerDof() >= 0.5 && c.PerDof() <= 2) {
		t.Errorf("chi2 a point of %s is %g", c.Law.Name, c.PerDof())
	}
	within(t, "Tc/Tc0", a.Measured().V, 1, 0.02)
	if a.Best().Name != curve.Ideal {
		t.Errorf("the best law is %s", a.Best().Name)
	}
}

// simulated writes shots of a preset and returns the folder and the settings.
func simulated(t *testing.T, preset string, shots int) (dir, text string) {
	t.Helper()
	if os.Getenv("FALLSHADOW_CLOSURE") == "" {
		t.Skip("FALLSHADOW_CLOSURE asks for simulated nights")
	}
	scenario, data, err := simulate.Preset(preset)
	if err != nil {
		t.Fatal(err)
	}
	n, err := simulate.New(scenario.WithShots(shots), data, preset)
	if err != nil {
		t.Fatal(err)
	}
	dir = filepath.Join(t.TempDir(), "night")
	if err := n.Write(context.Background(), dir, 2, nil); err != nil {
		t.Fatal(err)
	}
	return dir, string(data)
}

// TestSemiIdealNight: the semi-ideal law is picked, with its sign and size.
func TestSemiIdealNight(t *testing.T) {
	dir, text := simulated(t, "mean-field", 40)
	_, a := fitted(t, dir, text+"\n[fit]\nthermal = \"semi-ideal\"\n")
	for _, c := range a.Comparisons {
		t.Logf("%s: chi2 a point %.3g, share %s", c.Law.Name, c.PerDof(), format(c.Amplitude))
		if c.Law.Name == curve.SemiIdeal {
			within(t, "share of the semi-ideal law", c.Amplitude.V, 1, 4*c.Amplitude.Err)
			within(t, "chi2 a point", c.PerDof(), 1, 0.5)
		}
	}
	if a.Best().Name != curve.SemiIdeal {
		t.Errorf("the best law is %s", a.Best().Name)
	}
}

// TestWrongSetting: of alpha a tenth and of a magnification a twentieth off the right one is
// named, and its size within three of its errors.
func TestWrongSetting(t *testing.T) {
	dir, text := simulated(t, "rubidium", 60)
	for _, c := range []struct {
		line, wrong, setting string
		factor               float64
	}{
		{"alpha = { value = 2.0", "alpha = { value = 1.8", curve.Alpha, 2 / 1.8},
		{"magnification = { value = 2.0", "magnification = { value = 2.1", curve.Magnification, 2 / 2.1},
	} {
		if !strings.Contains(text, c.line) {
			t.Fatalf("the preset has no %s", c.line)
		}
		n, a := fitted(t, dir, strings.Replace(text, c.line, c.wrong, 1))
		f, err := a.Curve.FindFactor(context.Background())
		if err != nil {
			t.Fatal(err)
		}
		best := f.List[0]
		t.Logf("%s: factor %s, error %.4f, lead %.1f", best.Setting, format(best.Factor), best.Error(), f.Lead)
		if best.Setting != c.setting || !f.Wrong() || !f.Decided() {
			t.Errorf("%s is named, lead %g", best.Setting, f.Lead)
		}
		within(t, "factor of "+c.setting, best.Factor.V, c.factor, 3*best.Error())
		var b bytes.Buffer
		if err := n.WriteNumber(context.Background(), &b, a.Chosen); err != nil || !strings.Contains(b.String(), c.setting+" fits better") {
			t.Errorf("%v:\n%s", err, &b)
		}
	}
}
