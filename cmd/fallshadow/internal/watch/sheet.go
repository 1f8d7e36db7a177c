package watch

import (
	"os"
	"time"
)

const (
	// composed is for how long the settings must have looked the same before they are
	// judged: editors and copies empty a file first and fill it then.
	composed = 500 * time.Millisecond
	// rested is the age from which settings that were there before the watch are not
	// waited for.
	rested = 10 * time.Second
)

// fileState is what tells whether a file has changed; zero where it is not there.
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

// sheet is the settings file as it was last seen.
type sheet struct {
	state  fileState
	since  time.Time // of the state
	judged bool      // the state is known for what it is
}

// see takes in what the file looks like and reports whether it is to be judged now.
func (s *sheet) see(state fileState, now time.Time) bool {
	if state != s.state || s.since.IsZero() {
		*s = sheet{state: state, since: now}
	}
	return !s.judged && !now.Before(s.due())
}

// due is when a file that stays as it is will be judged.
func (s *sheet) due() time.Time { return s.since.Add(composed) }

// isOld reports whether a file was last changed long ago.
func (f fileState) isOld(now time.Time) bool { return now.Sub(f.modified) > rested }
