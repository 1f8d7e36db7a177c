package main

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"

	"fallshadow/cmd/fallshadow/internal/check"
	"fallshadow/cmd/fallshadow/internal/settings"
)

// checkCmd looks at a night before it is fitted.
type checkCmd struct {
	Folder   string     `arg:"" help:"Folder with the shots of the night. It is only read."`
	Settings string     `placeholder:"FILE" help:"Settings of the laboratory; fallshadow.toml in the night's folder if left out."`
	Fits     int        `default:"3" placeholder:"N" help:"Shots with a condensate to fit on trial (3 if left out); 0 fits none."`
	Every    bool       `help:"Print a line for every shot of a long night."`
	Workers  atLeastOne `placeholder:"N" help:"Shots to read at a time; one a processor if left out."`
}

// Run prints what a batch would read and what is wrong with it. Nothing is written.
func (c *checkCmd) Run(ctx context.Context, t terminal) error {
	lab, err := loadSettings(c.Settings, c.Folder)
	if err != nil {
		return err
	}
	if c.Settings == "" {
		c.Settings = filepath.Join(c.Folder, settings.FileName)
	}
	out, err := check.Night(ctx, check.Options{
		Dir: c.Folder, File: c.Settings, Settings: lab, Workers: int(c.Workers), Fits: max(c.Fits, 0), Every: c.Every,
	}, newProgress(t))
	if ctx.Err() != nil {
		return errors.New("stopped before the end; nothing was written")
	}
	if err != nil {
		return err
	}
	if _, err := out.WriteTo(t.out); err != nil {
		return err
	}
	switch {
	case out.Usable == 0:
		return errors.New("no shot of this night can be fitted: see the problems above")
	case out.Unusable > 0:
		return errSomeFailed
	case out.Problems > 0:
		return errors.New("there are problems: see above")
	}
	return nil
}

// isFolder fails with what to do about it where a night is no folder.
func isFolder(dir string) error {
	info, err := os.Stat(dir)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return fmt.Errorf("there is no folder %s: name the folder with the shots of the night", dir)
	case err != nil:
		return fmt.Errorf("look at the night: %w", err)
	case !info.IsDir():
		return fmt.Errorf("%s is a file: name the folder that the shots are in", dir)
	}
	return nil
}
