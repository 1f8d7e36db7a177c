// Package check tells what a batch would make of a night before it runs: which shots and
// frames it would read, what light the atoms see, what a few fits say, and what is wrong
// with it all. Nothing is written.
package check

import (
	"context"
	"fmt"
	"io"
	"path/filepath"

	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/imageio"
)

// Options say what to look at.
type Options struct {
	Dir      string // the night
	File     string // where the settings come from, for the eye
	Settings *settings.Settings
	Workers  int  // 0 for one a processor
	Fits     int  // shots with a condensate to fit
	Every    bool // print a line for every shot
}

// Outcome is what a check found.
type Outcome struct {
	Unusable int  // shots that a batch would fail
	Usable   int  // shots that it could fit
	Problems int  // with the unusable shots counted once for each reason
	page     page // the text
}

// WriteTo writes the report for people.
func (o *Outcome) WriteTo(w io.Writer) (int64, error) {
	n, err := io.WriteString(w, o.page.String())
	return int64(n), err
}

// visit is one look at a night and what has been found so far.
type visit struct {
	Options
	look    *night.Look
	stopped error // why the look ended early
	shots   []shot
	entries []entry
	camera  transfer
	fitted  []fitted
	trouble trouble
	page    page
}

// Night looks at a night: every shot is read and made ready, Fits of them are fitted. It
// fails when ctx is done or there is nothing in the folder; everything else that goes
// wrong stands in the report.
func Night(ctx context.Context, o Options, p night.Progress) (*Outcome, error) {
	v := &visit{Options: o}
	seen := map[int]tally{}
	v.look, v.stopped = night.TakeLook(ctx, night.Options{Dir: o.Dir, Settings: o.Settings, Workers: o.Workers}, p,
		func(i int, raw *imageio.Raw) { seen[i] = count(raw) })
	if len(v.look.Shots) == 0 && len(v.look.Strays) == 0 {
		return nil, v.stopped
	}
	v.shots = make([]shot, len(v.look.Shots))
	for i := range v.shots {
		v.shots[i].tally = seen[i]
	}
	v.entries = v.entriesOf()
	v.judgeSettings()
	v.judgeNight()
	v.judgeFlights()
	if v.look.Ready() {
		v.expose(ctx, p)
		v.measureCamera(ctx)
		v.fit(ctx, p)
	}
	if ctx.Err() != nil {
		return nil, context.Cause(ctx)
	}
	return v.outcome(), nil
}

func (v *visit) outcome() *Outcome {
	v.page.line(report.Printable(fmt.Sprintf("%s: %s", filepath.Clean(v.Dir), plural(len(v.shots), "shot"))))
	v.page.line(report.Printable("settings: " + v.File))
	v.writeShots()
	v.writeMetadata()
	if v.look.Ready() {
		v.writeCamera()
		v.writeProbe()
		v.writeRatios()
	}
	v.writeSettings()
	v.trouble.write(&v.page)
	out := &Outcome{Problems: len(v.trouble.problems)}
	for i := range v.shots {
		if v.shots[i].unusable {
			out.Unusable++
		}
	}
	out.Usable = len(v.shots) - out.Unusable
	if !v.look.Ready() {
		out.Usable = 0
	}
	out.page = v.page
	return out
}

func plural(n int, what string) string {
	if n == 1 {
		return "1 " + what
	}
	return fmt.Sprintf("%d %ss", n, what)
}
