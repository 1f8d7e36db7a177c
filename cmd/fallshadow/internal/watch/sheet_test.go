package watch

import (
	"context"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"fallshadow/cmd/fallshadow/internal/settings"
)

// Settings are judged once, when they have looked the same for a moment.
func TestSheet(t *testing.T) {
	now := time.Now()
	empty, half, whole := fileState{0, now}, fileState{100, now}, fileState{200, now}
	s := sheet{}
	for i, step := range []struct {
		state fileState
		after time.Duration
		want  bool
	}{
		{whole, 0, false},
		{whole, composed / 2, false},
		{empty, composed, false}, // it changes before it was judged
		{half, composed - 1, false},
		{whole, composed - 1, false},
		{whole, composed - 1, false},
		{whole, 1, true},
		{whole, composed, true}, // nobody has judged it yet
		{fileState{}, 1, false},
		{fileState{}, composed, true},
	} {
		now = now.Add(step.after)
		if got := s.see(step.state, now); got != step.want {
			t.Errorf("step %d: %v", i, got)
		}
	}
	if s.judged = true; s.see(fileState{}, now.Add(time.Hour)) {
		t.Error("it is judged twice")
	}
}

// What changed is said with the old and the new value, and not at length.
func TestChanges(t *testing.T) {
	text := string(read(t, filepath.Join(demo, settings.FileName)))
	parse := func(changes ...string) *settings.Settings {
		t.Helper()
		text := text
		for i := 0; i < len(changes); i += 2 {
			if !strings.Contains(text, changes[i]) {
				t.Fatalf("there is no %q", changes[i])
			}
			text = strings.Replace(text, changes[i], changes[i+1], 1)
		}
		s, err := settings.Parse([]byte(text), "s")
		if err != nil {
			t.Fatal(err)
		}
		return s
	}
	old := parse()
	for _, test := range []struct {
		want    string
		changed *settings.Settings
	}{
		{"", parse("[probe]", "# a word\n[probe]")},
		{"probe.alpha 1.5 ± 0.04 -> 1.0", parse("{ value = 1.5, err = 0.04 }", "1")},
		{"camera.binning 1 -> 2, probe.exposure_us 8.0 -> none", parse("binning = 1", "binning = 2", "exposure_us = 8.0", "")},
		{`shots.scan ["RAMPEND"] -> ["RAMPEND", "OTHER", "A LONG NA…`, parse(`["RAMPEND"]`, `["RAMPEND", "OTHER", "A LONG NAME OF A VARIABLE"]`)},
		{"trap.axis1_hz 25.0 ± 0.15 -> 2.0, trap.axis2_hz 110.0 ± 0.6 -> 2.0, trap.angle_deg 12.0 -> 1.0, camera.binning 1 -> 2, and 1 more",
			parse("{ value = 25.0, err = 0.15 }", "2", "{ value = 110.0, err = 0.6 }", "2", "12.0", "1", "binning = 1", "binning = 2", "8.0", "9")},
	} {
		if got := changes(old, test.changed); got != test.want {
			t.Errorf("%q, want %q", got, test.want)
		}
	}
}

// ofSettings are the notes on settings that ever were, without the time before them.
func (h *hall) ofSettings() (list []string) {
	said := map[string]bool{}
	for _, n := range h.all {
		if _, text, ok := strings.Cut(n, " "); ok && strings.HasPrefix(text, "the settings") && !said[n] {
			said[n] = true
			list = append(list, text)
		}
	}
	return list
}

