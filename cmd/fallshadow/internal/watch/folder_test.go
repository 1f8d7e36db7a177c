package watch

import (
	"bytes"
	"context"
	"database/sql"
	"fmt"
	"image"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
)

func read(t *testing.T, file string) []byte {
	t.Helper()
	data, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	return data
}

// nightWith makes a night with the demo's settings and the given shots of it.
func nightWith(t *testing.T, shots ...string) string {
	t.Helper()
	dir := filepath.Join(t.TempDir(), "night")
	for _, n := range shots {
		copyFile(t, shotFile(n), filepath.Join(dir, "ramp_000"+n+".fits"))
	}
	lab(t, dir)
	return dir
}

func said(h *hall, part string) func() bool {
	return func() bool {
		return slices.ContainsFunc(h.all, func(n string) bool { return strings.Contains(n, part) })
	}
}

// A file that grows, one made in its final size and filled in pieces, and one renamed from
// a temporary name each give one right row.
func TestHalfWrittenFiles(t *testing.T) {
	dir := nightWith(t, "1")
	h := newHall()
	w, _ := run(t, Options{Dir: dir}, h)
	h.until(t, "the first", h.seen(1))
	data := read(t, shotFile("2"))
	pieces := func(f *os.File, from int) {
		for at := from; at < len(data); at += 30000 {
			if _, err := f.WriteAt(data[at:min(at+30000, len(data))], int64(at)); err != nil {
				t.Error(err)
			}
			time.Sleep(60 * time.Millisecond)
		}
		f.Close()
	}
	grows, err := os.Create(filepath.Join(dir, "grows.fits"))
	if err != nil {
		t.Fatal(err)
	}
	full, err := os.Create(filepath.Join(dir, "full.fits"))
	if err != nil {
		t.Fatal(err)
	}
	if err := full.Truncate(int64(len(data))); err != nil {
		t.Fatal(err)
	}
	pieces(grows, 0)
	pieces(full, 0)
	write(t, filepath.Join(dir, "moved.fits.part"), data)
	if err := os.Rename(filepath.Join(dir, "moved.fits.part"), filepath.Join(dir, "moved.fits")); err != nil {
		t.Fatal(err)
	}
	h.until(t, "three more", h.seen(4))
	want := rowsOf(t, w)[slices.Index(names(rowsOf(t, w)), "moved")]
	if want.Reason != "" {
		t.Error(want.Reason)
	}
	h.until(t, "their pixels", func() bool { // a pause of the writer may look like the end
		return !slices.ContainsFunc(rowsOf(t, w), func(r ledger.Row) bool {
			return r.Shot != "ramp_0001" && (r.Content != want.Content || r.Reason != "")
		})
	})
	for _, name := range []string{"grows", "moved"} {
		if n := len(h.rows[name]); n != 1 {
			t.Errorf("%s was stored %d times", name, n)
		}
	}
}

// A file system that knows seconds alone gives a file that is filled in pieces the same time twice:
// the shot is read once more when that time is over.
func TestCoarseTimes(t *testing.T) {
	for !coarseTimes(t) {
		t.Log("this machine paused until the time was over: again")
	}
}

// coarseTimes reports whether the file was filled before the time was over.
func coarseTimes(t *testing.T) bool {
	dir := nightWith(t)
	h := newHall()
	w, stop := run(t, Options{Dir: dir}, h)
	defer stop()
	h.until(t, "the watch", w.isReady)
	begin := time.Now()
	put := func(n string) {
		file := filepath.Join(t.TempDir(), "x")
		copyFile(t, shotFile(n), file)
		date(t, file, begin.Truncate(time.Second))
		if err := os.Rename(file, filepath.Join(dir, "ramp_0001.fits")); err != nil {
			t.Fatal(err)
		}
	}
	put("2")
	h.until(t, "the first to be read", func() bool { _, ok := w.desk.frame(); return ok })
	put("5")
	if time.Since(begin) >= coarseTick {
		return false
	}
	h.until(t, "the second", func() bool {
		l := h.rows["ramp_0001"]
		return len(l) > 0 && l[len(l)-1].Number("fraction") > 0.3
	})
	h.until(t, "rest", func() bool { _, waits, _ := w.roll.patience(); return waits+w.queue.waiting()+w.roll.inWork() == 0 })
	if n := len(h.rows["ramp_0001"]); n != 2 {
		t.Errorf("it was stored %d times", n)
	}
	return true
}

