package night

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"image"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"sync/atomic"
	"testing"

	"github.com/google/go-cmp/cmp"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/fit"
	"fallshadow/imageio"
	"fallshadow/imageio/fits"
	"fallshadow/model/numbers"
)

const side = 12

// writeShot writes a cube whose atoms, light and dark frame follow from three seeds.
func writeShot(t *testing.T, dir, name string, atoms, light, dark uint16, cards ...fits.Card) {
	t.Helper()
	planes := make([][]uint16, 3)
	for p, seed := range []uint16{atoms, light, dark} {
		for i := range side * side {
			planes[p] = append(planes[p], seed+uint16(i%7))
		}
	}
	var b bytes.Buffer
	if err := fits.WriteCube(&b, side, side, planes, cards); err != nil {
		t.Fatal(err)
	}
	file := filepath.Join(dir, name+".fits")
	if err := os.MkdirAll(filepath.Dir(file), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(file, b.Bytes(), 0o644); err != nil {
		t.Fatal(err)
	}
}

// newNight writes n shots named shot_1 to shot_n.
func newNight(t *testing.T, n int) string {
	t.Helper()
	dir := filepath.Join(t.TempDir(), "night")
	for i := 1; i <= n; i++ {
		writeShot(t, dir, fmt.Sprint("shot_", i), uint16(1000*i), uint16(2000+i), 100, fits.Integer("RAMP", 10*i, ""))
	}
	return dir
}

func lab(t *testing.T, more string) *settings.Settings {
	t.Helper()
	s, err := settings.Parse([]byte(`[atom]
species = "87Rb"
[trap]
axis1_hz = 20.0
axis2_hz = 100.0
sight_hz = 100.0
[camera]
pixel_um = 5.0
magnification = 2.0
[flight]
fixed_ms = 15.0
`+more), "test.toml")
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// fake is a bench that measures nothing but what it was given.
type fake struct {
	sync.Mutex
	shots    []string // fitted, by their atoms frame, in the order of their end
	prepared []image.Rectangle
	before   func(ctx context.Context, shot string) error
	touches  func(shot string, region image.Rectangle) bool // the border of a region
}

// prepare sums up the lights it was shown; that sum goes into every result, as the
// reference of a real night does.
func (f *fake) prepare(_ context.Context, _ *settings.Settings, region image.Rectangle, all *frames) (func() measure, error) {
	f.prepared = append(f.prepared, region)
	lights := 0.
	for raw := range all.all {
		if raw != nil && raw.Frames[imageio.Light] != nil {
			lights += float64(raw.Frames[imageio.Light].Pix[0])
		}
	}
	return func() measure {
		return func(ctx context.Context, at int, raw *imageio.Raw) (*report.Facts, error) {
			shot := fmt.Sprint(raw.Frames[imageio.Atoms].Pix[0])
			if f.before != nil {
				if err := f.before(ctx, shot); err != nil {
					return nil, err
				}
			}
			f.Lock()
			f.shots = append(f.shots, shot)
			f.Unlock()
			r := &fit.Result{Model: fit.ModelThermal, Numbers: numbers.Nothing(), X: float64(region.Dx())}
			r.Touches = f.touches != nil && f.touches(shot, region)
			r.Numbers.Atoms.V = float64(raw.Frames[imageio.Atoms].Pix[0]) + lights
			return &report.Facts{Flight: 0.015, X: r.X, Region: Everything.Inset(-1), Fit: r}, nil
		}
	}, nil
}

// fitted returns what was fitted since the last call, sorted.
func (f *fake) fitted() []string {
	list := f.shots
	f.shots = nil
	slices.SortFunc(list, imageio.Natural)
	return list
}

type silent struct{}

func (silent) Begin(string, int) {}
func (silent) Step(string, bool) {}
func (silent) End()              {}

func batchOf(t *testing.T, ctx context.Context, f *fake, o Options) (*Outcome, string, error) {
	t.Helper()
	if o.Settings == nil {
		o.Settings = lab(t, "")
	}
	if o.Out == "" {
		o.Out = filepath.Join(filepath.Dir(o.Dir), "results")
	}
	out, err := run(ctx, o, silent{}, f.prepare)
	table, _ := os.ReadFile(filepath.Join(o.Out, report.CSVName))
	if strings.Contains(string(table), filepath.Dir(o.Dir)) {
		t.Error("the table holds an absolute path")
	}
	return out, string(table), err
}

func mustBatch(t *testing.T, f *fake, o Options) (*Outcome, string) {
	t.Helper()
	out, table, err := batchOf(t, context.Background(), f, o)
	if err != nil {
		t.Fatal(err)
	}
	return out, table
}

func equal(t *testing.T, what string, got, want any) {
	t.Helper()
	if diff := cmp.Diff(want, got); diff != "" {
		t.Errorf("%s (-want +got):\n%s", what, diff)
	}
}

var none []string

// What is fitted after a change of the night, of the settings or by request.
func TestBatchFitsWhatIsNotCurrent(t *testing.T) {
	all := []string{"1000", "2000", "3000"}
	tests := []struct {
		name   string
		change func(t *testing.T, dir string, o *Options)
		fitted []string
	}{
		{"nothing", func(*testing.T, string, *Options) {}, none},
		{"asked for", func(_ *testing.T, _ string, o *Options) { o.Again = true }, all},
		{"other workers", func(_ *testing.T, _ string, o *Options) { o.Workers = 7 }, none},
		{"settings that change numbers", func(t *testing.T, _ string, o *Options) { o.Settings = lab(t, "[probe]\nalpha = 2.0") }, all},
		{"settings that change no numbers", func(t *testing.T, _ string, o *Options) {
			o.Settings = lab(t, "[shots]\nscan = [\"RAMP\"]")
		}, none},
		{"new pixels of atoms", func(t *testing.T, dir string, _ *Options) {
			writeShot(t, dir, "shot_2", 2500, 2002, 100, fits.Integer("RAMP", 20, ""))
		}, []string{"2500"}},
		{"new metadata", func(t *testing.T, dir string, _ *Options) {
			writeShot(t, dir, "shot_2", 2000, 2002, 100, fits.Integer("RAMP", 21, ""))
		}, []string{"2000"}},
		{"a new light frame", func(t *testing.T, dir string, _ *Options) {
			writeShot(t, dir, "shot_2", 2000, 2222, 100, fits.Integer("RAMP", 20, ""))
		}, all},
		{"a new dark frame", func(t *testing.T, dir string, _ *Options) {
			writeShot(t, dir, "shot_2", 2000, 2002, 101, fits.Integer("RAMP", 20, ""))
		}, all},
		{"a new shot", func(t *testing.T, dir string, _ *Options) {
			writeShot(t, dir, "shot_4", 4000, 2004, 100)
		}, []string{"1000", "2000", "3000", "4000"}},
		{"a broken file beside", func(t *testing.T, dir string, _ *Options) {
			if err := os.WriteFile(filepath.Join(dir, "x.fits"), []byte("SIMPLE"), 0o644); err != nil {
				t.Fatal(err)
			}
		}, none},
		{"renamed in its place", func(t *testing.T, dir string, _ *Options) {
			rename(t, dir, "shot_3", "shot_9")
		}, none},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			dir := newNight(t, 3)
			var f fake
			mustBatch(t, &f, Options{Dir: dir})
			equal(t, "fitted at first", f.fitted(), all)
			o := Options{Dir: dir}
			test.change(t, dir, &o)
			out, _ := mustBatch(t, &f, o)
			got := f.fitted()
			equal(t, "fitted", got, test.fitted)
			if out.Failed == 0 {
				equal(t, "counts", []int{out.Fitted, out.Kept}, []int{len(got), len(out.Rows) - len(got)})
			}
		})
	}
}