// What becomes of the settings is said once each time: changed, wrong, right again, gone.
func TestSettingsAreSaid(t *testing.T) {
	dir := nightWith(t, "1")
	file := filepath.Join(dir, settings.FileName)
	good := string(read(t, file))
	other := strings.Replace(good, "value = 1.5, err = 0.04", "value = 3, err = 0.04", 1)
	h := newHall()
	_, _ = run(t, Options{Dir: dir}, h)
	h.until(t, "the first", h.seen(1))
	var want []string
	next := func(start, end string) {
		t.Helper()
		h.until(t, start, func() bool { return len(h.ofSettings()) > len(want) })
		h.mu.Lock()
		defer h.mu.Unlock()
		got := h.ofSettings()[len(want)]
		if !strings.HasPrefix(got, start) || !strings.HasSuffix(got, end) || len(h.notes) != 1 || !strings.HasSuffix(h.notes[0], got) {
			t.Errorf("said %q, and the notes are %q", got, h.notes)
		}
		want = append(want, got)
	}
	save(t, file, []byte(good+"# a word more\n"))
	save(t, file, []byte(other))
	next("the settings changed: probe.alpha 1.5 ± 0.04 -> 3.0 ± 0.04; they hold from the next shot on, the first after ramp_0001", "")
	save(t, file, []byte(strings.Replace(strings.Replace(good, "magnification", "magnificence", 1), "binning", "bining", 1)))
	next("the settings were changed and are wrong, the old ones hold:\n", "")
	if !strings.Contains(want[1], "magnificence") || strings.Count(want[1], "\n") < 2 {
		t.Errorf("said %q", want[1])
	}
	save(t, file, []byte(other))
	next("the settings are right again, and as they were before", "")
	if err := os.Remove(file); err != nil {
		t.Fatal(err)
	}
	next("the settings are gone, the old ones hold: ", "")
	save(t, file, []byte(good))
	next("the settings are right again: probe.alpha 3.0 ± 0.04 -> 1.5 ± 0.04; they hold from the next shot on, the first after ramp_0001", "")
	save(t, file, []byte(other))
	next("the settings changed: probe.alpha 1.5 ± 0.04 -> 3.0 ± 0.04; they hold from the next shot on, the first after ramp_0001", "")
	time.Sleep(2 * composed)
	if got := h.ofSettings(); !slices.Equal(got, want) {
		t.Errorf("said %q", got)
	}
}

// A file that is emptied and filled slowly, as by an editor or a copy, is judged when it is
// whole, at the start of a watch too.
func TestHalfWrittenSettings(t *testing.T) {
	dir := nightWith(t)
	file := filepath.Join(dir, settings.FileName)
	good := read(t, file)
	h := newHall()
	w, err := New(Options{Dir: dir, Out: t.TempDir()}, h)
	if err != nil {
		t.Fatal(err)
	}
	w.desk, w.roll = newDesk(context.Background(), nil, w.load, w.darks), newRoll(dir, nil, nil)
	now := time.Now()
	const step = composed / 5
	slowly := func(data []byte, look func() bool) {
		t.Helper()
		for at := 0; at < len(data)+len(data)/5; at += 1 + len(data)/5 {
			write(t, file, data[:min(at, len(data))])
			for range 5 {
				if now = now.Add(step); look() {
					t.Fatalf("%d of %d bytes were judged before they rested", min(at, len(data)), len(data))
				}
			}
		}
		if now = now.Add(step); !look() {
			t.Fatal("they are not judged when they have rested")
		}
	}
	slowly(good, func() bool {
		done, err := w.firstSettings(now)
		if err != nil {
			t.Error(err)
		}
		return done
	})
	again := func() bool {
		n := len(h.ofSettings())
		w.rereadSettings(now)
		return len(h.ofSettings()) > n
	}
	slowly([]byte(strings.Replace(string(good), "alpha = { value = 1.5", "alpha = { value = 2", 1)), again)
	slowly([]byte(strings.Replace(string(good), "alpha", "alhpa", 1)), again)
	for range 5 {
		now = now.Add(composed)
		again()
	}
	got := h.ofSettings()
	if len(got) != 2 || !strings.Contains(got[0], "-> 2.0") || !strings.Contains(got[1], "alhpa") {
		t.Errorf("said %q", got)
	}
	if w.settings().Probe.Alpha.Value != 2 {
		t.Errorf("alpha is %g", w.settings().Probe.Alpha.Value)
	}
}

// The note of settings that were taken goes after a while, that of wrong ones stays.
func TestNoteOfSettingsGoes(t *testing.T) {
	dir := nightWith(t)
	h := newHall()
	w, err := New(Options{Dir: dir, Out: t.TempDir()}, h)
	if err != nil {
		t.Fatal(err)
	}
	now := time.Now()
	w.sheet.judged = true
	w.taken = now
	w.noteSettings(now, "taken")
	w.rereadSettings(now.Add(shownFor))
	if len(h.notes) != 1 {
		t.Errorf("notes %q", h.notes)
	}
	w.rereadSettings(now.Add(shownFor + 1))
	if len(h.notes) != 0 {
		t.Errorf("notes %q", h.notes)
	}
}
