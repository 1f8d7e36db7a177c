package ledger

import (
	"fmt"
	"os"
	"path/filepath"
)

// refuseNetwork returns an error when dir, or the nearest folder above it that exists,
// lies on a network file system: there neither the lock nor the shared memory of the
// write-ahead log can be trusted.
func refuseNetwork(dir string) error {
	at, err := filepath.Abs(dir)
	if err != nil {
		return fmt.Errorf("find the folder %s: %w", dir, err)
	}
	for {
		if _, err := os.Stat(at); err == nil || filepath.Dir(at) == at {
			break
		}
		at = filepath.Dir(at)
	}
	kind, err := networkKind(at)
	if err != nil {
		return fmt.Errorf("ask for the file system of %s: %w", at, err)
	}
	if kind != "" {
		return fmt.Errorf("%s lies on a network file system (%s), where the locks that keep a ledger whole cannot be trusted: choose a folder on a local disk with --out", dir, kind)
	}
	return nil
}
