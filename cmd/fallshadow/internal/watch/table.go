package watch

import (
	"context"
	"fmt"
	"iter"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/report"
)

// tableEvery is how often the table is written at most.
const tableEvery = 5 * time.Second

func (w *Watcher) askTable() {
	select {
	case w.table <- struct{}{}:
	default:
	}
}

// writeTables writes the table when it is asked for, but not all the time, and again where
// that failed.
func (w *Watcher) writeTables(ctx context.Context) {
	for {
		select {
		case <-w.table:
		case <-ctx.Done():
			return
		}
		text := ""
		if err := w.writeTable(context.WithoutCancel(ctx)); err != nil {
			text = err.Error()
			w.askTable()
		}
		w.notes.set("table", text)
		if !pause(ctx, tableEvery) {
			return
		}
	}
}

func (w *Watcher) writeTable(ctx context.Context) error {
	return report.SaveEach(w.Out, w.Each(ctx), w.settings().Shots.Scan)
}

// isReady reports whether there is a ledger.
func (w *Watcher) isReady() bool {
	select {
	case <-w.ready:
		return true
	default:
		return false
	}
}

// Each yields the rows of the shots in the folder, in natural order, stale ones marked;
// none before the folder is there. An error ends it.
func (w *Watcher) Each(ctx context.Context) iter.Seq2[*ledger.Row, error] {
	return func(yield func(*ledger.Row, error) bool) {
		if !w.isReady() {
			return
		}
		now := w.staleness()
		for r, err := range w.store.Each(ctx) {
			if err == nil {
				now.Mark(r)
			}
			if !yield(r, err) {
				return
			}
		}
	}
}

// Row returns one of them, nil where there is none.
func (w *Watcher) Row(ctx context.Context, shot string) (*ledger.Row, error) {
	if !w.isReady() {
		return nil, nil
	}
	r, err := w.store.Row(ctx, shot)
	if err != nil || r == nil {
		return nil, err
	}
	w.staleness().Mark(r)
	return r, nil
}

// Arrived tells when the shot of a row came: when its last file was written, or the first of
// the shots that were written in one go with it. Shots go in this order, and in natural
// order where it is the same; it is 0 s after 1970 where it is not known.
func (w *Watcher) Arrived(r *ledger.Row) time.Time {
	if !w.isReady() {
		return time.Unix(0, 0)
	}
	return time.Unix(0, w.roll.momentOf(r.Shot, r.Files))
}

// staleness judges by the settings and regions in force.
func (w *Watcher) staleness() night.Staleness {
	w.mu.Lock()
	defer w.mu.Unlock()
	return night.NewStaleness(w.lab, w.regions)
}

// Notes returns what a person should know now.
func (w *Watcher) Notes() []string {
	w.notes.mu.Lock()
	defer w.notes.mu.Unlock()
	return w.notes.list()
}

// SettingsText returns the settings in force as a settings file, "" before there are any.
func (w *Watcher) SettingsText() string {
	if lab := w.settings(); lab != nil {
		return lab.Text()
	}
	return ""
}

// Scan returns the names of the scan variables.
func (w *Watcher) Scan() []string {
	if lab := w.settings(); lab != nil {
		return lab.Shots.Scan
	}
	return nil
}

// errNoShot says that a shot is not there.
func errNoShot(shot string) error { return fmt.Errorf("there is no shot %s in the night", shot) }