// A file that contradicts its format is waited for, then reported; when it is written
// anew its row is a good one.
func TestBrokenFileIsReported(t *testing.T) {
	dir := nightWith(t, "1")
	data := read(t, shotFile("2"))
	wrong := bytes.Replace(data, []byte("BITPIX  =                   16"), []byte("BITPIX  =                   17"), 1)
	write(t, filepath.Join(dir, "ramp_0002.fits"), wrong)
	h := newHall()
	w, _ := run(t, Options{Dir: dir}, h)
	h.until(t, "the broken one", func() bool { return len(h.rows["ramp_0002"]) > 0 })
	r, err := w.Row(context.Background(), "ramp_0002")
	if err != nil || r == nil || !strings.Contains(r.Reason, "BITPIX") || strings.Contains(r.Reason, dir) {
		t.Fatalf("%v, %v", r, err)
	}
	write(t, filepath.Join(dir, "ramp_0002.fits"), data)
	h.until(t, "the good one", func() bool { l := h.rows["ramp_0002"]; return l[len(l)-1].Reason == "" })
}

// A renamed shot keeps its row and is not fitted again; a shot that is deleted leaves the
// table; one that is written anew is fitted again.
func TestRenamedDeletedRewritten(t *testing.T) {
	dir := nightWith(t, "1", "2", "3")
	h := newHall()
	w, _ := run(t, Options{Dir: dir}, h)
	h.until(t, "three", h.seen(3))
	if err := os.Rename(filepath.Join(dir, "ramp_0003.fits"), filepath.Join(dir, "ramp_0008.fits")); err != nil {
		t.Fatal(err)
	}
	if err := os.Remove(filepath.Join(dir, "ramp_0001.fits")); err != nil {
		t.Fatal(err)
	}
	h.until(t, "the new name", func() bool { return slices.Equal(names(rowsOf(t, w)), []string{"ramp_0002", "ramp_0008"}) })
	if len(h.rows["ramp_0008"]) != 0 {
		t.Error("the renamed shot was fitted again")
	}
	copyFile(t, shotFile("5"), filepath.Join(dir, "ramp_0002.fits"))
	h.until(t, "the new pixels", func() bool { return len(h.rows["ramp_0002"]) == 2 })
	if a, b := h.rows["ramp_0002"][0], h.rows["ramp_0002"][1]; a.Content == b.Content {
		t.Error("the row did not change")
	}
}

// Folder, then settings may come later; what is waited for is said.
func TestFolderAppearsLater(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "night")
	h := newHall()
	_, _ = run(t, Options{Dir: dir}, h)
	h.until(t, "word of the folder", said(h, "to appear"))
	copyFile(t, shotFile("1"), filepath.Join(dir, "ramp_0001.fits"))
	h.until(t, "word of the settings", said(h, "waiting for settings"))
	lab(t, dir)
	h.until(t, "the shot", h.seen(1))
	if len(h.notes) != 0 {
		t.Errorf("still said: %q", h.notes)
	}
}

