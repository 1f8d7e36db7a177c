package night

import (
	"context"
	"image"
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/cmd/fallshadow/internal/simulate"
	"fallshadow/fit"
	"fallshadow/imageio"
)

// A cloud that reaches over the border of a region that somebody gave is fitted in the whole
// frame, which is prepared when the first asks for it; one in no region is not fitted twice.
func TestRegionGrows(t *testing.T) {
	dir := newNight(t, 4)
	var f fake
	f.touches = func(shot string, region image.Rectangle) bool { return region != Everything && shot != "2000" }
	mustBatch(t, &f, Options{Dir: dir})
	equal(t, "prepared without a region", f.prepared, []image.Rectangle{{}})

	given := lab(t, "[region]\nx = 1\ny = 1\nwidth = 8\nheight = 9\n")
	for _, workers := range []int{1, 3} {
		f.prepared = nil
		out, _ := mustBatch(t, &f, Options{Dir: dir, Out: filepath.Join(t.TempDir(), "results"), Settings: given, Workers: workers})
		equal(t, "prepared", f.prepared, []image.Rectangle{{}, Everything})
		var grown []string
		for _, r := range out.Rows {
			if slices.Contains(r.Flags, report.FlagGrown) {
				grown = append(grown, r.Shot)
			}
		}
		equal(t, "grown", grown, []string{"shot_1", "shot_3", "shot_4"})
	}
}

// A region with nothing in it is said to miss a cloud that stands elsewhere, and grows to one that
// stands in it.
func TestEmptyRegion(t *testing.T) {
	all := &report.Facts{X: 90, Y: 40, Fit: &fit.Result{Model: fit.ModelThermal}}
	for _, c := range []struct {
		region image.Rectangle
		want   string
	}{{image.Rect(0, 0, 60, 60), report.FlagOutside}, {image.Rect(50, 0, 120, 60), report.FlagGrown}} {
		none := &report.Facts{Region: c.region, Fit: &fit.Result{Model: fit.ModelNone}}
		got := Grow(none, 1, func() (*report.Facts, error) { whole := *all; return &whole, nil })
		if !slices.Equal(got.Notes, []string{c.want}) || (got.Fit.Model == fit.ModelNone) != (c.want == report.FlagOutside) {
			t.Errorf("in %v: %v, %s", c.region, got.Notes, got.Fit.Model)
		}
	}
}

// A region in the wings of a cloud whose centre it does not hold grows to it.
func TestRegionInTheWings(t *testing.T) {
	wings := &report.Facts{Region: image.Rect(40, 50, 140, 150), Fit: &fit.Result{Model: fit.ModelThermal, Touches: true}}
	all := &report.Facts{X: 90, Y: 230, Pixel: 2e-6, Fit: &fit.Result{Model: fit.ModelThermal, Width: [2]float64{100e-6, 100e-6}}}
	if got := Grow(wings, 1, func() (*report.Facts, error) { return all, nil }); got != all || !slices.Equal(got.Notes, []string{report.FlagGrown}) {
		t.Errorf("%+v", got)
	}
}

// The first facts stand where the whole frame says nothing better, or of another cloud.
func TestGrowKeepsWhatItHas(t *testing.T) {
	other := &report.Facts{X: 300, Y: 290, Pixel: 1e-6, Fit: &fit.Result{Model: fit.ModelThermal, Width: [2]float64{40e-6, 40e-6}}}
	cut := &report.Facts{Region: image.Rect(40, 50, 140, 150), Fit: &fit.Result{Model: fit.ModelThermal, Touches: true}}
	none := &report.Facts{Fit: &fit.Result{Model: fit.ModelNone}}
	for _, c := range []struct {
		whole *report.Facts
		err   error
	}{{none, nil}, {other, nil}, {nil, context.DeadlineExceeded}} {
		if got := Grow(cut, 1, func() (*report.Facts, error) { return c.whole, c.err }); got != cut || len(got.Notes) != 0 {
			t.Errorf("%v, %v: got %+v", c.whole, c.err, got)
		}
	}
}

