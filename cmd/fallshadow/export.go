package main

import (
	"context"
	"fmt"
	"io"
	"slices"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/study"
)

// exportCmd writes the table of a fitted night for other programs.
type exportCmd struct {
	nightArgs
	Files []exportFile `arg:"" name:"output" optional:"" help:"Files to write the table to, in place of what they held, not shots to read: .csv, .fits or .jsonl says the form. Without any, CSV goes to the terminal."`
	Good  bool         `help:"Leave out shots that failed, that a person gave a word against, and those that are not of the settings of now; so does --where and --without."`
}

// exportFile is the name of a file whose ending is a form of the table.
type exportFile string

// UnmarshalText refuses other endings.
func (f *exportFile) UnmarshalText(text []byte) error {
	*f = exportFile(text)
	_, err := report.ExportFor(string(text))
	return err
}

// Run writes the files, and says which shots were left out.
func (c *exportCmd) Run(ctx context.Context, t terminal) error {
	if err := c.refuse(names(c.Files)...); err != nil {
		return err
	}
	n, chosen, err := c.load(ctx)
	if err != nil {
		return err
	}
	rows, scan := n.Rows, n.Settings.Shots.Scan
	if c.Good || c.Where != nil || c.Without != nil {
		rows = make([]ledger.Row, len(chosen.Rows))
		for i, r := range chosen.Rows {
			rows[i] = *r
		}
		study.WriteLeftOut(t.err, "left out", chosen.LeftOut)
	}
	warnUnsettled(t.err, rows)
	if c.Files == nil {
		return report.Exports[0].Write(t.out, rows, scan)
	}
	for _, f := range c.Files {
		form, err := report.ExportFor(string(f))
		if err != nil {
			return err
		}
		err = report.Replace(string(f), func(w io.Writer) error { return form.Write(w, rows, scan) })
		if err != nil {
			return fmt.Errorf("export to %s: %w", f, err)
		}
		fmt.Fprintf(t.out, "%s: %s\n", f, shots(len(rows)))
	}
	return nil
}

// warnUnsettled says how many rows are not what batch would make of their shots now.
func warnUnsettled(w io.Writer, rows []ledger.Row) {
	for _, f := range report.AllFlags() {
		n := 0
		for i := range rows {
			if slices.Contains(report.Flags(&rows[i]), f.Name) {
				n++
			}
		}
		if n > 0 && (f.Name == report.FlagStale || f.Name == report.FlagProvisional) {
			fmt.Fprintf(w, "caution: %d of %s flagged %s: %s\n", n, shots(len(rows)), f.Name, f.Sentence)
		}
	}
}
