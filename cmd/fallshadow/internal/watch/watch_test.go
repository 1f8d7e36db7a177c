package watch

import (
	"context"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/imageio"
)

// demo is the simulated night of the repository.
const demo = "../../../../testdata/night"

// hall is an audience that remembers.
type hall struct {
	mu       sync.Mutex
	rows     map[string][]ledger.Row // by shot, as told
	order    []string
	pictures map[string]*report.Facts
	changed  int
	heard    []string
	notes    []string
	all      []string // every note that ever was
	news     chan struct{}
}

func newHall() *hall {
	return &hall{rows: map[string][]ledger.Row{}, pictures: map[string]*report.Facts{}, news: make(chan struct{}, 1)}
}

func (h *hall) tell(f func()) {
	h.mu.Lock()
	f()
	h.mu.Unlock()
	select {
	case h.news <- struct{}{}:
	default:
	}
}

func (h *hall) Row(r *ledger.Row) {
	h.tell(func() { h.rows[r.Shot] = append(h.rows[r.Shot], *r); h.order = append(h.order, r.Shot) })
}
func (h *hall) Picture(shot string, f *report.Facts, _ *imageio.Raw) {
	h.tell(func() { h.pictures[shot] = f })
}
func (h *hall) Changed()          { h.tell(func() { h.changed++ }) }
func (h *hall) Heard(text string) { h.tell(func() { h.heard = append(h.heard, text) }) }
func (h *hall) Notes(n []string) {
	h.tell(func() { h.notes = n; h.all = append(h.all, n...) })
}

// until waits for a condition over what was told; it is looked at under the lock.
func (h *hall) until(t *testing.T, what string, ok func() bool) {
	t.Helper()
	deadline := time.After(60 * time.Second)
	for {
		h.mu.Lock()
		done := ok()
		h.mu.Unlock()
		if done {
			return
		}
		select {
		case <-h.news:
		case <-time.After(20 * time.Millisecond): // conditions outside the hall
		case <-deadline:
			t.Fatalf("waited in vain for: %s; rows of %v, notes %q", what, h.order, h.notes)
		}
	}
}

// seen reports whether rows of so many shots were told.
func (h *hall) seen(n int) func() bool { return func() bool { return len(h.rows) >= n } }

// lab puts the demo's settings into a folder.
func lab(t *testing.T, dir string) {
	t.Helper()
	save(t, filepath.Join(dir, "fallshadow.toml"), read(t, filepath.Join(demo, "fallshadow.toml")))
}

// save puts a file in its place whole: settings that are written there could be judged by
// their half where this machine pauses.
func save(t *testing.T, to string, data []byte) {
	t.Helper()
	whole := filepath.Join(t.TempDir(), "whole")
	write(t, whole, data)
	if err := os.MkdirAll(filepath.Dir(to), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.Rename(whole, to); err != nil {
		t.Fatal(err)
	}
}

func copyFile(t *testing.T, from, to string) {
	t.Helper()
	data, err := os.ReadFile(from)
	if err != nil {
		t.Fatal(err)
	}
	write(t, to, data)
}

func write(t *testing.T, to string, data []byte) {
	t.Helper()
	if err := os.MkdirAll(filepath.Dir(to), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(to, data, 0o644); err != nil {
		t.Fatal(err)
	}
}

func shotFile(n string) string { return filepath.Join(demo, "ramp_000"+n+".fits") }

// run starts a watcher and returns it with what stops it and waits for its end.
func run(t *testing.T, o Options, h *hall) (*Watcher, func()) {
	t.Helper()
	if o.Out == "" {
		o.Out = filepath.Join(filepath.Dir(o.Dir), "results")
	}
	if o.Poll == 0 {
		o.Poll = 200 * time.Millisecond
	}
	w, err := New(o, h)
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	end := make(chan error, 1)
	go func() { end <- w.Run(ctx) }()
	stop := sync.OnceFunc(func() {
		cancel()
		if err := <-end; err != nil {
			t.Errorf("watch ended with %v", err)
		}
	})
	t.Cleanup(stop)
	return w, stop
}

func names(rows []ledger.Row) (list []string) {
	for _, r := range rows {
		list = append(list, r.Shot)
	}
	return list
}

func rowsOf(t *testing.T, w *Watcher) []ledger.Row {
	t.Helper()
	var rows []ledger.Row
	for r, err := range w.Each(context.Background()) {
		if err != nil {
			t.Fatal(err)
		}
		rows = append(rows, *r)
	}
	return rows
}

// Shots that are there and shots that come are stored once, provisional, with a picture;
// a restart shows the last one and stores none again.
func TestShotsArrive(t *testing.T) {
	for name, events := range map[string]bool{"events": true, "polling": false} {
		t.Run(name, func(t *testing.T) {
			dir := filepath.Join(t.TempDir(), "night")
			for _, n := range []string{"1", "2"} {
				copyFile(t, shotFile(n), filepath.Join(dir, "ramp_000"+n+".fits"))
			}
			lab(t, dir)
			h := newHall()
			w, stop := run(t, Options{Dir: dir, NoEvents: !events}, h)
			h.until(t, "two shots", h.seen(2))
			copyFile(t, shotFile("3"), filepath.Join(dir, "ramp_0003.fits"))
			copyFile(t, shotFile("4"), filepath.Join(dir, "sub", "ramp_0004.fits"))
			h.until(t, "four shots and their pictures", func() bool { return len(h.rows) == 4 && len(h.pictures) == 4 })
			rows := rowsOf(t, w)
			if got := names(rows); !slices.Equal(got, []string{"ramp_0001", "ramp_0002", "ramp_0003", "sub/ramp_0004"}) {
				t.Errorf("rows of %v", got)
			}
			for _, r := range rows {
				if !r.Provisional || r.Stale || r.Reason != "" || r.Number("atoms") < 5e4 {
					t.Errorf("%s: provisional %v, stale %v, %q, N %g", r.Shot, r.Provisional, r.Stale, r.Reason, r.Number("atoms"))
				}
				if told := h.rows[r.Shot]; len(told) != 1 {
					t.Errorf("%s was told %d times", r.Shot, len(told))
				}
				if f := h.pictures[r.Shot]; f == nil || f.Fit.Maps == nil || f.Region.Dx() != f.Fit.Maps.Width {
					t.Errorf("%s has no picture", r.Shot)
				}
			}
			stop()
			table, err := os.ReadFile(filepath.Join(w.Out, report.CSVName))
			if err != nil || strings.Count(string(table), "\n") != 5 || !strings.Contains(string(table), "provisional") {
				t.Errorf("table after the end: %v\n%s", err, table)
			}
			again := newHall()
			w, _ = run(t, Options{Dir: dir, Out: w.Out, NoEvents: !events}, again)
			again.until(t, "the last one's picture", func() bool { return again.pictures["sub/ramp_0004"] != nil })
			copyFile(t, shotFile("5"), filepath.Join(dir, "ramp_0005.fits"))
			again.until(t, "the fifth", again.seen(1))
			if !slices.Equal(again.order, []string{"ramp_0005"}) {
				t.Errorf("after a restart %v were fitted", again.order)
			}
			if n := len(rowsOf(t, w)); n != 5 {
				t.Errorf("%d rows", n)
			}
		})
	}
}