// wideNight is a night of large frames with clouds off their middle, and its settings.
func wideNight(t *testing.T) (dir string, made *simulate.Night) {
	t.Helper()
	scenario, err := simulate.Parse([]byte(pipelineScenario), "wide")
	if err != nil {
		t.Fatal(err)
	}
	scenario = scenario.WithShots(3)
	scenario.Picture.Width, scenario.Picture.Height, scenario.Picture.X, scenario.Picture.Y = 900, 760, 640, 300
	scenario.Fringes, scenario.Path.TReduced = simulate.Fringes{}, [2]float64{0.9, 0.75}
	text, _, _ := strings.Cut(pipelineSettings, "[region]")
	if made, err = simulate.New(scenario, []byte(text), "wide"); err != nil {
		t.Fatal(err)
	}
	dir = filepath.Join(t.TempDir(), "night")
	if err := made.Write(context.Background(), dir, 2, nil); err != nil {
		t.Fatal(err)
	}
	return dir, made
}

// TestRegionIsFound: in a large frame the part about the cloud is fitted, and what that gives is
// in pixels of the frame; a region that cuts the cloud comes to the same.
func TestRegionIsFound(t *testing.T) {
	dir, made := wideNight(t)
	shows := func(s *settings.Settings, most int) *Outcome {
		a := &regions{}
		out, err := run(context.Background(), Options{Dir: dir, Out: t.TempDir(), Settings: s, Pictures: a}, silent{}, newBench(true, nil))
		if err != nil {
			t.Fatal(err)
		}
		for i := range out.Rows {
			truth, err := made.Truth(i)
			if err != nil {
				t.Fatal(err)
			}
			r := &out.Rows[i]
			if x, y := r.Number("x_px"), r.Number("y_px"); !(math.Abs(x-truth.X) < 1 && math.Abs(y-truth.Y) < 1) {
				t.Errorf("%s is at (%g, %g), not (%g, %g)", r.Shot, x, y, truth.X, truth.Y)
			}
			if n := r.Number("atoms"); !(math.Abs(n/truth.N-1) < 0.05) {
				t.Errorf("%s has %g atoms, not %g", r.Shot, n, truth.N)
			}
			in := a.of[r.Shot]
			if !image.Pt(int(truth.X), int(truth.Y)).In(in) || in.Dx()*in.Dy() > most {
				t.Errorf("%s is fitted in %v", r.Shot, in)
			}
		}
		return out
	}
	found := shows(made.Settings, 900*760/2)
	cut := *made.Settings
	cut.Region = settings.Region{X: 600, Y: 200, Width: 120, Height: 200}
	grown := shows(&cut, 900*760/2)
	aside := *made.Settings
	aside.Region = settings.Region{X: 20, Y: 600, Width: 140, Height: 140}
	look, err := TakeLook(context.Background(), Options{Dir: dir, Settings: &aside}, silent{}, func(int, *imageio.Raw) {})
	if err != nil {
		t.Fatal(err)
	}
	f, err := look.Measure(context.Background(), 1)
	if err != nil || f.Fit.Model != fit.ModelNone || !slices.Contains(f.Notes, report.FlagOutside) {
		t.Errorf("beside the cloud: %v, %+v", err, f)
	}
	for i := range grown.Rows {
		r := &grown.Rows[i]
		if !slices.Contains(r.Flags, report.FlagGrown) || slices.Contains(r.Flags, fit.FlagCut) {
			t.Errorf("%s: %v", r.Shot, r.Flags)
		}
		for name, v := range found.Rows[i].Numbers {
			if w := r.Number(name); w != v && !(math.IsNaN(w) && math.IsNaN(v)) {
				t.Errorf("%s: %s is %v in the region and %v without", r.Shot, name, w, v)
			}
		}
	}
}

// regions remembers what part of the frame was fitted.
type regions struct {
	album
	of map[string]image.Rectangle
}

func (a *regions) Draw(r *ledger.Row, f *report.Facts) error {
	a.Lock()
	defer a.Unlock()
	if a.of == nil {
		a.of = map[string]image.Rectangle{}
	}
	a.of[r.Shot] = f.Region
	return nil
}
