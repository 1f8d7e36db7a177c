package watch

import (
	"testing"

	"github.com/fsnotify/fsnotify"
)

// That the system sends no events is said as long as it does not.
func TestEventsComeBack(t *testing.T) {
	h := newHall()
	w := &Watcher{root: t.TempDir(), notes: notes{told: h.Notes}}
	closed, err := fsnotify.NewWatcher()
	if err != nil {
		t.Fatal(err)
	}
	closed.Close()
	w.follow(closed)
	if len(h.notes) != 1 {
		t.Errorf("said %q", h.notes)
	}
	open, err := fsnotify.NewWatcher()
	if err != nil {
		t.Fatal(err)
	}
	defer open.Close()
	w.follow(open)
	if len(h.notes) != 0 {
		t.Errorf("still said: %q", h.notes)
	}
}
