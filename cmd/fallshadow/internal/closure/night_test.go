package closure

import (
	"context"
	"fmt"
	"strconv"
	"strings"
	"sync"
	"sync/atomic"
	"testing"

	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/cmd/fallshadow/internal/simulate"
	"fallshadow/fit"
	"fallshadow/imageio"
	"fallshadow/imageio/synth"
	"fallshadow/model/numbers"
)

// simulated is a preset of simulate with changes: what else is drawn, and in what the laboratory
// that fits is mistaken.
type simulated struct {
	preset  string
	name    string // of the change, "" for the preset as it is
	shots   int
	draw    func(*simulate.Scenario)
	machine []string // pairs of old and new text in the settings that draw and fit
	mistake func(*settings.Settings)
	stretch float64 // of the flight that is believed over the true one, 0 for 1
	every   int     // only each so many is fitted, 0 for all; the others lend their light
	plain   bool    // leave the bounds out
}

// shot is what a night gave for one of its clouds.
type shot struct {
	truth     simulate.Truth
	fit       *fit.Result
	noise     imageio.Noise // of the exposure that was fitted
	reference string
	limit     limit
	failure   error // why there is no fit, which then has no model and no numbers
}

// workers share the nights: the tests hold two processors at most.
const workers = 2

// each calls f for 0 ... n-1 from as many goroutines as there are workers, each with a
// workspace of its own, and returns the first error in order.
func each(n int, f func(i int, ws *fit.Workspace) error) error {
	errs := make([]error, n)
	var next atomic.Int64
	var wg sync.WaitGroup
	for range workers {
		wg.Go(func() {
			ws := fit.NewWorkspace()
			for i := int(next.Add(1)) - 1; i < n; i = int(next.Add(1)) - 1 {
				errs[i] = f(i, ws)
			}
		})
	}
	wg.Wait()
	for i, err := range errs {
		if err != nil {
			return fmt.Errorf("shot %d: %w", i+1, err)
		}
	}
	return nil
}

// drawn is a night with all of its frames in memory.
type drawn struct {
	*simulate.Night
	frames []synth.Frames
	truths []simulate.Truth
}

func (n simulated) drawn() (*drawn, error) {
	s, text, err := simulate.Preset(n.preset)
	if err != nil {
		return nil, err
	}
	s = s.WithShots(n.shots)
	if n.draw != nil {
		n.draw(&s)
	}
	text = []byte(strings.NewReplacer(n.machine...).Replace(string(text)))
	made, err := simulate.New(s, text, n.preset)
	if err != nil {
		return nil, err
	}
	d := &drawn{Night: made, frames: make([]synth.Frames, n.shots), truths: make([]simulate.Truth, n.shots)}
	return d, each(n.shots, func(i int, _ *fit.Workspace) (err error) {
		d.frames[i], d.truths[i], err = made.Draw(i)
		return err
	})
}

// raw returns a shot as a reader of its file would.
func (d *drawn) raw(i int) *imageio.Raw {
	f := d.frames[i]
	raw := &imageio.Raw{Meta: imageio.Metadata{d.Settings.Clock.From: strconv.FormatFloat(d.truths[i].Flight*1e3, 'g', -1, 64)}}
	for role, counts := range f.Planes() {
		pix := make([]float32, len(counts))
		for o, v := range counts {
			pix[o] = float32(v)
		}
		raw.Frames[role] = &imageio.Frame{Width: f.Width, Height: f.Height, Pix: pix}
	}
	return raw
}

// run draws a night and fits its shots as a batch would, every one or each so many.
func (n simulated) run(tb testing.TB) []shot {
	tb.Helper()
	shots, err := n.fitted(tb.Context())
	if err != nil {
		tb.Fatalf("night %s%s: %v", n.preset, n.name, err)
	}
	return shots
}

func (n simulated) fitted(ctx context.Context) ([]shot, error) {
	d, err := n.drawn()
	if err != nil {
		return nil, err
	}
	believed := *d.Settings
	if n.mistake != nil {
		n.mistake(&believed)
	}
	bench, err := night.NewInMemory(ctx, &believed, n.shots, d.raw)
	if err != nil {
		return nil, err
	}
	every, stretch := max(n.every, 1), 1.0
	if n.stretch > 0 {
		stretch = n.stretch
	}
	shots := make([]shot, (n.shots+every-1)/every)
	return shots, each(len(shots), func(k int, ws *fit.Workspace) (err error) {
		s, i := &shots[k], k*every
		s.truth = d.truths[i]
		exposure, result, err := bench.Fit(ctx, i, stretch*s.truth.Flight, ws)
		if ctx.Err() != nil {
			return err
		}
		s.fit, s.failure = result, err
		if err != nil {
			s.fit = &fit.Result{Numbers: numbers.Nothing()}
			exposure, err = &imageio.Exposure{Noise: imageio.Noise{LightShot: 1}}, nil // for the bound
		}
		s.noise, s.reference = exposure.Noise, exposure.Reference
		if !n.plain {
			s.limit, err = limitOf(ctx, d, i, exposure.Noise)
		}
		return err
	})
}
