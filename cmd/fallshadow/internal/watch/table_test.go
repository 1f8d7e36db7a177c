package watch

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/report"
)

// The table of a watch that was killed before it wrote it is there soon after the next start,
// and where it cannot be written that is tried again until it can, no shot needed for it.
func TestTableIsWritten(t *testing.T) {
	dir := nightWith(t, "1")
	h := newHall()
	w, stop := run(t, Options{Dir: dir}, h)
	h.until(t, "the shot", h.seen(1))
	stop()
	file := filepath.Join(w.Out, report.CSVName)
	remove := func() {
		if err := os.RemoveAll(file); err != nil {
			t.Fatal(err)
		}
	}
	remove()
	if err := os.MkdirAll(filepath.Join(file, "full"), 0o755); err != nil {
		t.Fatal(err)
	}
	h = newHall()
	run(t, Options{Dir: dir, Out: w.Out}, h)
	h.until(t, "word that it cannot be written", said(h, report.CSVName))
	remove()
	h.until(t, "the table", func() bool {
		table, err := os.ReadFile(file)
		return err == nil && strings.Contains(string(table), "ramp_0001") && len(h.notes) == 0
	})
}
