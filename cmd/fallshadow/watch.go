package main

import (
	"context"
	"errors"
	"fmt"
	"net"
	"os"
	"path/filepath"
	"runtime/debug"
	"time"

	"github.com/mattn/go-isatty"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/page"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/watch"
	"fallshadow/imageio"
)

// watchCmd fits the shots of a night while it is being taken.
type watchCmd struct {
	Night    string        `arg:"" help:"Folder that the camera program writes to. It is only read, and may appear later."`
	Settings string        `placeholder:"FILE" help:"Settings of the laboratory; fallshadow.toml in the night's folder if left out. They are read again when they change."`
	Out      string        `placeholder:"DIR" help:"Folder for ledger and table; results/NIGHT if left out."`
	Workers  atLeastOne    `placeholder:"N" help:"Shots to fit at a time; one a processor if left out."`
	Poll     time.Duration `default:"2s" help:"How often to look for shots where the system sends no events, as on a network share."`
	JSON     bool          `name:"json" help:"Print each shot as a line of JSON."`
	Page     string        `placeholder:"HOST:PORT" help:"Address of the page; 127.0.0.1:8417, or a free port, if left out. An address that other machines reach asks them for a token."`
	Token    string        `env:"FALLSHADOW_TOKEN" placeholder:"TEXT" help:"Token for other machines; made up and printed if left out."`
	NoPage   bool          `help:"Serve no page."`
}

// ownAddress is where the page is, unless a person names another place.
const ownAddress = "127.0.0.1:8417"

// Run watches until it is interrupted.
func (c *watchCmd) Run(ctx context.Context, t terminal) error {
	if os.Getenv("GOGC") == "" {
		debug.SetGCPercent(50) // it runs all night beside other programs: rather some more work than memory
	}
	if err := refuseResults(c.Night, c.Out); err != nil {
		return err
	}
	lines := newShotLines(t, c.JSON)
	hall := audience{lines}
	var screen *page.Page
	if !c.NoPage {
		screen = page.New(nameOf(c.Night))
		hall = append(hall, screen)
	}
	w, err := watch.New(watch.Options{Dir: c.Night, Out: c.Out, Settings: c.Settings, Workers: int(c.Workers), Poll: c.Poll}, hall)
	if err != nil {
		return err
	}
	lines.scan = w.Scan
	if screen == nil {
		return w.Run(ctx)
	}
	screen.Show(w)
	return c.runWithPage(ctx, t, w, screen)
}

// runWithPage runs watch and page until the first of them ends.
func (c *watchCmd) runWithPage(ctx context.Context, t terminal, w *watch.Watcher, screen *page.Page) error {
	l, url, err := c.listen(screen)
	if err != nil {
		return err
	}
	fmt.Fprintf(t.err, "page: %s\n", url)
	ctx, cancel := context.WithCancel(ctx)
	defer cancel()
	served := make(chan error, 1)
	go func() {
		defer cancel()
		served <- screen.Serve(ctx, l)
	}()
	err = w.Run(ctx)
	cancel()
	return errors.Join(err, <-served)
}

// listen opens the page; where nobody named a place and ours is taken, on a free port.
func (c *watchCmd) listen(screen *page.Page) (net.Listener, string, error) {
	if c.Page != "" {
		return screen.Listen(c.Page, c.Token)
	}
	if l, url, err := screen.Listen(ownAddress, ""); err == nil {
		return l, url, nil
	}
	return screen.Listen("127.0.0.1:0", "")
}

// nameOf is what a night is called.
func nameOf(dir string) string {
	if abs, err := filepath.Abs(dir); err == nil {
		dir = abs
	}
	return filepath.Base(dir)
}

// audience tells several.
type audience []watch.Audience

func (a audience) Row(r *ledger.Row) {
	for _, one := range a {
		one.Row(r)
	}
}

func (a audience) Picture(shot string, f *report.Facts, raw *imageio.Raw) {
	for _, one := range a {
		one.Picture(shot, f, raw)
	}
}

func (a audience) Changed() {
	for _, one := range a {
		one.Changed()
	}
}

func (a audience) Notes(notes []string) {
	for _, one := range a {
		one.Notes(notes)
	}
}

// isScreen reports whether what is written to a file is looked at on a terminal that takes
// colours (https://no-color.org asks for NO_COLOR to be honoured).
func isScreen(out any) bool {
	f, ok := out.(*os.File)
	return ok && isatty.IsTerminal(f.Fd()) && os.Getenv("NO_COLOR") == "" && os.Getenv("TERM") != "dumb"
}
