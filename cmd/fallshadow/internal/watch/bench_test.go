package watch

import (
	"os"
	"path/filepath"
	"testing"

	"fallshadow/cmd/fallshadow/internal/settings"
)

// What a shot waits for is not said any longer once it has left the folder.
func TestBenchNoteGoesWithTheShot(t *testing.T) {
	dir := nightWith(t, "1")
	file := filepath.Join(dir, settings.FileName)
	text := string(read(t, file)) + "\n[region]\nx = 1000\ny = 1000\nwidth = 50\nheight = 50\n"
	write(t, file, []byte(text))
	h := newHall()
	run(t, Options{Dir: dir}, h)
	h.until(t, "word that it waits", said(h, "waiting with the fit"))
	if err := os.Remove(filepath.Join(dir, "ramp_0001.fits")); err != nil {
		t.Fatal(err)
	}
	h.until(t, "no word of it", func() bool { return len(h.notes) == 0 })
}
