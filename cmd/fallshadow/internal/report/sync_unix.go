//go:build unix

package report

import (
	"errors"
	"os"
)

// syncFolder brings a renaming in the folder to the disk.
func syncFolder(dir string) error {
	d, err := os.Open(dir)
	if err != nil {
		return err
	}
	return errors.Join(d.Sync(), d.Close())
}