// Settings that change mark the older rows stale and hold from the next shot on; wrong
// ones are said and change nothing.
func TestSettingsChange(t *testing.T) {
	dir := nightWith(t, "1")
	file := filepath.Join(dir, settings.FileName)
	h := newHall()
	w, _ := run(t, Options{Dir: dir}, h)
	h.until(t, "the first", h.seen(1))
	text := string(read(t, file))
	save(t, file, []byte(strings.Replace(text, "magnification", "magnificence", 1)))
	h.until(t, "word of wrong settings", said(h, "magnificence"))
	save(t, file, []byte(strings.Replace(text, "value = 1.5, err = 0.04", "value = 3.0, err = 0.04", 1)))
	h.until(t, "new settings", said(h, "the settings are right again: probe.alpha 1.5 ± 0.04 -> 3.0 ± 0.04"))
	copyFile(t, shotFile("1"), filepath.Join(dir, "ramp_0002.fits"))
	h.until(t, "the second", h.seen(2))
	rows := rowsOf(t, w)
	if !rows[0].Stale || rows[1].Stale {
		t.Errorf("stale: %v, %v", rows[0].Stale, rows[1].Stale)
	}
	if got := report.Flags(&rows[0]); !slices.Contains(got, report.FlagStale) || !slices.Contains(got, report.FlagProvisional) {
		t.Errorf("flags %v", got)
	}
	if ratio := rows[1].Number("atoms") / rows[0].Number("atoms"); !(ratio > 1.3 && ratio < 2) {
		t.Errorf("alpha twice as large gives %.3f times the atoms", ratio)
	}
}

// A region that a person draws holds from the next shot on, is stored with it, and a shot
// that comes late but belongs before is fitted as the others before it.
func TestRegionHoldsFromTheNextShot(t *testing.T) {
	dir := nightWith(t)
	h := newHall()
	w, stop := run(t, Options{Dir: dir}, h)
	h.until(t, "the watch", w.isReady)
	if err := w.Draw(image.Rect(0, 0, 100, 100)); err == nil {
		t.Error("a region was drawn before any shot")
	}
	for _, n := range []string{"1", "2"} {
		copyFile(t, shotFile(n), filepath.Join(dir, "ramp_000"+n+".fits"))
	}
	h.until(t, "two", h.seen(2))
	if err := w.Draw(image.Rect(3, 3, 9, 9)); err == nil {
		t.Error("a tiny region was taken")
	}
	region := image.Rect(20, 10, 140, 140)
	if err := w.Draw(region); err != nil {
		t.Fatal(err)
	}
	if now, next := w.Region(); now != nil || next == nil || *next != region {
		t.Errorf("regions %v, %v", now, next)
	}
	if want := "a region was drawn at the page: x 20 to 140, y 10 to 140; it holds from the next shot on, the first after ramp_0002"; !slices.Equal(h.heard, []string{want}) {
		t.Errorf("said %q", h.heard)
	}
	copyFile(t, shotFile("3"), filepath.Join(dir, "ramp_0001b.fits"))
	h.until(t, "the late one", h.seen(3))
	const waits = "the region drawn at the page waits for a shot whose name sorts behind ramp_0002, as that of ramp_0001b does not"
	h.until(t, "word that it waits still", func() bool { return slices.Equal(h.notes, []string{waits}) })
	copyFile(t, shotFile("4"), filepath.Join(dir, "ramp_0004.fits"))
	h.until(t, "the next", func() bool { return h.pictures["ramp_0004"] != nil && h.pictures["ramp_0001b"] != nil })
	if r := h.pictures["ramp_0001b"].Region; r != image.Rect(0, 0, 160, 144) {
		t.Errorf("the late shot was fitted in %v", r)
	}
	if r := h.pictures["ramp_0004"].Region; r != region {
		t.Errorf("the next shot was fitted in %v", r)
	}
	if now, next := w.Region(); now == nil || *now != region || next != nil {
		t.Errorf("regions %v, %v", now, next)
	}
	h.until(t, "no word of it any more", func() bool { return len(h.notes) == 0 })
	for _, r := range rowsOf(t, w) {
		if r.Stale {
			t.Errorf("%s is stale", r.Shot)
		}
		if drawn := w.Drawn(&r); (drawn == "used") != (r.Shot == "ramp_0004") || drawn != "used" && drawn != "" {
			t.Errorf("%s is %q in the region", r.Shot, drawn)
		}
	}
	if err := w.Draw(image.Rect(0, 0, 50, 50)); err != nil {
		t.Fatal(err)
	}
	w.Undraw()
	w.Undraw() // there is none any more
	if n := len(h.heard); n != 3 || h.heard[2] != "the region that waited for the next shot was taken back at the page" {
		t.Errorf("said %q", h.heard)
	}
	stop()
	l, err := ledger.OpenReader(context.Background(), w.Out)
	if err != nil {
		t.Fatal(err)
	}
	defer l.Close()
	regions, err := l.Regions(context.Background())
	if err != nil || len(regions) != 1 || regions[0] != (ledger.Region{First: "ramp_0004", X0: 20, Y0: 10, X1: 140, Y1: 140}) {
		t.Errorf("stored %v, %v", regions, err)
	}
}

