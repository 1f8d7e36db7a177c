package watch

import (
	"context"
	"fmt"
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

// writeTables writes the table when it is asked for, but not all the time.
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
		}
		w.notes.set("table", text)
		if !pause(ctx, tableEvery) {
			return
		}
	}
}

func (w *Watcher) writeTable(ctx context.Context) error {
	rows, err := w.Rows(ctx)
	if err != nil {
		return err
	}
	return report.SaveCSV(w.Out, rows, w.settings().Shots.Scan)
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

// Rows returns the rows of the shots in the folder, in natural order, stale ones marked;
// none before the folder is there.
func (w *Watcher) Rows(ctx context.Context) ([]ledger.Row, error) {
	if !w.isReady() {
		return nil, nil
	}
	rows, err := w.store.Rows(ctx)
	if err != nil {
		return nil, err
	}
	w.markStale(rows)
	return rows, nil
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
	one := []ledger.Row{*r}
	w.markStale(one)
	return &one[0], nil
}

func (w *Watcher) markStale(rows []ledger.Row) {
	w.mu.Lock()
	defer w.mu.Unlock()
	night.MarkStale(rows, w.lab, w.regions)
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
