package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"strconv"
	"strings"

	"fallshadow/cmd/fallshadow/internal/forecast"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
)

// predictCmd says what a planned shot will show.
type predictCmd struct {
	Settings  string       `arg:"" help:"Settings of the laboratory, or the folder of a night that holds them."`
	Atoms     float64      `required:"" placeholder:"N" help:"Number of atoms."`
	TNK       float64      `name:"T-nK" placeholder:"T" xor:"T" required:"" help:"Temperature in nK."`
	Reduced   float64      `name:"t-reduced" placeholder:"t" xor:"T" required:"" help:"Temperature over that of the ideal transition, T/Tc0, instead."`
	Flight    flightRange  `default:"2:30" placeholder:"FROM:TO" help:"Shortest and longest flight in ms."`
	Intensity float64      `placeholder:"S" help:"Probe at the cloud in I/Isat; 0.2 if left out."`
	Picture   pictureSize  `placeholder:"WxH" help:"Picture in saved pixels, such as 640x480; the region of the settings, or 512x512, if left out."`
	Figure    []figureFile `placeholder:"FILE" help:"File to draw the forecast in, .png, .svg or .pdf; may be repeated."`
	Width     millimetres  `default:"86" help:"Width of the figure in mm, 40 to 400."`
	Height    millimetres  `default:"150" help:"Height of the figure in mm, 40 to 400."`
}

// Help carries the caution.
func (c *predictCmd) Help() string { return forecast.Caution }

// flightRange is a pair of flights in ms.
type flightRange struct{ from, to float64 }

// UnmarshalText reads FROM:TO.
func (r *flightRange) UnmarshalText(text []byte) (err error) {
	from, to, two := strings.Cut(string(text), ":")
	if r.from, err = strconv.ParseFloat(from, 64); err == nil {
		r.to, err = strconv.ParseFloat(to, 64)
	}
	if !two || err != nil || !(r.from >= 0 && r.to > r.from && r.to <= 1e4) {
		return fmt.Errorf("%q: write the shortest and the longest flight in ms, such as 2:30", text)
	}
	return nil
}

// pictureSize is the sides of a picture in pixels.
type pictureSize struct{ width, height int }

// UnmarshalText reads WxH.
func (p *pictureSize) UnmarshalText(text []byte) error {
	w, h, two := strings.Cut(string(text), "x")
	var err, other error
	p.width, err = strconv.Atoi(w)
	p.height, other = strconv.Atoi(h)
	if !two || errors.Join(err, other) != nil || min(p.width, p.height) < 16 || max(p.width, p.height) > 8192 {
		return fmt.Errorf("%q: write width and height in pixels, such as 640x480", text)
	}
	return nil
}

// Run prints the forecast and draws it where a file is named.
func (c *predictCmd) Run(ctx context.Context, t terminal) error {
	if err := c.sources().refuse(names(c.Figure)...); err != nil {
		return err
	}
	lab, err := c.settings()
	if err != nil {
		return err
	}
	f, err := forecast.New(ctx, lab, forecast.Request{
		Atoms: c.Atoms, T: c.TNK * 1e-9, Reduced: c.Reduced, From: c.Flight.from * 1e-3, To: c.Flight.to * 1e-3,
		Intensity: c.Intensity, Width: c.Picture.width, Height: c.Picture.height,
	})
	var wrong *forecast.RequestError
	if errors.As(err, &wrong) {
		return misuse{err}
	}
	if err != nil {
		return err
	}
	if err := f.WriteText(t.out); err != nil {
		return err
	}
	return c.draw(t, f)
}

// sources are what the figure must not be written over.
func (c *predictCmd) sources() sources {
	if info, err := os.Stat(c.Settings); err == nil && info.IsDir() {
		return sources{night: c.Settings}
	}
	return sources{settings: c.Settings}
}

func (c *predictCmd) settings() (*settings.Settings, error) {
	if info, err := os.Stat(c.Settings); err == nil && info.IsDir() {
		return loadSettings("", c.Settings)
	}
	return settings.Load(c.Settings)
}

func (c *predictCmd) draw(t terminal, f *forecast.Forecast) error {
	plot := f.Plot()
	for _, file := range c.Figure {
		err := report.Replace(string(file), func(w io.Writer) error { return plot.Render(w, file.format(), float64(c.Width), float64(c.Height)) })
		if err != nil {
			return fmt.Errorf("write the figure %s: %w", file, err)
		}
		fmt.Fprintln(t.out, file)
	}
	return nil
}