func rename(t *testing.T, dir, from, to string) {
	t.Helper()
	if err := os.Rename(filepath.Join(dir, from+".fits"), filepath.Join(dir, to+".fits")); err != nil {
		t.Fatal(err)
	}
}

// The table after a batch is that of a fresh one on the same folder, whatever came before.
func TestTableHasNoHistory(t *testing.T) {
	dir := newNight(t, 4)
	var f fake
	mustBatch(t, &f, Options{Dir: dir})
	rename(t, dir, "shot_1", "shot_7")
	writeShot(t, dir, "shot_2", 1, 2, 3)
	writeShot(t, dir, "copy", 1, 2, 3)
	if err := os.Remove(filepath.Join(dir, "shot_3.fits")); err != nil {
		t.Fatal(err)
	}
	_, long := mustBatch(t, &f, Options{Dir: dir, Workers: 1})
	_, fresh := mustBatch(t, &f, Options{Dir: dir, Workers: 3, Out: filepath.Join(t.TempDir(), "r")})
	if long != fresh {
		t.Errorf("the table after changes is\n%s\nbut a fresh one\n%s", long, fresh)
	}
	for _, want := range []string{"shot_7,shot_7.fits,ok", "shot_2,shot_2.fits,ok,duplicate", "copy,copy.fits,ok,,"} {
		if !strings.Contains(fresh, want) {
			t.Errorf("the table has no %q:\n%s", want, fresh)
		}
	}
}

