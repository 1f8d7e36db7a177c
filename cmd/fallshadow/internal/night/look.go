package night

import (
	"context"
	"fmt"
	"image"
	"iter"
	"slices"

	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/fit"
	"fallshadow/imageio"
	"fallshadow/imageio/light"
)

// Look is a night as a batch would read and prepare it, with no ledger and nothing
// written. What was not reached has its zero value.
type Look struct {
	Shots     []Seen // in natural order
	DarkFiles []imageio.ShotFile
	Strays    []imageio.Stray
	Unclaimed []string // keys of the side table's rows that fit no shot
	Light     *light.Night
	Settings  *settings.Settings // with gain and read noise filled in
	Lab       fit.Lab

	batch   *batch
	bench   *bench
	measure measure
	whole   measure // in the whole frame, nil until a shot asks for it
}

// Seen is a shot and whether its frames can be read.
type Seen struct {
	imageio.Shot
	Meta imageio.Metadata // of name, side table and header
	Err  error            // why the frames cannot be read
}

// TakeLook reads every shot of a night once, as Batch does, and hands the frames to see,
// in natural order and from one goroutine, by the place of their shot. Regions drawn by
// hand are left out. The Look is never nil; beside an error it holds what was found
// before.
func TakeLook(ctx context.Context, o Options, p Progress, see func(shot int, raw *imageio.Raw)) (*Look, error) {
	o.OwnRegion = true
	l := &Look{Settings: o.Settings}
	b := &batch{Options: o, layout: o.Settings.Layout(), progress: p}
	l.batch = b
	b.prepare = func(ctx context.Context, s *settings.Settings, region image.Rectangle, f *frames) (_ func() measure, err error) {
		all := f.all
		f.all = func(yield func(*imageio.Raw) bool) {
			for raw := range all {
				if f.n > 0 {
					see(b.readable[f.n-1], raw)
				}
				if !yield(raw) {
					return
				}
			}
		}
		if l.bench, err = setUp(ctx, s, region, f); err != nil {
			return nil, err
		}
		l.Light, l.Settings, l.Lab, l.measure = l.bench.night, l.bench.settings, l.bench.lab, l.bench.worker()
		return l.bench.worker, nil
	}
	err := b.find(ctx)
	if err == nil {
		err = b.survey(ctx)
	}
	l.DarkFiles, l.Strays, l.Unclaimed = b.scanned.Darks, b.scanned.Strays, b.scanned.Unclaimed
	for _, s := range b.shots {
		l.Shots = append(l.Shots, Seen{s.Shot, s.meta, s.err})
	}
	return l, err
}

// Ready reports whether shots can be exposed and measured.
func (l *Look) Ready() bool { return l.bench != nil }

// Exposed is a readable shot made ready for a fit, or why it cannot be.
type Exposed struct {
	*imageio.Exposure
	Err error
}

// Exposures exposes every readable shot, each with its own light, and yields them by the
// place of their shot, in order.
func (l *Look) Exposures(ctx context.Context) iter.Seq2[int, Exposed] {
	return func(yield func(int, Exposed) bool) {
		b := l.batch
		for at, e := range inOrder(len(b.readable), b.Workers, func(at int) Exposed { return l.expose(ctx, at) }) {
			if !yield(b.readable[at], e) {
				return
			}
		}
	}
}

func (l *Look) expose(ctx context.Context, at int) (e Exposed) {
	defer caught(&e.Err)
	raw, err := l.batch.load(ctx, at)
	if err != nil {
		return Exposed{Err: err}
	}
	e.Exposure, e.Err = l.bench.night.Expose(raw)
	return e
}

// Measure fits the shot at a place as a batch would; the facts are stored nowhere.
func (l *Look) Measure(ctx context.Context, shot int) (_ *report.Facts, err error) {
	defer caught(&err)
	at, ok := slices.BinarySearch(l.batch.readable, shot)
	if !ok {
		return nil, fmt.Errorf("shot %d cannot be read", shot)
	}
	raw, err := l.batch.load(ctx, at)
	if err != nil {
		return nil, err
	}
	f, err := l.measure(ctx, at, raw)
	if err != nil || l.Settings.Region.Auto() {
		return f, err
	}
	f = Grow(f, l.Settings.Fit.Rebin, func() (*report.Facts, error) {
		if l.whole == nil {
			b, err := setUp(ctx, l.batch.Settings, Everything, l.batch.again(ctx))
			if err != nil {
				return nil, err
			}
			l.whole = b.worker()
		}
		return l.whole(ctx, at, raw)
	})
	return f, context.Cause(ctx)
}

// Expose exposes one readable shot; see Exposures.
func (l *Look) Expose(ctx context.Context, shot int) (e Exposed) {
	at, ok := slices.BinarySearch(l.batch.readable, shot)
	if !ok {
		return Exposed{Err: fmt.Errorf("shot %d cannot be read", shot)}
	}
	return l.expose(ctx, at)
}

// Frames yields the dark frames of the night, then those of the first readable shots, at most
// so many.
func (l *Look) Frames(ctx context.Context, most int) iter.Seq[*imageio.Raw] {
	return func(yield func(*imageio.Raw) bool) {
		if !l.batch.yieldDarks(ctx, false, yield) {
			return
		}
		for at := range min(most, len(l.batch.readable)) {
			raw, err := l.batch.load(ctx, at)
			if err == nil && !yield(raw) {
				return
			}
		}
	}
}
