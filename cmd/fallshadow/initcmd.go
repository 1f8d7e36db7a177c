package main

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"

	"fallshadow/cmd/fallshadow/internal/settings"
)

// initCmd prints laboratory settings to start from.
type initCmd struct {
	Write string `help:"Write the settings to this file, which must not be there yet." placeholder:"FILE" xor:"what"`
	Keys  bool   `help:"Print all keys as a table instead." xor:"what"`
}

// Run writes the commented settings to out, or to a new file; a file that is there is
// never written over.
func (c *initCmd) Run(out io.Writer) error {
	switch {
	case c.Keys:
		_, err := out.Write(settings.Markdown())
		return err
	case c.Write == "":
		_, err := out.Write(settings.Template())
		return err
	}
	if err := writeNew(c.Write, settings.Template()); err != nil {
		return err
	}
	_, err := fmt.Fprintf(out, "wrote %s: replace the example values by your own\n", c.Write)
	return err
}

// writeNew writes a file that must not be there yet, whole or not at all.
func writeNew(path string, data []byte) (err error) {
	f, err := os.OpenFile(path, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o644)
	if errors.Is(err, fs.ErrExist) {
		return fmt.Errorf("%s is there already and is not written over: give another name, or move it away", path)
	}
	if dir := filepath.Dir(path); errors.Is(err, fs.ErrNotExist) {
		return fmt.Errorf("write settings: there is no folder %s: make it first, or name a file in one that is there", dir)
	}
	if err != nil {
		return fmt.Errorf("write settings: %w", err)
	}
	defer func() {
		if err != nil {
			err = fmt.Errorf("write settings: %w", errors.Join(err, os.Remove(path)))
		}
	}()
	if _, err = f.Write(data); err == nil {
		err = f.Sync()
	}
	return errors.Join(err, f.Close())
}
