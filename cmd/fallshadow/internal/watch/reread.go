package watch

import (
	"fmt"
	"maps"
	"slices"
	"strings"
	"time"

	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/imageio"
)

// shownFor is for how long a note says that settings were taken.
const shownFor = 10 * time.Minute

// lookAtSettings returns the settings file and what it looks like; the error says why
// there is none.
func (w *Watcher) lookAtSettings() (file string, state fileState, err error) {
	if file = w.Settings; file == "" {
		if file, err = settings.Find(w.Dir); err != nil {
			return "", fileState{}, err
		}
	}
	state, err = stateOf(file)
	return file, state, err
}

// judge reads settings; ok is false where the file changed meanwhile.
func judge(file string, state fileState) (lab *settings.Settings, ok bool, err error) {
	lab, err = settings.Load(file)
	after, _ := stateOf(file)
	return lab, after == state, err
}

// firstSettings takes the settings to begin with, if they are there and whole. It fails
// where they are wrong, and where a file that somebody named is not there.
func (w *Watcher) firstSettings(now time.Time) (done bool, err error) {
	file, state, err := w.lookAtSettings()
	if err != nil && w.Settings != "" {
		return false, fmt.Errorf("read settings: %w", err)
	}
	if err != nil {
		return false, w.waiting("settings", "waiting for settings: "+err.Error())
	}
	if !w.sheet.see(state, now) && !state.isOld(now) {
		return false, nil
	}
	lab, ok, err := judge(file, state)
	if !ok {
		return false, nil
	}
	if err != nil {
		return false, err
	}
	w.notes.set("settings", "")
	w.mu.Lock()
	defer w.mu.Unlock()
	w.lab, w.sheet.judged = lab, true
	return true, nil
}

// rereadSettings takes over settings that have changed, and says so. Wrong ones change
// nothing, and a note says so too.
func (w *Watcher) rereadSettings(now time.Time) {
	if !w.taken.IsZero() && now.Sub(w.taken) > shownFor {
		w.taken = time.Time{}
		w.notes.set("settings", "")
	}
	file, state, err := w.lookAtSettings()
	if !w.sheet.see(state, now) {
		return
	}
	if err != nil {
		w.sheet.judged = true
		w.object(now, "the settings are gone, the old ones hold", err)
		return
	}
	lab, ok, err := judge(file, state)
	if !ok {
		return
	}
	w.sheet.judged = true
	if err != nil {
		w.object(now, "the settings were changed and are wrong, the old ones hold", err)
		return
	}
	w.resettle(lab, now)
}

// object notes what is wrong with the settings.
func (w *Watcher) object(now time.Time, what string, err error) {
	w.objected, w.taken = true, time.Time{}
	between := ": "
	if strings.Contains(err.Error(), "\n") {
		between = ":\n"
	}
	w.noteSettings(now, what+between+err.Error())
}

// resettle puts settings in force and says what is new in them, and from when on.
func (w *Watcher) resettle(lab *settings.Settings, now time.Time) {
	w.mu.Lock()
	changed, layout := changes(w.lab, lab), w.lab.Layout()
	w.lab = lab
	w.mu.Unlock()
	start := "the settings changed"
	if w.objected {
		start = "the settings are right again"
	}
	switch {
	case changed != "":
		since := w.fromWhenOn()
		w.desk.resettle(lab)
		if !sameFrames(layout, lab.Layout()) {
			since = "all shots are read again"
			w.roll.again(now)
		}
		w.noteSettings(now, start+": "+changed+"; "+since)
		w.audience.Changed()
		w.askTable()
	case w.objected:
		w.noteSettings(now, start+", and as they were before")
	default:
		return
	}
	w.objected, w.taken = false, now
}

// sameFrames reports whether two layouts take the same for the frames of a shot.
func sameFrames(a, b imageio.Layout) bool {
	return a.Kind == b.Kind && slices.Equal(a.Planes, b.Planes) && maps.Equal(a.Suffix, b.Suffix)
}

// fromWhenOn says for which shots settings hold that were just taken.
func (w *Watcher) fromWhenOn() string {
	if n := w.queue.waiting(); n > 0 {
		return fmt.Sprintf("they hold for the shots that wait, %d, and for all that follow", n)
	}
	if last := w.roll.newest(); last != "" {
		return "they hold from the next shot on, the first after " + last
	}
	return "they hold from the first shot on"
}

// noteSettings says something of the settings, with the time: the same may be so again
// later, and is said again.
func (w *Watcher) noteSettings(now time.Time, text string) {
	w.notes.set("settings", now.Format("15:04:05 ")+text)
}

// settings returns the settings in force, nil before there are any.
func (w *Watcher) settings() *settings.Settings {
	w.mu.Lock()
	defer w.mu.Unlock()
	return w.lab
}