func TestScanVariablesComeFromTheMetadata(t *testing.T) {
	dir := newNight(t, 2)
	var f fake
	_, plain := mustBatch(t, &f, Options{Dir: dir})
	_, scanned := mustBatch(t, &f, Options{Dir: dir, Settings: lab(t, "[shots]\nscan = [\"RAMP\"]")})
	equal(t, "last cells", lastCells(scanned), []string{"RAMP", "10", "20"})
	equal(t, "header", strings.HasPrefix(scanned, strings.Split(plain, "\n")[0]+",RAMP\n"), true)
}

func lastCells(table string) (cells []string) {
	for line := range strings.Lines(table) {
		line = strings.TrimSuffix(line, "\n")
		cells = append(cells, line[strings.LastIndex(line, ",")+1:])
	}
	return cells
}

func TestTroubleStaysWithItsShot(t *testing.T) {
	dir := newNight(t, 4)
	if err := os.WriteFile(filepath.Join(dir, "shot_5.fits"), []byte("no camera wrote this"), 0o644); err != nil {
		t.Fatal(err)
	}
	f := fake{before: func(_ context.Context, shot string) error {
		switch shot {
		case "2000":
			return errors.New("no\nminimum")
		case "3000":
			panic("assignment to entry in nil map")
		}
		return nil
	}}
	for _, again := range []bool{false, true} {
		out, table := mustBatch(t, &f, Options{Dir: dir, Again: again})
		equal(t, "failed", out.Failed, 3)
		reasons := map[string]string{}
		for _, r := range out.Rows {
			reasons[r.Shot] = r.Reason
		}
		equal(t, "no reason", reasons["shot_1"]+reasons["shot_4"], "")
		equal(t, "error", reasons["shot_2"], "no minimum")
		for shot, want := range map[string][]string{
			"shot_3": {"internal error", "night.TestTrouble", "nil map", "please report"},
			"shot_5": {"shot_5.fits: "},
		} {
			for _, part := range want {
				if !strings.Contains(reasons[shot], part) {
					t.Errorf("the reason of %s is %q, without %q", shot, reasons[shot], part)
				}
			}
		}
		equal(t, "lines", strings.Count(table, "\n"), 6)
	}
	// A shot that failed and has not changed is not tried again, and leaves no history.
	f.fitted()
	mustBatch(t, &f, Options{Dir: dir})
	equal(t, "fitted", f.fitted(), none)
	r, err := ledger.OpenReader(context.Background(), filepath.Join(filepath.Dir(dir), "results"))
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	for _, shot := range []string{"shot_2", "shot_5"} {
		if kept, err := r.History(context.Background(), shot); err != nil || len(kept) != 0 {
			t.Errorf("%d rows in the history of %s (%v)", len(kept), shot, err)
		}
	}
}

