package main

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"net"
	"os"
	"path/filepath"
	"runtime/debug"
	"sync"
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

// runWithPage runs watch and page until the first of them ends. The page begins with the
// watch: one that is refused shows none.
func (c *watchCmd) runWithPage(ctx context.Context, t terminal, w *watch.Watcher, screen *page.Page) error {
	ctx, cancel := context.WithCancel(ctx)
	defer cancel()
	var serving sync.WaitGroup
	var served error
	w.Begun = func() error {
		l, err := c.listen(t, screen)
		if err == nil {
			serving.Go(func() {
				defer cancel()
				served = screen.Serve(ctx, l)
			})
		}
		return err
	}
	err := w.Run(ctx)
	cancel()
	serving.Wait()
	return errors.Join(err, served)
}

// listen opens the page and says where it is; where nobody named a place and ours is taken,
// on a free port.
func (c *watchCmd) listen(t terminal, screen *page.Page) (net.Listener, error) {
	const choose = "choose another address with --page HOST:PORT"
	l, url, err := screen.Listen(cmp.Or(c.Page, ownAddress), c.Token)
	if err != nil && c.Page != "" {
		return nil, fmt.Errorf("%w: %s", err, choose)
	}
	why := ""
	if err != nil {
		why = fmt.Sprintf("%s is in use, so the page is on a free port; for one that stays, %s\n", ownAddress, choose)
		if l, url, err = screen.Listen("127.0.0.1:0", c.Token); err != nil {
			return nil, err
		}
	}
	fmt.Fprintf(t.err, "page: %s\n%s", url, why)
	return l, nil
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

func (a audience) Heard(text string) {
	for _, one := range a {
		one.Heard(text)
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
