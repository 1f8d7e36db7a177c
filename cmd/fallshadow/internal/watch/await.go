package watch

import (
	"context"
	"errors"
	"io/fs"
	"os"
	"time"

	"fallshadow/cmd/fallshadow/internal/settings"
)

// fileState is what tells whether a file has changed.
type fileState struct {
	size     int64
	modified time.Time
}

func stateOf(file string) (fileState, error) {
	info, err := os.Stat(file)
	if err != nil {
		return fileState{}, err
	}
	return fileState{info.Size(), info.ModTime()}, nil
}

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
			var lab *settings.Settings
			var state fileState
			if lab, state, err = w.readSettings(); err == nil {
				w.notes.set("settings", "")
				w.mu.Lock()
				defer w.mu.Unlock()
				w.lab, w.labFile = lab, state
				return nil
			}
			if state != (fileState{}) || w.Settings != "" {
				return err
			}
			err = w.waiting("settings", "waiting for settings: "+err.Error())
		}
		if err != nil {
			return err
		}
		if !pause(ctx, min(w.Poll, time.Second)) {
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

// readSettings reads the settings; the state is that of the file before it was read, zero
// where there is none.
func (w *Watcher) readSettings() (*settings.Settings, fileState, error) {
	file, err := w.settingsFile()
	if err != nil {
		return nil, fileState{}, err
	}
	state, _ := stateOf(file)
	lab, err := settings.Load(file)
	return lab, state, err
}

func (w *Watcher) settingsFile() (string, error) {
	if w.Settings != "" {
		return w.Settings, nil
	}
	return settings.Find(w.Dir)
}

// rereadSettings takes over settings that have changed. Wrong ones change nothing, and a
// note says so.
func (w *Watcher) rereadSettings() {
	file, err := w.settingsFile()
	if err != nil {
		w.notes.set("settings", "the settings are gone, the old ones hold: "+err.Error())
		return
	}
	state, err := stateOf(file)
	if err != nil || state == w.labFile {
		return
	}
	lab, state, err := w.readSettings()
	w.labFile = state
	if err != nil {
		w.notes.set("settings", "the settings were changed and are wrong, the old ones hold: "+err.Error())
		return
	}
	w.notes.set("settings", "")
	w.mu.Lock()
	w.lab = lab
	w.mu.Unlock()
	w.desk.resettle(lab)
	w.audience.Changed()
	w.askTable()
}

// settings returns the settings in force, nil before there are any.
func (w *Watcher) settings() *settings.Settings {
	w.mu.Lock()
	defer w.mu.Unlock()
	return w.lab
}