func TestNoShotCanBeRead(t *testing.T) {
	dir := t.TempDir()
	if err := os.WriteFile(filepath.Join(dir, "a.fits"), []byte("x"), 0o644); err != nil {
		t.Fatal(err)
	}
	out, err := Batch(context.Background(), Options{Dir: dir, Out: filepath.Join(t.TempDir(), "r"), Settings: lab(t, "")}, silent{})
	if err != nil || out.Failed != 1 || len(out.Rows) != 1 {
		t.Errorf("%+v, %v", out, err)
	}
}

func TestNoShots(t *testing.T) {
	dir := t.TempDir()
	if err := os.WriteFile(filepath.Join(dir, "notes.txt"), []byte("dear diary"), 0o644); err != nil {
		t.Fatal(err)
	}
	results := filepath.Join(t.TempDir(), "r")
	_, err := Batch(context.Background(), Options{Dir: dir, Out: results, Settings: lab(t, "")}, silent{})
	if err == nil || !strings.Contains(err.Error(), "no shots") || !strings.Contains(err.Error(), "notes.txt") {
		t.Errorf("%v", err)
	}
	if _, err := os.Stat(results); err == nil {
		t.Error("a folder of results was made")
	}
}

// What was fitted before an interruption is kept, what was not goes on later.
func TestInterruption(t *testing.T) {
	dir := newNight(t, 6)
	var f fake
	_, want := mustBatch(t, &f, Options{Dir: dir, Out: filepath.Join(t.TempDir(), "undisturbed"), Settings: lab(t, "[probe]\nalpha = 2.0")})

	mustBatch(t, &f, Options{Dir: dir, Workers: 1}) // with other settings: rows that will be stale
	f.fitted()
	ctx, stop := context.WithCancel(context.Background())
	var n atomic.Int32
	f.before = func(ctx context.Context, _ string) error {
		if n.Add(1) == 3 {
			stop()
			return ctx.Err()
		}
		return nil
	}
	o := Options{Dir: dir, Workers: 1, Settings: lab(t, "[probe]\nalpha = 2.0")}
	out, table, err := batchOf(t, ctx, &f, o)
	if !errors.Is(err, context.Canceled) {
		t.Fatalf("got %v, want that the context was cancelled", err)
	}
	equal(t, "fitted", f.fitted(), []string{"1000", "2000"})
	equal(t, "counts", []int{out.Fitted, len(out.Rows), strings.Count(table, ",stale,")}, []int{2, 6, 4})

	f.before = nil
	_, table = mustBatch(t, &f, o)
	equal(t, "fitted later", f.fitted(), []string{"3000", "4000", "5000", "6000"})
	equal(t, "table", table, want)
}

func TestRegionsDrawnByHand(t *testing.T) {
	ctx := context.Background()
	dir := newNight(t, 4)
	var f fake
	o := Options{Dir: dir}
	out, plain := mustBatch(t, &f, o)
	f.fitted()
	root, err := filepath.EvalSymlinks(dir)
	if err != nil {
		t.Fatal(err)
	}
	l, err := ledger.Open(ctx, out.Dir, root, nil)
	if err != nil {
		t.Fatal(err)
	}
	if err := l.SetRegion(ctx, ledger.Region{First: "shot_3", X0: 2, Y0: 3, X1: 10, Y1: 9}); err != nil {
		t.Fatal(err)
	}
	l.Close()

	f.prepared = nil
	out, drawn := mustBatch(t, &f, o)
	equal(t, "fitted", f.fitted(), []string{"3000", "4000"})
	equal(t, "regions", f.prepared, []image.Rectangle{{}, image.Rect(2, 3, 10, 9)})
	var widths []float64
	for _, r := range out.Rows {
		widths = append(widths, r.Number("x_px"))
	}
	equal(t, "width used", widths, []float64{0, 0, 8, 8})
	_, again := mustBatch(t, &f, o)
	equal(t, "fitted again", f.fitted(), none)
	equal(t, "table again", again, drawn)
	o.OwnRegion = true
	_, without := mustBatch(t, &f, o)
	equal(t, "fitted without", f.fitted(), []string{"3000", "4000"})
	equal(t, "table without", without, plain)
}