// After a batch that left the drawn regions out a watch says so of its rows, and shows them as
// they were fitted; of rows of other settings it does not know.
func TestRegionLeftOut(t *testing.T) {
	ctx, dir := context.Background(), nightWith(t, "4", "5")
	h := newHall()
	w, stop := run(t, Options{Dir: dir}, h)
	h.until(t, "two", h.seen(2))
	if err := w.Draw(image.Rect(20, 10, 140, 140)); err != nil {
		t.Fatal(err)
	}
	copyFile(t, shotFile("6"), filepath.Join(dir, "ramp_0006.fits"))
	h.until(t, "the next", func() bool { return h.pictures["ramp_0006"] != nil })
	stop()
	lab, err := settings.Load(filepath.Join(dir, settings.FileName))
	if err != nil {
		t.Fatal(err)
	}
	if _, err := night.Batch(ctx, night.Options{Dir: dir, Out: w.Out, Settings: lab, Workers: 1, OwnRegion: true}, quiet{}); err != nil {
		t.Fatal(err)
	}
	h = newHall()
	w, _ = run(t, Options{Dir: dir, Out: w.Out}, h)
	h.until(t, "the rows", func() bool { r, err := w.Row(ctx, "ramp_0006"); return err == nil && r != nil })
	r, err := w.Row(ctx, "ramp_0006")
	if err != nil || w.Drawn(r) != "left out" {
		t.Fatalf("the region is %q, %v", w.Drawn(r), err)
	}
	var f *report.Facts
	h.until(t, "the shot", func() bool { f, _, err = w.Measure(ctx, "ramp_0006"); return err == nil })
	if f.Region != image.Rect(0, 0, 160, 144) {
		t.Errorf("it is shown in %v", f.Region)
	}
	r.Currency.Settings[0]++
	if got := w.Drawn(r); got != "unknown" {
		t.Errorf("with other settings the region is %q", got)
	}
}

// A verdict is stored, shown, follows a renamed shot and can be taken back.
func TestVerdict(t *testing.T) {
	ctx, dir := context.Background(), nightWith(t, "1", "2")
	h := newHall()
	w, _ := run(t, Options{Dir: dir}, h)
	h.until(t, "two", h.seen(2))
	if err := w.Judge(ctx, "ramp_0002", "laser unlocked"); err != nil {
		t.Fatal(err)
	}
	if err := os.Rename(filepath.Join(dir, "ramp_0002.fits"), filepath.Join(dir, "ramp_0007.fits")); err != nil {
		t.Fatal(err)
	}
	bad := func(shot, word string) func() bool {
		return func() bool { r, err := w.Row(ctx, shot); return err == nil && r != nil && r.Bad == word }
	}
	h.until(t, "the word under the new name", bad("ramp_0007", "laser unlocked"))
	if err := w.Judge(ctx, "ramp_0007", ""); err != nil {
		t.Fatal(err)
	}
	h.until(t, "the word taken back", bad("ramp_0007", ""))
	h.until(t, "two lines", func() bool { return len(h.heard) == 2 })
	if h.heard[0] != "ramp_0002 was marked as bad at the page: laser unlocked" || h.heard[1] != "ramp_0007 is no longer marked as bad, by a person at the page" {
		t.Errorf("said %q", h.heard)
	}
	if err := w.Judge(ctx, "ramp_9999", "x"); err == nil {
		t.Error("a shot that is not there was judged")
	}
}

