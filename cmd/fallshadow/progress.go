package main

import (
	"fmt"
	"io"

	"github.com/vbauerster/mpb/v8"
	"github.com/vbauerster/mpb/v8/decor"

	"fallshadow/cmd/fallshadow/internal/night"
)

// newProgress shows the work as a bar on a screen, and as lines elsewhere.
func newProgress(t terminal) night.Progress {
	if t.live {
		return &barProgress{out: t.err}
	}
	return &lineProgress{out: t.err}
}

// lineProgress writes a line for each step that has something to say.
type lineProgress struct {
	out         io.Writer
	done, steps int
}

func (p *lineProgress) Begin(stage string, steps int) {
	p.done, p.steps = 0, steps
	fmt.Fprintf(p.out, "%s %s\n", stage, shots(steps))
}

func (p *lineProgress) Step(line string, _ bool) {
	p.done++
	if line != "" {
		fmt.Fprintf(p.out, "[%d/%d] %s\n", p.done, p.steps, line)
	}
}

func (p *lineProgress) End() {}

// barProgress draws a bar, with the lines of failed steps above it.
type barProgress struct {
	out io.Writer
	all *mpb.Progress
	bar *mpb.Bar
}

func (p *barProgress) Begin(stage string, steps int) {
	p.all = mpb.New(mpb.WithOutput(p.out), mpb.WithWidth(48))
	p.bar = p.all.AddBar(int64(steps),
		mpb.PrependDecorators(decor.Name(stage+" "), decor.CountersNoUnit("%d/%d ")),
		mpb.AppendDecorators(decor.OnComplete(decor.AverageETA(decor.ET_STYLE_GO), "")))
}

func (p *barProgress) Step(line string, failed bool) {
	if failed {
		fmt.Fprintln(p.all, line)
	}
	p.bar.Increment()
}

// End gives up on a bar that is not full, which would be waited for without end.
func (p *barProgress) End() {
	p.bar.Abort(false)
	p.all.Wait()
}
