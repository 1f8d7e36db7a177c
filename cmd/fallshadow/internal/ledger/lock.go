package ledger

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strconv"
)

// BusyError says that another process writes the ledger.
type BusyError struct {
	Dir string
	PID int // 0 when the other process has not said yet
}

func (e *BusyError) Error() string {
	who := "another fallshadow"
	if e.PID > 0 {
		who = "process " + strconv.Itoa(e.PID)
	}
	return fmt.Sprintf("%s is writing the ledger in %s: wait until it ends, stop it, or choose another folder with --out", who, e.Dir)
}

// errLocked is what tryLock returns when another process holds the lock.
var errLocked = errors.New("locked by another process")

// lock takes the folder's lock file for this process and writes its number there. The
// operating system lets go of it when the file is closed or the process dies, so the
// file itself stays behind and means nothing by its being there.
func lock(dir string) (*os.File, error) {
	f, err := os.OpenFile(filepath.Join(dir, lockName), os.O_RDWR|os.O_CREATE, 0o644)
	if err != nil {
		return nil, fmt.Errorf("open the lock of the ledger: %w", err)
	}
	if err := tryLock(f); err != nil {
		defer f.Close()
		if !errors.Is(err, errLocked) {
			return nil, fmt.Errorf("lock the ledger in %s: %w", dir, err)
		}
		text, _ := io.ReadAll(io.LimitReader(f, 32))
		pid, _ := strconv.Atoi(string(bytes.TrimSpace(text)))
		return nil, &BusyError{Dir: dir, PID: pid}
	}
	if err = f.Truncate(0); err == nil {
		_, err = f.WriteAt([]byte(strconv.Itoa(os.Getpid())+"\n"), 0)
	}
	if err != nil {
		f.Close()
		return nil, fmt.Errorf("write the lock of the ledger: %w", err)
	}
	return f, nil
}
