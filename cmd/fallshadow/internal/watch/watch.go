// Package watch fits the shots of a night while it is being taken: it finds files as they
// arrive, reads them once they are whole, measures the newest first, and stores every shot
// in the ledger that a batch uses, as a provisional row. It tells an Audience what there is
// to see, and takes what a person says of shots and regions.
package watch

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"
	"runtime"
	"sync"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/imageio"
)

// Options say what to watch.
type Options struct {
	Dir      string // the night; it may appear later
	Out      string // folder of the results, empty for that of night.Results
	Settings string // file of the settings, empty for that in the night's folder
	Workers  int    // 0 for one a processor
	Poll     time.Duration
	// NoEvents leaves all to polling.
	NoEvents bool
	// Begun, if there is one, is called once, before anything is told: when the ledger is
	// held, or when the watch has to wait for folder or settings. An error ends the watch.
	Begun func() error
}

// Audience is told what happens. Its methods may be called from several goroutines and
// must not block for long.
type Audience interface {
	// Row tells of a row that was stored.
	Row(r *ledger.Row)
	// Picture tells what the shot looks like; it comes after the row.
	Picture(shot string, f *report.Facts, raw *imageio.Raw)
	// Changed says that rows changed in another way, so that all are to be read again.
	Changed()
	// Heard tells what a person said on the page.
	Heard(text string)
	// Notes says what a person should know now, nothing where all is well.
	Notes(notes []string)
}

// Watcher watches a night. Make it with New, then Run it; the other methods may be called
// at any time from any goroutine.
type Watcher struct {
	Options
	audience Audience

	root  string // absolute path of the night without links
	store *ledger.Ledger
	roll  *roll
	queue *queue
	desk  *desk
	ready chan struct{} // closed when the fields above are there
	table chan struct{} // asks for the table to be written
	notes notes

	sheet    sheet     // this and the next three belong to who scans
	taken    time.Time // when settings were put in force, as long as a note says so
	objected bool      // a note says that settings are wrong or gone
	owed     bool      // the ledger is not in line with the folder yet

	mu      sync.Mutex
	lab     *settings.Settings
	regions []ledger.Region
	drawn   *drawing // a region that waits for its first shot
}

// New returns a watcher that does nothing yet. Options are completed.
func New(o Options, a Audience) (*Watcher, error) {
	if o.Out == "" {
		var err error
		if o.Out, err = night.Results(o.Dir); err != nil {
			return nil, err
		}
	}
	if o.Workers <= 0 {
		o.Workers = runtime.NumCPU()
	}
	if o.Poll <= 0 {
		o.Poll = 2 * time.Second
	}
	w := &Watcher{Options: o, audience: a, queue: newQueue(), ready: make(chan struct{}), table: make(chan struct{}, 1)}
	w.notes.told = a.Notes
	return w, nil
}

// Run watches until ctx is done, which is no error, and leaves ledger and table in order.
// It fails where the settings are wrong at the start, and where the ledger cannot be
// written.
func (w *Watcher) Run(ctx context.Context) (err error) {
	ctx, cancel := context.WithCancelCause(ctx)
	defer cancel(nil)
	if err := w.begin(ctx); err != nil {
		return orStopped(ctx, err)
	}
	defer func() { err = errors.Join(err, w.store.Close()) }()
	if err := w.begun(); err != nil {
		return err
	}
	close(w.ready)
	w.audience.Changed() // who looked before saw neither settings nor earlier rows
	w.askTable()         // the last watch may have been killed before it wrote it
	wake := w.wakes(ctx)
	var all sync.WaitGroup
	all.Go(func() { w.writeTables(ctx) })
	for range w.Workers {
		all.Go(func() {
			if err := w.work(ctx); err != nil {
				cancel(err)
			}
		})
	}
	w.scan(ctx, wake)
	w.queue.close()
	all.Wait()
	w.desk.wait()
	if cause := context.Cause(ctx); cause != nil && !errors.Is(cause, context.Canceled) {
		return cause
	}
	return w.writeTable(context.WithoutCancel(ctx))
}

// begun says that the watch goes on from here.
func (w *Watcher) begun() error {
	begun := w.Begun
	if w.Begun = nil; begun == nil {
		return nil
	}
	return begun()
}

// orStopped is err, or nothing where it only says that ctx is done.
func orStopped(ctx context.Context, err error) error {
	if ctx.Err() != nil {
		return nil
	}
	return err
}

// begin waits for the folder and its settings, opens the ledger and brings it in line.
func (w *Watcher) begin(ctx context.Context) error {
	if err := w.await(ctx); err != nil {
		return err
	}
	var err error
	if w.root, err = filepath.EvalSymlinks(w.Dir); err == nil {
		w.root, err = filepath.Abs(w.root)
	}
	if err != nil {
		return fmt.Errorf("find the night %s: %w", w.Dir, err)
	}
	if w.store, err = ledger.Open(ctx, w.Out, w.root, w.recognises(ctx)); err != nil {
		return err
	}
	if err := w.remember(ctx); err != nil {
		return errors.Join(err, w.store.Close())
	}
	w.desk = newDesk(ctx, w.lab, w.load, w.darks)
	return nil
}

// recognises returns what finds a shot of a ledger in this night, for a night that moved.
func (w *Watcher) recognises(ctx context.Context) func(string, ledger.Digest) bool {
	var shots map[string]imageio.Shot
	return func(name string, content ledger.Digest) bool {
		if shots == nil {
			shots = map[string]imageio.Shot{}
			scanned, _ := imageio.Scan(ctx, w.root, w.lab.Layout())
			for _, s := range scanned.Shots {
				shots[s.Name] = s
			}
		}
		s, ok := shots[name]
		if !ok {
			return false
		}
		raw, err := night.ReadShot(ctx, w.root, s, w.lab.Layout())
		if err != nil {
			raw = nil
		}
		found, _ := night.Contents(w.root, s, raw)
		return found.Same(content)
	}
}

// remember takes over what the ledger knows of the night.
func (w *Watcher) remember(ctx context.Context) error {
	rows, err := w.store.Rows(ctx)
	if err != nil {
		return err
	}
	seen, err := w.store.Sightings(ctx)
	if err != nil {
		return err
	}
	if w.regions, err = w.store.Regions(ctx); err != nil {
		return err
	}
	w.roll = newRoll(w.root, rows, seen)
	return nil
}
