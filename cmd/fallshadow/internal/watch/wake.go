package watch

import (
	"context"
	"io/fs"
	"path/filepath"
	"strings"
	"time"

	"github.com/fsnotify/fsnotify"
)

// wakes sends whenever something happens in the folder, and at every poll. Events only
// wake: what is there is found by looking, since events get lost and network shares send
// none.
func (w *Watcher) wakes(ctx context.Context) <-chan struct{} {
	wake := make(chan struct{}, 1)
	var events <-chan fsnotify.Event
	var faults <-chan error
	var watcher *fsnotify.Watcher
	if !w.NoEvents {
		var err error
		if watcher, err = fsnotify.NewWatcher(); err != nil {
			w.noteEvents(err)
		} else {
			events, faults = watcher.Events, watcher.Errors
			w.follow(watcher)
		}
	}
	go func() {
		if watcher != nil {
			defer watcher.Close()
		}
		poll := time.NewTicker(w.Poll)
		defer poll.Stop()
		for {
			select {
			case e := <-events:
				if e.Has(fsnotify.Create) {
					w.followBelow(watcher, e.Name)
				}
			case <-faults:
			case <-poll.C:
				if watcher != nil {
					w.follow(watcher)
				}
			case <-ctx.Done():
				return
			}
			select {
			case wake <- struct{}{}:
			default:
			}
		}
	}()
	return wake
}

// noteEvents says why the system sends no events, with no error that it does.
func (w *Watcher) noteEvents(err error) {
	text := ""
	if err != nil {
		text = "the system sends no events, new shots are found by polling: " + err.Error()
	}
	w.notes.set("events", text)
}

// follow asks for the events of all folders of the night; it is repeated, because folders
// come, go and come again.
func (w *Watcher) follow(watcher *fsnotify.Watcher) { w.followBelow(watcher, w.root) }

func (w *Watcher) followBelow(watcher *fsnotify.Watcher, path string) {
	filepath.WalkDir(path, func(path string, d fs.DirEntry, err error) error {
		if err != nil || !d.IsDir() {
			return nil
		}
		if path != w.root && (strings.HasPrefix(d.Name(), ".") || path == filepath.Join(w.root, "results")) {
			return fs.SkipDir
		}
		if err := watcher.Add(path); path == w.root {
			w.noteEvents(err)
		}
		return nil
	})
}