type quiet struct{}

func (quiet) Begin(string, int) {}
func (quiet) Step(string, bool) {}
func (quiet) End()              {}

// The table of a batch after a watch is that of a batch alone, drawn regions included.
func TestBatchMakesRowsFinal(t *testing.T) {
	ctx, dir := context.Background(), nightWith(t, "1", "2")
	h := newHall()
	w, stop := run(t, Options{Dir: dir}, h)
	h.until(t, "two", h.seen(2))
	copyFile(t, shotFile("6"), filepath.Join(dir, "ramp_0006.fits"))
	h.until(t, "three", h.seen(3))
	stop()
	s, err := settings.Load(filepath.Join(dir, settings.FileName))
	if err != nil {
		t.Fatal(err)
	}
	table := func(out string) string {
		if _, err := night.Batch(ctx, night.Options{Dir: dir, Out: out, Settings: s}, quiet{}); err != nil {
			t.Fatal(err)
		}
		return string(read(t, filepath.Join(out, report.CSVName)))
	}
	watched, alone := table(w.Out), table(filepath.Join(t.TempDir(), "alone"))
	if watched != alone || strings.Contains(watched, "provisional") {
		t.Errorf("after a watch\n%s\nalone\n%s", watched, alone)
	}
}

// A second watch stops at once and says who writes.
func TestOneWriter(t *testing.T) {
	dir := nightWith(t, "1")
	h := newHall()
	w, _ := run(t, Options{Dir: dir}, h)
	h.until(t, "the first", h.seen(1))
	second, err := New(Options{Dir: dir, Out: w.Out}, newHall())
	if err != nil {
		t.Fatal(err)
	}
	if err := second.Run(context.Background()); err == nil || !strings.Contains(err.Error(), "is writing the ledger") {
		t.Errorf("the second watch: %v", err)
	}
}

// Shots that are there in number are fitted from the newest to the oldest, and it is said
// that they wait; none is left out.
func TestNewestFirst(t *testing.T) {
	dir := nightWith(t, "1", "2", "3", "4", "5", "6", "7", "8", "9")
	h := newHall()
	run(t, Options{Dir: dir, Workers: 1}, h)
	h.until(t, "all nine", h.seen(9))
	var want []string
	for i := 9; i >= 1; i-- {
		want = append(want, fmt.Sprintf("ramp_%04d", i))
	}
	if !slices.Equal(h.order, want) {
		t.Errorf("fitted in the order %v", h.order)
	}
	h.until(t, "word that they waited, and that it is over", func() bool { return said(h, "the newest go first")() && len(h.notes) == 0 })
}

// A shot that is renamed, and one that is deleted, while nobody watches: the row of the first goes by
// its new name, that of the second is not of the night.
func TestRenamedBetweenWatches(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "night")
	for _, n := range []string{"1", "2", "3"} {
		copyFile(t, shotFile(n), filepath.Join(dir, "ramp_000"+n+".fits"))
	}
	lab(t, dir)
	h := newHall()
	w, stop := run(t, Options{Dir: dir}, h)
	h.until(t, "three shots", h.seen(3))
	stop()
	if err := os.Rename(filepath.Join(dir, "ramp_0002.fits"), filepath.Join(dir, "ramp_0009.fits")); err != nil {
		t.Fatal(err)
	}
	if err := os.Remove(filepath.Join(dir, "ramp_0003.fits")); err != nil {
		t.Fatal(err)
	}
	again := newHall()
	w, _ = run(t, Options{Dir: dir, Out: w.Out}, again)
	again.until(t, "the rows of what is there", func() bool { return slices.Equal(names(rowsOf(t, w)), []string{"ramp_0001", "ramp_0009"}) })
	if len(again.order) > 0 {
		t.Errorf("%v were fitted again", again.order)
	}
}

