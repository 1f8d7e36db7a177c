package watch

import (
	"context"
	"errors"
	"io/fs"
	"os"
	"time"
)

// await waits until the folder is there and its settings can be read. Settings that are
// there and wrong end the wait with what is wrong.
func (w *Watcher) await(ctx context.Context) error {
	for {
		info, err := os.Stat(w.Dir)
		switch {
		case errors.Is(err, fs.ErrNotExist):
			err = w.waiting("folder", "waiting for the folder "+w.Dir+" to appear")
		case err != nil:
			err = w.waiting("folder", "the folder cannot be read: "+err.Error())
		case !info.IsDir():
			return errors.New(w.Dir + " is a file: name the folder of the night")
		default:
			w.notes.set("folder", "")
			var done bool
			if done, err = w.firstSettings(time.Now()); done {
				return nil
			}
		}
		if err != nil {
			return err
		}
		if !pause(ctx, min(w.Poll, composed)) {
			return context.Cause(ctx)
		}
	}
}

// waiting notes what the watch waits for before it can begin.
func (w *Watcher) waiting(kind, what string) error {
	err := w.begun()
	if err == nil {
		w.notes.set(kind, what)
	}
	return err
}

// pause waits, and reports whether it was not stopped by ctx.
func pause(ctx context.Context, d time.Duration) bool {
	select {
	case <-time.After(d):
		return true
	case <-ctx.Done():
		return false
	}
}
