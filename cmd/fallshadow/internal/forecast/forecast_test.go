package forecast

import (
	"bytes"
	"context"
	"errors"
	"io"
	"math"
	"slices"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/figure"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/fit/predict"
)

const laboratory = `[atom]
species = "87Rb"
[trap]
axis1_hz = 20.0
axis2_hz = 120.0
sight_hz = 120.0
[camera]
pixel_um = 6.45
magnification = 2.0
electrons_per_count = 1.0
read_noise_electrons = 6.0
resolution_um = 3.0
[probe]
alpha = 2.0
counts_per_isat = 9000.0
exposure_us = 40.0
[flight]
from = "TOF"
[region]
x = 10
y = 20
width = 120
height = 90
`

func lab(t *testing.T, replace ...string) *settings.Settings {
	t.Helper()
	s, err := settings.Parse([]byte(strings.NewReplacer(replace...).Replace(laboratory)), "test.toml")
	if err != nil {
		t.Fatal(err)
	}
	return s
}

var usual = Request{Atoms: 1e5, T: 90e-9, From: 2e-3, To: 30e-3}

func text(t *testing.T, f *Forecast) string {
	t.Helper()
	var b bytes.Buffer
	if err := f.WriteText(&b); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func TestForecast(t *testing.T) {
	f, err := New(context.Background(), lab(t), usual)
	if err != nil {
		t.Fatal(err)
	}
	got := text(t, f)
	for _, want := range []string{"T/Tc0 = ", "semi-ideal", "from memory", "falls below 3 after", "leave the picture of 120 x 90 pixels after", Caution, "photons in the pulse", "assumed: a probe of 0.2 Isat"} {
		if !strings.Contains(got, want) {
			t.Errorf("the text lacks %q:\n%s", want, got)
		}
	}
	if len(f.Assumed) != 1 {
		t.Errorf("assumed: %q", f.Assumed)
	}
	if e := f.Plan.Experiment; math.Abs(e.Light(3, 4)-1800) > 1e-9 || e.X != 59.5 || e.Y != 44.5 {
		t.Errorf("light %g, centre (%g, %g)", e.Light(3, 4), e.X, e.Y)
	}
	stray, err := New(context.Background(), lab(t, "alpha = 2.0", "alpha = 2.0\nstray_fraction = 0.25"), usual)
	if err != nil {
		t.Fatal(err)
	}
	// Three quarters of 2400 electrons are the 0.2 Isat that atoms see.
	if e := stray.Plan.Experiment; !(math.Abs(e.Light(3, 4)-2400) <= 1e-9) || !(math.Abs(stray.Plan.Saturation()-0.2) <= 1e-12) {
		t.Errorf("with stray light: %g electrons, I/Isat %g", e.Light(3, 4), stray.Plan.Saturation())
	}
	if err := f.Plot().Render(io.Discard, "svg", 86, 150); err != nil {
		t.Error(err)
	}
}

// TestGround: flights whose peak is above 3 have a ground of their own, which ends where the
// text says that the peak falls below; a thin cloud has none.
func TestGround(t *testing.T) {
	thin := usual
	thin.Atoms, thin.T = 100, 300e-9
	for _, c := range []struct {
		request Request
		panels  int
	}{{usual, 3}, {thin, 0}} {
		f, err := New(context.Background(), lab(t), c.request)
		if err != nil {
			t.Fatal(err)
		}
		panels := 0
		for _, g := range f.Plot() {
			for _, b := range g.Bands {
				panels++
				last := 0.0
				for i, x := range b.X {
					if b.High[i] == g.Y.Max {
						last = x
					}
				}
				first, err := f.Plan.First(&f.Gas, c.request.From, c.request.To, func(s *predict.Sight) bool { return s.Depth < deep })
				if err != nil || !(math.Abs(last-first*1e3) < 0.3) {
					t.Errorf("the ground ends at %g ms, below 3 from %g (%v)", last, first*1e3, err)
				}
			}
		}
		if panels != c.panels {
			t.Errorf("%g atoms: a ground in %d figures", c.request.Atoms, panels)
		}
	}
}

// TestRebin: fitted pixels of 2x2 saved ones count four times the light and twice the noise
// of a read (of four reads), and cover the same field.
func TestRebin(t *testing.T) {
	r := usual
	r.Intensity = 0.5
	f, err := New(context.Background(), lab(t, "[region]", "[fit]\nrebin = 2\n[region]"), r)
	if err != nil {
		t.Fatal(err)
	}
	if e := f.Plan.Experiment; math.Abs(e.Light(0, 0)-4*4500) > 1e-9 || e.Noise.Read != 12 || e.Width != 60 || e.Height != 45 || math.Abs(e.Optics.Pixel-6.45e-6) > 1e-15 || len(f.Assumed) != 0 {
		t.Errorf("%+v, assumed %q", e, f.Assumed)
	}
}

// TestSparse: what settings leave out is assumed and said; a hot gas and a gas without a
// scattering length of its own have forecasts too.
func TestSparse(t *testing.T) {
	s := lab(t, "electrons_per_count = 1.0", "", "read_noise_electrons = 6.0", "", "counts_per_isat = 9000.0", "", "exposure_us = 40.0", "",
		"[region]\nx = 10\ny = 20\nwidth = 120\nheight = 90", "", `"87Rb"`, `"7Li"`)
	f, err := New(context.Background(), s, Request{Atoms: 1e5, Reduced: 1.2, From: 1e-3, To: 5e-3})
	if err != nil {
		t.Fatal(err)
	}
	if len(f.Assumed) != 3 || math.Abs(f.Gas.Reduced-1.2) > 1e-12 || f.Gas.Condensate != 0 {
		t.Errorf("assumed %q, %+v", f.Assumed, f.Gas)
	}
	if got := text(t, f); strings.Contains(got, "NaN") || strings.Contains(got, "photons") {
		t.Errorf("text:\n%s", got)
	}
	if err := f.Plot().Render(io.Discard, "pdf", 86, 150); err != nil {
		t.Error(err)
	}
}

// TestDepthWords: table, advice and axis say by what sigma0 n is divided.
func TestDepthWords(t *testing.T) {
	for _, c := range []struct{ alpha, head, name, axis string }{
		{"alpha = 2.0", "  peak sigma0 n/alpha  ", "optical density (sigma0 n/alpha)", "(*σ*_{0}*n* / *α*)"},
		{"alpha = 2.0\ndetuning_gamma = 0.5", "  peak sigma0 n/a  ", "optical density (sigma0 n/a, a = alpha (1 + 4 detuning_gamma^2))", "(*σ*_{0}*n* / *α*(1 + 4*δ*^{2}))"},
	} {
		f, err := New(context.Background(), lab(t, "alpha = 2.0", c.alpha), usual)
		if err != nil {
			t.Fatal(err)
		}
		said := text(t, f)
		if n := strings.Count(said, c.name); n != 2 || strings.Count(said, "optical density") != n || !strings.Contains(said, c.head) || strings.Contains(said, "OD") {
			t.Errorf("%s:\n%s", c.alpha, said)
		}
		if got, want := f.Plot()[1].Y.Label, figure.Markup("peak optical density  "+c.axis); !slices.Equal(got, want) {
			t.Errorf("%s: the axis is %v", c.alpha, got)
		}
	}
}

// TestUntold: flights whose picture tells nothing have no errors, and the others theirs.
func TestUntold(t *testing.T) {
	f, err := New(context.Background(), lab(t), usual)
	if err != nil {
		t.Fatal(err)
	}
	errs := make([]error, len(f.Sights))
	errs[2], errs[len(errs)-1] = errors.New("singular"), errors.New("singular")
	if err := f.settle(errs); err != nil {
		t.Fatal(err)
	}
	if !math.IsNaN(f.Sights[2].Errors.T) || !(f.Sights[1].Errors.T > 0) {
		t.Errorf("errors of T %g, %g", f.Sights[1].Errors.T, f.Sights[2].Errors.T)
	}
	if got := text(t, f); !strings.Contains(got, "after 2 of these flights") || strings.Contains(got, "NaN") {
		t.Errorf("text:\n%s", got)
	}
	stack := f.Plot()
	if g := stack[2]; len(g.Curves) != 4 || !(g.Y.Max > g.Y.Min) {
		t.Errorf("%d curves of errors from %g to %g", len(g.Curves), g.Y.Min, g.Y.Max)
	}
	if err := stack.Render(io.Discard, "svg", 86, 150); err != nil {
		t.Error(err)
	}
}

func TestRefused(t *testing.T) {
	ctx := context.Background()
	for _, r := range []Request{{T: 1e-7, From: 1e-3, To: 2e-3}, {Atoms: 1e5, From: 1e-3, To: 2e-3}, {Atoms: 1e5, T: 1e-7, From: 2e-3, To: 2e-3}} {
		if _, err := New(ctx, lab(t), r); err == nil {
			t.Errorf("%+v is planned", r)
		}
	}
	if _, err := New(ctx, lab(t, "[region]", "[shots]\nlayout = \"density\"\ndensity_unit = \"log_ratio\"\n[region]"), usual); err == nil {
		t.Error("density images are planned")
	}
	stopped, stop := context.WithCancel(ctx)
	stop()
	if _, err := New(stopped, lab(t), usual); err == nil {
		t.Error("a stopped forecast is made")
	}
}
