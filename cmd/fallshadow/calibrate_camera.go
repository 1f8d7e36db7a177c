package main

import (
	"context"
	"fmt"
	"io"
	"iter"
	"math"
	"path/filepath"
	"strconv"
	"strings"

	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/imageio"
	"fallshadow/imageio/light"
)

// calibrateCameraCmd measures the camera by photon transfer.
type calibrateCameraCmd struct {
	Night    string `arg:"" help:"Folder with shots. It is only read."`
	Settings string `placeholder:"FILE" help:"Settings of the laboratory, for what makes a shot; fallshadow.toml in the night's folder if left out."`
}

// Run prints what was measured: the figures as comments, then the settings to paste.
func (c *calibrateCameraCmd) Run(ctx context.Context, t terminal) error {
	lab, err := loadSettings(c.Settings, c.Night)
	if err != nil {
		return err
	}
	camera := lab.LightCamera()
	f := &lightFrames{ctx: ctx, dir: c.Night, layout: lab.Layout()}
	if err := f.find(); err != nil {
		return err
	}
	m, err := light.PhotonTransfer(ctx, camera, f.each())
	if ctx.Err() != nil {
		return context.Cause(ctx)
	}
	if err != nil {
		return fmt.Errorf("calibrate the camera from %s: %w%s", c.Night, err, f.why())
	}
	if f.unread > 0 {
		fmt.Fprintf(t.err, "%d of %s could not be read, such as %s\n", f.unread, shots(len(f.night.Shots)), report.Printable(f.first.Error()))
	}
	return writeTransfer(t.out, filepath.Clean(c.Night), m, &lab.Camera)
}

// lightFrames reads the shots of a night one after another.
type lightFrames struct {
	ctx    context.Context
	dir    string
	layout imageio.Layout
	night  imageio.Night
	unread int
	first  error // why the first of them could not be read
}

func (f *lightFrames) find() (err error) {
	if f.night, err = imageio.Scan(f.ctx, f.dir, f.layout); err != nil {
		return err
	}
	if len(f.night.Shots) == 0 {
		return fmt.Errorf("no shots in %s: check the folder and [shots] in the settings; fallshadow check %s tells more", f.dir, f.dir)
	}
	return nil
}

// why adds the reason why shots could not be read, for the case that too few are left.
func (f *lightFrames) why() string {
	if f.unread == 0 {
		return ""
	}
	return fmt.Sprintf("; %d of %s could not be read, such as %v", f.unread, shots(len(f.night.Shots)), f.first)
}

func (f *lightFrames) skip(err error) {
	if f.unread++; f.first == nil {
		f.first = err
	}
}

// each yields the night's darks, each a shot of nothing else, then the shots that can be read.
func (f *lightFrames) each() iter.Seq[*imageio.Raw] {
	return func(yield func(*imageio.Raw) bool) {
		for _, file := range f.night.Darks {
			list, err := imageio.ReadDark(f.ctx, f.dir, file)
			if err != nil {
				f.skip(err)
			}
			for _, frame := range list {
				raw := &imageio.Raw{Digest: imageio.Digest(frame)}
				raw.Frames[imageio.Dark] = frame
				if !yield(raw) {
					return
				}
			}
		}
		for _, s := range f.night.Shots {
			raw, err := imageio.Read(f.ctx, f.dir, s, f.layout)
			if err != nil {
				f.skip(err)
				continue
			}
			if !yield(raw) {
				return
			}
		}
	}
}

// writeTransfer writes the figures as comments and, under them, TOML to put into the
// settings in place of the lines of the same keys.
func writeTransfer(out io.Writer, night string, m *light.Transfer, now *settings.Camera) error {
	var text strings.Builder
	p := func(format string, args ...any) { fmt.Fprintf(&text, format+"\n", args...) }
	p("# The camera of %s, by photon transfer over %d pairs of successive shots.", report.Printable(night), m.Pairs)
	p("# gain:       %s electrons a count%s", plusMinus(m.ElectronsPerCount, m.ElectronsPerCountErr), stated(now.ElectronsPerCount))
	p("# read noise: %s electrons rms%s", plusMinus(m.ReadNoise, m.ReadNoiseErr), stated(now.ReadNoise))
	p("#\n# %14s %16s %16s %10s", "light (counts)", "variance", "straight line", "off (err)")
	for _, point := range m.Points {
		v, err := m.Variance(point)
		p("# %14.1f %16.2f %16.2f %+10.1f", point.Mean, point.Variance, v, (point.Variance-v)/err)
	}
	p("\n[camera]")
	p("electrons_per_count = %s", decimal(m.ElectronsPerCount, m.ElectronsPerCountErr/10))
	p("read_noise_electrons = %s", decimal(m.ReadNoise, m.ReadNoiseErr/10))
	_, err := io.WriteString(out, text.String())
	return err
}

func stated(n settings.Number) string {
	if !n.Given {
		return ""
	}
	return fmt.Sprintf(", the settings say %g", n.Value)
}

// plusMinus writes a number with its standard error to two digits.
func plusMinus(x, err float64) string {
	return decimal(x, err/10) + " +- " + decimal(err, err/10)
}

// decimal writes a number to the digit that a step reaches, one behind the point at least.
func decimal(x, step float64) string {
	digits := 1
	if step > 0 && step < 1 {
		digits = max(digits, int(math.Ceil(-math.Log10(step))))
	}
	return strconv.FormatFloat(x, 'f', digits, 64)
}