// TestManyRegions: of many drawn regions few are kept ready; the others are made ready again,
// and the table is that of any number of workers. What is wrong with a dark is said once.
func TestManyRegions(t *testing.T) {
	ctx := context.Background()
	dir := newNight(t, 6)
	writeShot(t, dir, "dark/a", 90, 91, 92)
	if err := os.WriteFile(filepath.Join(dir, "dark", "b.fits"), []byte("x"), 0o644); err != nil {
		t.Fatal(err)
	}
	root, err := filepath.EvalSymlinks(dir)
	if err != nil {
		t.Fatal(err)
	}
	regions := []image.Rectangle{{}}
	results := filepath.Join(t.TempDir(), "results")
	l, err := ledger.Open(ctx, results, root, nil)
	if err != nil {
		t.Fatal(err)
	}
	for i := 1; i <= 6; i++ {
		if err := l.SetRegion(ctx, ledger.Region{First: fmt.Sprint("shot_", i), X0: 0, Y0: 0, X1: i + 5, Y1: 9}); err != nil {
			t.Fatal(err)
		}
		regions = append(regions, image.Rect(0, 0, i+5, 9))
	}
	l.Close()

	var f fake
	o := Options{Dir: dir, Out: results, Workers: 1, Settings: lab(t, "[shots]\ndark_files = [\"dark/*.fits\"]")}
	out, want := mustBatch(t, &f, o)
	backwards := slices.Clone(regions[1:])
	slices.Reverse(backwards)
	equal(t, "prepared", f.prepared, slices.Concat(regions[:1], backwards, regions[1+keptBenches:]))
	equal(t, "strays", len(out.Strays), 1)
	var widths []float64
	for _, r := range out.Rows {
		widths = append(widths, r.Number("x_px"))
	}
	equal(t, "width used", widths, []float64{6, 7, 8, 9, 10, 11})
	o.Workers, o.Again = 3, true
	out, table := mustBatch(t, &f, o)
	equal(t, "table of three workers", table, want)
	equal(t, "strays of three workers", len(out.Strays), 1)
	equal(t, "fitted again", out.Fitted, 6)
}

func TestProvisionalRowsAreMadeFinal(t *testing.T) {
	ctx := context.Background()
	dir := newNight(t, 2)
	var f fake
	out, want := mustBatch(t, &f, Options{Dir: dir})
	f.fitted()
	root, err := filepath.EvalSymlinks(dir)
	if err != nil {
		t.Fatal(err)
	}
	l, err := ledger.Open(ctx, out.Dir, root, nil)
	if err != nil {
		t.Fatal(err)
	}
	r := out.Rows[1]
	r.Provisional = true
	r.SetNumber("atoms", 1)
	if err := l.Put(ctx, &r); err != nil {
		t.Fatal(err)
	}
	l.Close()
	_, table := mustBatch(t, &f, Options{Dir: dir})
	equal(t, "fitted", f.fitted(), []string{"2000"})
	equal(t, "table", table, want)
}

