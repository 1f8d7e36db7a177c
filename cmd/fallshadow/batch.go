package main

import (
	"context"
	"fmt"
	"path/filepath"
	"strings"

	"github.com/alecthomas/kong"

	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/picture"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
)

// batchCmd fits a night.
type batchCmd struct {
	Night     string     `arg:"" help:"Folder with the shots of the night. It is only read."`
	Settings  string     `placeholder:"FILE" help:"Settings of the laboratory; fallshadow.toml in the night's folder if left out."`
	Out       string     `placeholder:"DIR" help:"Folder for ledger and table; results/NIGHT if left out. Within the night's folder it must be results."`
	Again     bool       `help:"Fit every shot, also those whose results are current."`
	Workers   atLeastOne `placeholder:"N" help:"Shots to fit at a time; one a processor if left out. The results do not depend on it."`
	OwnRegion bool       `help:"Leave out the regions of interest that were drawn by hand."`
	Pictures  bool       `help:"Draw a picture of every shot, PNG, into the folder pictures beside the table."`

	Columns columnsFlag `help:"Print what the columns and the flags of the table mean, and stop."`
}

// columnsFlag prints the documentation of the table in the place of a run.
type columnsFlag bool

// BeforeReset is called before the command line is checked for what else is missing.
func (columnsFlag) BeforeReset(app *kong.Kong) error {
	if _, err := app.Stdout.Write(report.Markdown()); err != nil {
		return err
	}
	app.Exit(exitOK)
	return nil
}

// Run fits what is not current, writes the table and shows it.
func (c *batchCmd) Run(ctx context.Context, t terminal) error {
	lab, err := loadSettings(c.Settings, c.Night)
	if err != nil {
		return err
	}
	for _, w := range lab.Warnings() {
		fmt.Fprintf(t.err, "caution: %s\n", w)
	}
	if names := lab.Unstated(); len(names) > 0 {
		fmt.Fprintf(t.err, "no uncertainty is stated for %s: cells ending in _cal that need one stay empty\n", strings.Join(names, ", "))
	}
	if err := refuseResults(c.Night, c.Out); err != nil {
		return err
	}
	options := night.Options{
		Dir: c.Night, Out: c.Out, Settings: lab, Workers: int(c.Workers), Again: c.Again, OwnRegion: c.OwnRegion,
	}
	if c.Pictures {
		if options.Out == "" {
			if options.Out, err = night.Results(c.Night); err != nil {
				return err
			}
		}
		options.Pictures = picture.Folder{Dir: filepath.Join(options.Out, "pictures")}
	}
	out, err := night.Batch(ctx, options, newProgress(t))
	if out == nil {
		return err
	}
	if ctx.Err() != nil {
		return fmt.Errorf("stopped after %d of the shots, which are kept: run the same command again to go on", out.Fitted)
	}
	if err != nil {
		return err
	}
	return c.show(t, out)
}

// show prints the table and what there is to say about the run.
func (c *batchCmd) show(t terminal, out *night.Outcome) error {
	if err := report.Summary(t.out, out.Rows); err != nil {
		return err
	}
	fmt.Fprintf(t.out, "\n%s: %d ok, %d failed; %d done now, %d current before\n%s\n",
		shots(len(out.Rows)), len(out.Rows)-out.Failed, out.Failed, out.Fitted, out.Kept, filepath.Join(out.Dir, report.CSVName))
	for _, text := range out.Cautions {
		fmt.Fprintf(t.err, "caution: %s\n", text)
	}
	const shown = 5
	for i, s := range out.Strays {
		if i == shown {
			fmt.Fprintf(t.err, "passed over %d more files\n", len(out.Strays)-shown)
			break
		}
		fmt.Fprintf(t.err, "passed over %s: %s\n", report.Printable(s.Path), report.Printable(s.Reason))
	}
	if out.Failed > 0 {
		return errSomeFailed
	}
	return nil
}

// loadSettings reads the named settings, or those in the night's folder.
func loadSettings(file, nightDir string) (*settings.Settings, error) {
	if err := isFolder(nightDir); err != nil {
		return nil, err
	}
	if file == "" {
		var err error
		if file, err = settings.Find(nightDir); err != nil {
			return nil, err
		}
	}
	return settings.Load(file)
}

func shots(n int) string {
	if n == 1 {
		return "1 shot"
	}
	return fmt.Sprintf("%d shots", n)
}
