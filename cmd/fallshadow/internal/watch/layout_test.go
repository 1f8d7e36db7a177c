package watch

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/settings"
)

// Where the settings took the frames for one another and are put right, all shots are read
// again, while the watch runs and between two of them: their rows would look current, since
// what a frame is belongs to the shot and not to its numbers.
func TestPlanesPutRight(t *testing.T) {
	for name, restart := range map[string]bool{"running": false, "restarted": true} {
		t.Run(name, func(t *testing.T) {
			dir := nightWith(t, "4", "5")
			file := filepath.Join(dir, settings.FileName)
			right := string(read(t, file))
			wrong := strings.Replace(right, `"atoms", "light"`, `"light", "atoms"`, 1)
			write(t, file, []byte(wrong))
			h := newHall()
			w, stop := run(t, Options{Dir: dir}, h)
			h.until(t, "two wrong shots", h.seen(2))
			before := rowsOf(t, w)
			if restart {
				stop()
			}
			if err := os.WriteFile(file, []byte(right), 0o644); err != nil {
				t.Fatal(err)
			}
			if restart {
				w, _ = run(t, Options{Dir: dir, Out: w.Out}, h)
			}
			h.until(t, "two right shots", func() bool {
				rows := rowsOf(t, w)
				return len(rows) == 2 && rows[0].Number("atoms") > 5e4 && rows[1].Number("atoms") > 5e4
			})
			for i, r := range rowsOf(t, w) {
				if r.Content == before[i].Content || before[i].Number("atoms") > 5e4 {
					t.Errorf("%s was right before", r.Shot)
				}
			}
			if !restart && !said(h, "all shots are read again")() {
				t.Errorf("said %q", h.all)
			}
		})
	}
}
