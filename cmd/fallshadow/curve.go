package main

import (
	"context"
	"fmt"
	"io"
	"path/filepath"
	"strconv"
	"strings"

	"fallshadow/cmd/fallshadow/internal/figure"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/study"
)

// nightArgs name a fitted night and choose among its shots.
type nightArgs struct {
	Night    string        `arg:"" help:"Folder of a night that batch has fitted."`
	Settings string        `placeholder:"FILE" help:"Settings of the laboratory; fallshadow.toml in the night's folder if left out."`
	Out      string        `placeholder:"DIR" help:"Folder with the ledger; results/NIGHT if left out."`
	Where    []study.Range `placeholder:"NAME=LOW:HIGH" sep:"none" help:"Take only shots in this range of a column, of a scan variable, or of number, that of the shot. May be repeated."`
	Without  []string      `placeholder:"FLAG" help:"Leave out shots with this flag; any stands for every flag."`
}

// load reads the night and selects.
func (c *nightArgs) load(ctx context.Context) (*study.Night, *study.Chosen, error) {
	lab, err := loadSettings(c.Settings, c.Night)
	if err != nil {
		return nil, nil, err
	}
	n, err := study.Load(ctx, c.Night, c.Out, lab)
	if err != nil {
		return nil, nil, err
	}
	chosen, err := n.Select(study.Selection{Where: c.Where, Without: c.Without})
	return n, chosen, err
}

// refuse fails where files to write would take the place of something that is read.
func (c *nightArgs) refuse(files ...string) error {
	s, err := sourcesOf(c.Night, c.Settings, c.Out)
	if err != nil {
		return err
	}
	return s.refuse(files...)
}

// figureArgs are the sizes of figures and where they go.
type figureArgs struct {
	Figure []figureFile `placeholder:"FILE" help:"File to draw the figure in, .png, .svg or .pdf; may be repeated."`
	Width  millimetres  `default:"86" help:"Width of the figure in mm, 40 to 400; letters keep their size."`
	Height millimetres  `default:"66" help:"Height of the figure in mm, 40 to 400."`
}

// millimetres is a side of a figure.
type millimetres float64

// UnmarshalText refuses sides that letters do not fit in and those that no page has, whose
// pixels would fill the memory.
func (m *millimetres) UnmarshalText(text []byte) error {
	const least, most = 40, 400
	v, err := strconv.ParseFloat(string(text), 64)
	if err != nil || !(v >= least && v <= most) {
		return fmt.Errorf("%q: a side of a figure is %d to %d mm", text, least, most)
	}
	*m = millimetres(v)
	return nil
}

// figureFile is the name of a file whose ending is a format.
type figureFile string

// UnmarshalText refuses other endings.
func (f *figureFile) UnmarshalText(text []byte) error {
	*f = figureFile(text)
	_, err := figure.FormatOf(string(text))
	return err
}

func (f figureFile) format() string {
	format, _ := figure.FormatOf(string(f))
	return format
}

// files are those named, or all formats under the name that is usual.
func (c *figureArgs) files(usual string) []figureFile {
	files := c.Figure
	if files == nil {
		for _, ending := range figure.Formats {
			files = append(files, figureFile(usual+"."+ending))
		}
	}
	return files
}

// save writes a figure.
func (c *figureArgs) save(t terminal, f *figure.Figure, usual string) error {
	for _, file := range c.files(usual) {
		if err := study.Save(f, string(file), float64(c.Width), float64(c.Height)); err != nil {
			return err
		}
		fmt.Fprintln(t.out, file)
	}
	return nil
}

// curveCmd reads a fitted night as one experiment.
type curveCmd struct {
	nightArgs
	X      string         `default:"t_reduced" help:"What to draw along: a column, a scan variable, or number, that of the shot."`
	Y      string         `default:"fraction" help:"What to draw against it."`
	XUnit  string         `placeholder:"UNIT" help:"Unit of a scan variable on the axis."`
	Law    []string       `placeholder:"LAW" enum:"ideal,finite-size,interacting,semi-ideal,hartree-fock" help:"Laws to draw, of ${enum}; ideal, semi-ideal, hartree-fock and that of the least chi2 if left out."`
	Group  study.Grouping `placeholder:"NAME[:WIDTH]" help:"Draw and list means of shots with equal NAME, or of bins of it."`
	Report pageFile       `placeholder:"FILE" help:"Write the night as one HTML page that needs no other file: curve, trends, flags, pictures of flagged shots, settings."`
	figureArgs
}

// pageFile is the name of a page.
type pageFile string

// UnmarshalText refuses other endings, those of camera files among them.
func (f *pageFile) UnmarshalText(text []byte) error {
	*f = pageFile(text)
	if ending := strings.ToLower(filepath.Ext(string(text))); ending != ".html" && ending != ".htm" {
		return fmt.Errorf("%s: a page is written as .html", text)
	}
	return nil
}

// outputs are all files that Run writes.
func (c *curveCmd) outputs() ([]string, error) {
	s, err := sourcesOf(c.Night, c.Settings, c.Out)
	usual := filepath.Join(s.results, "curve")
	files := append(names(c.files(usual)), usual+".csv", usual+".json")
	if c.Report != "" {
		files = append(files, string(c.Report))
	}
	return files, err
}

// Run analyses the night and writes its figure.
func (c *curveCmd) Run(ctx context.Context, t terminal) error {
	files, err := c.outputs()
	if err != nil {
		return err
	}
	if err := c.refuse(files...); err != nil {
		return err
	}
	n, chosen, err := c.load(ctx)
	if err != nil {
		return err
	}
	a, err := n.Analyse(ctx, chosen)
	if err != nil {
		return err
	}
	d, err := a.Plot(study.Axes{X: c.X, Y: c.Y, XUnit: c.XUnit, Laws: c.Law, Group: c.Group})
	if err != nil {
		return err
	}
	if err := a.WriteText(t.out); err != nil {
		return err
	}
	if c.Group.Quantity != "" {
		if err := a.WriteGroups(t.out, c.Group); err != nil {
			return err
		}
	}
	fmt.Fprintln(t.out)
	study.WriteLeftOut(t.out, "not drawn", d.LeftOut)
	if d.Note != "" {
		fmt.Fprintln(t.out, d.Note)
	}
	if err := c.save(t, d.Figure, filepath.Join(n.Dir, "curve")); err != nil {
		return err
	}
	if err := c.tables(t, a, filepath.Join(n.Dir, "curve")); err != nil {
		return err
	}
	return c.report(ctx, t, a, d)
}

// report writes the page where one is asked for.
func (c *curveCmd) report(ctx context.Context, t terminal, a *study.Analysis, d *study.Drawn) error {
	if c.Report == "" {
		return nil
	}
	err := report.Replace(string(c.Report), func(w io.Writer) error { return a.WriteReport(ctx, w, d) })
	if err != nil {
		return fmt.Errorf("write the report %s: %w", c.Report, err)
	}
	fmt.Fprintln(t.out, c.Report)
	return nil
}

// tables writes the shots and the numbers for other programs.
func (c *curveCmd) tables(t terminal, a *study.Analysis, base string) error {
	for _, out := range []struct {
		file  string
		write func(io.Writer) error
	}{{base + ".csv", a.WriteTable}, {base + ".json", a.WriteJSON}} {
		if err := report.Replace(out.file, out.write); err != nil {
			return fmt.Errorf("write %s: %w", out.file, err)
		}
		fmt.Fprintln(t.out, out.file)
	}
	return nil
}