// Pixels that come a second time, under a name that sorts before the first, make the first shot
// the duplicate; other pixels under one of the names make it none. Who shows it is told.
func TestDuplicateComesBefore(t *testing.T) {
	dir := nightWith(t, "1", "5")
	h := newHall()
	w, _ := run(t, Options{Dir: dir}, h)
	h.until(t, "two", h.seen(2))
	changed := 0
	duplicate := func(of string) func() bool {
		return func() bool {
			r, err := w.Row(context.Background(), "ramp_0005")
			return err == nil && r.Duplicate == of && h.changed > changed
		}
	}
	h.until(t, "the start", duplicate(""))
	time.Sleep(2 * settle)
	h.mu.Lock()
	changed = h.changed
	h.mu.Unlock()
	copyFile(t, shotFile("5"), filepath.Join(dir, "ramp_0003.fits"))
	h.until(t, "a duplicate, and word of it", duplicate("ramp_0003"))
	h.mu.Lock()
	changed = h.changed
	h.mu.Unlock()
	copyFile(t, shotFile("6"), filepath.Join(dir, "ramp_0003.fits"))
	h.until(t, "none, and word of it", duplicate(""))
}

// Shots that leave and come back as they were, as with a share that is away for a moment, keep
// their rows, while the watch runs and over a restart.
func TestShotsComeBack(t *testing.T) {
	for name, restart := range map[string]bool{"running": false, "restarted": true} {
		t.Run(name, func(t *testing.T) {
			dir := nightWith(t, "1", "2", "3", "4", "5")
			h := newHall()
			w, stop := run(t, Options{Dir: dir}, h)
			h.until(t, "five", h.seen(5))
			move := func(from, to string) {
				t.Helper()
				files, err := filepath.Glob(filepath.Join(from, "*.fits"))
				if err != nil || len(files) != 5 {
					t.Fatalf("%v, %v", files, err)
				}
				for _, f := range files {
					if err := os.Rename(f, filepath.Join(to, filepath.Base(f))); err != nil {
						t.Fatal(err)
					}
				}
			}
			away := t.TempDir()
			move(dir, away)
			h.until(t, "no row", func() bool { return len(rowsOf(t, w)) == 0 })
			if restart {
				stop()
				w, _ = run(t, Options{Dir: dir, Out: w.Out}, h)
				h.until(t, "the start", w.isReady)
			}
			move(away, dir)
			h.until(t, "five rows", func() bool { return len(rowsOf(t, w)) == 5 })
			copyFile(t, shotFile("6"), filepath.Join(dir, "ramp_0006.fits"))
			h.until(t, "the next", h.seen(6))
			h.until(t, "rest", func() bool {
				_, waits, _ := w.roll.patience()
				return waits+w.queue.waiting()+w.roll.inWork() == 0
			})
			if len(h.order) != 6 {
				t.Errorf("fitted were %v", h.order)
			}
		})
	}
}

// A shot that left the folder while the ledger could not be written leaves the table once it
// can, and the note goes with its cause.
func TestLedgerInLineLater(t *testing.T) {
	dir := nightWith(t, "1", "2")
	h := newHall()
	w, _ := run(t, Options{Dir: dir}, h)
	h.until(t, "two", h.seen(2))
	db, err := sql.Open("sqlite", filepath.Join(w.Out, ledger.Name)+"?_pragma=busy_timeout(60000)")
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	change := func(query string) {
		t.Helper()
		if _, err := db.Exec(query); err != nil {
			t.Fatal(err)
		}
	}
	change("CREATE TRIGGER full BEFORE UPDATE ON row BEGIN SELECT RAISE(ABORT, 'the disk is full'); END")
	if err := os.Remove(filepath.Join(dir, "ramp_0001.fits")); err != nil {
		t.Fatal(err)
	}
	h.until(t, "word of it", said(h, "the disk is full"))
	change("DROP TRIGGER full")
	h.until(t, "one row and no note", func() bool {
		return slices.Equal(names(rowsOf(t, w)), []string{"ramp_0002"}) && len(h.notes) == 0
	})
}