func TestNightOfALedger(t *testing.T) {
	dir, other := newNight(t, 2), newNight(t, 3)
	writeShot(t, other, "shot_1", 7, 7, 7)
	writeShot(t, other, "shot_2", 8, 8, 8)
	var f fake
	out, want := mustBatch(t, &f, Options{Dir: dir})
	f.fitted()
	_, _, err := batchOf(t, context.Background(), &f, Options{Dir: other, Out: out.Dir})
	if refused := (*ledger.OtherNightError)(nil); !errors.As(err, &refused) {
		t.Errorf("another night: %v", err)
	}
	moved := filepath.Join(t.TempDir(), "elsewhere")
	if err := os.Rename(dir, moved); err != nil {
		t.Fatal(err)
	}
	_, table := mustBatch(t, &f, Options{Dir: moved, Out: out.Dir})
	equal(t, "fitted after the night has moved", f.fitted(), none)
	equal(t, "table", table, want)
}

// A file that changes between the first look and its fit is not fitted as what it was.
func TestShotChangesMeanwhile(t *testing.T) {
	dir := newNight(t, 3)
	var f fake
	f.before = func(_ context.Context, shot string) error {
		if shot == "1000" {
			writeShot(t, dir, "shot_3", 3333, 2003, 100)
		}
		return nil
	}
	out, _ := mustBatch(t, &f, Options{Dir: dir, Workers: 1})
	if reason := out.Rows[2].Reason; !strings.Contains(reason, "shot_3 was changed") {
		t.Errorf("the reason is %q", reason)
	}
	f.fitted()
	f.before = nil
	out, _ = mustBatch(t, &f, Options{Dir: dir})
	equal(t, "fitted later", f.fitted(), []string{"3333"})
	equal(t, "failed later", out.Failed, 0)
}

func TestDarksOfTheNight(t *testing.T) {
	dir := newNight(t, 2)
	more := "[shots]\ndark_files = [\"dark/*.fits\"]"
	writeShot(t, dir, "dark/a", 90, 91, 92)
	var f fake
	o := Options{Dir: dir, Settings: lab(t, more)}
	out, _ := mustBatch(t, &f, o)
	equal(t, "rows", len(out.Rows), 2)
	f.fitted()
	writeShot(t, dir, "dark/a", 90, 91, 93)
	if err := os.WriteFile(filepath.Join(dir, "dark", "b.fits"), []byte("x"), 0o644); err != nil {
		t.Fatal(err)
	}
	out, _ = mustBatch(t, &f, o)
	equal(t, "fitted after a dark has changed", f.fitted(), []string{"1000", "2000"})
	if len(out.Strays) != 1 || !strings.Contains(out.Strays[0].Reason, "not used as dark") {
		t.Errorf("the broken dark: %v", out.Strays)
	}
}

func TestResults(t *testing.T) {
	for dir, want := range map[string]string{"a/night": "results/night", "a/night/": "results/night", "/": ""} {
		got, err := Results(dir)
		if filepath.ToSlash(got) != want || (err == nil) != (want != "") {
			t.Errorf("results of %s in %q (%v), want %q", dir, got, err, want)
		}
	}
}

func TestInOrder(t *testing.T) {
	for _, workers := range []int{1, 2, 5} {
		var running, most atomic.Int32
		var got []int
		for i, v := range inOrder(20, workers, func(i int) int {
			most.Store(max(most.Load(), running.Add(1)))
			defer running.Add(-1)
			return i * i
		}) {
			if v != i*i {
				t.Fatalf("%d workers: place %d holds %d", workers, i, v)
			}
			got = append(got, i)
			if i == 12 {
				break
			}
		}
		if len(got) != 13 || !slices.IsSorted(got) {
			t.Errorf("%d workers: %v", workers, got)
		}
		if n := running.Load(); n != 0 {
			t.Errorf("%d workers: %d calls still run", workers, n)
		}
		if n := int(most.Load()); n > workers {
			t.Errorf("%d workers: %d calls ran at once", workers, n)
		}
	}
}
