package ledger

import (
	"errors"
	"os"

	"golang.org/x/sys/windows"
)

// tryLock locks a byte far behind the text, which others must still be able to read.
func tryLock(f *os.File) error {
	const exclusiveNow = windows.LOCKFILE_EXCLUSIVE_LOCK | windows.LOCKFILE_FAIL_IMMEDIATELY
	err := windows.LockFileEx(windows.Handle(f.Fd()), exclusiveNow, 0, 1, 0, &windows.Overlapped{OffsetHigh: 1})
	if errors.Is(err, windows.ERROR_LOCK_VIOLATION) {
		return errLocked
	}
	return err
}
