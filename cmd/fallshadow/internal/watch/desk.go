package watch

import (
	"context"
	"crypto/sha256"
	"image"
	"sync"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/fit"
	"fallshadow/imageio"
)

// desk keeps the benches of a watch. Where neither the settings nor a person name a
// region and the frames are large, shots are fitted in a window about the clouds of the
// last shots; where the cloud is not in it, or as long as there is none, in the whole
// frame with the shot's own light. What is prepared from the frames of the night is
// prepared again, beside the work, while the night is young.
type desk struct {
	ctx  context.Context
	load func(ctx context.Context, arrival int) (*imageio.Raw, error)
	dark func(ctx context.Context, file imageio.ShotFile) ([]*imageio.Frame, error)

	work sync.WaitGroup // beside the shots

	mu       sync.Mutex
	lab      *settings.Settings
	darks    []imageio.ShotFile
	size     image.Point // of the frames
	arrivals int
	held     map[int]*imageio.Raw // shots that are being measured
	contents map[int]ledger.Digest
	stands   []*stand // the one used last first
	window   window
}

// stand is a bench for a region, or one in the making.
type stand struct {
	key
	made   chan struct{} // closed when the rest is there
	bench  *night.Bench
	err    error
	from   []int // arrivals that it was prepared from
	renews bool  // a better one is in the making
}

// key tells stands apart.
type key struct {
	lab    *settings.Settings
	region image.Rectangle // empty: that of the settings
	own    bool            // every shot has its own light
}

// notReadyError says why nothing can be fitted yet.
type notReadyError struct{ error }

func (e *notReadyError) Unwrap() error { return e.error }

func newDesk(ctx context.Context, lab *settings.Settings, load func(context.Context, int) (*imageio.Raw, error), dark func(context.Context, imageio.ShotFile) ([]*imageio.Frame, error)) *desk {
	return &desk{ctx: ctx, lab: lab, load: load, dark: dark, held: map[int]*imageio.Raw{}, contents: map[int]ledger.Digest{}}
}

// wait waits for what is done beside the shots.
func (d *desk) wait() { d.work.Wait() }

// resettle takes over other settings; benches of the old ones serve only who holds them.
func (d *desk) resettle(lab *settings.Settings) {
	d.mu.Lock()
	defer d.mu.Unlock()
	d.lab = lab
	d.stands = nil
}

func (d *desk) setDarks(files []imageio.ShotFile) {
	d.mu.Lock()
	defer d.mu.Unlock()
	d.darks = files
}

// frame returns the size of the frames, once a shot was read.
func (d *desk) frame() (size image.Point, ok bool) {
	d.mu.Lock()
	defer d.mu.Unlock()
	return d.size, d.size != image.Point{}
}

// foresee prepares for a region that will be needed.
func (d *desk) foresee(lab *settings.Settings, region image.Rectangle) {
	d.stand(key{lab: lab, region: region})
}

// measure fits a shot with the given settings, in the region that a person drew or in the
// one that suits. reference is a digest of the frames that its light was made from.
func (d *desk) measure(ctx context.Context, lab *settings.Settings, drawn *ledger.Region, arrival int, raw *imageio.Raw, workspace *fit.Workspace) (f *report.Facts, reference ledger.Digest, err error) {
	defer d.hold(arrival, raw)()
	in := key{lab: lab}
	switch frame := sizeOf(raw); {
	case drawn != nil:
		in.region = image.Rect(drawn.X0, drawn.Y0, drawn.X1, drawn.Y1)
	case lab.Region.Auto() && frame.X*frame.Y > fit.Large:
		if f, reference, err = d.find(ctx, lab, frame, arrival, raw, workspace); err == nil {
			d.follow(lab, f, frame)
		}
		return f, reference, err
	}
	if f, reference, err = d.measureIn(ctx, in, arrival, raw, workspace); err != nil || in.region.Empty() && lab.Region.Auto() {
		return f, reference, err
	}
	var reference2 ledger.Digest
	grown := night.Grow(f, lab.Fit.Rebin, func() (whole *report.Facts, err error) {
		whole, reference2, err = d.measureIn(ctx, key{lab: lab, region: night.Everything, own: true}, arrival, raw, workspace)
		return whole, err
	})
	if grown != f {
		reference = reference2
	}
	return grown, reference, context.Cause(ctx)
}

// find fits a shot in the window, and in the whole frame where there is no window yet or
// the cloud is not inside.
func (d *desk) find(ctx context.Context, lab *settings.Settings, frame image.Point, arrival int, raw *imageio.Raw, workspace *fit.Workspace) (f *report.Facts, reference ledger.Digest, err error) {
	k := d.windowKey(lab)
	if k != nil {
		f, reference, err = d.measureIn(ctx, *k, arrival, raw, workspace)
		if err != nil || k.region.Empty() || !lost(f) {
			return f, reference, err
		}
	}
	all, reference2, err := d.measureIn(ctx, key{lab: lab, own: true}, arrival, raw, workspace)
	if err == nil && k != nil && all.Fit.Model == fit.ModelNone {
		return f, reference, nil // it is nowhere; the window has the better light
	}
	return all, reference2, err
}

// lost reports whether a cloud may be elsewhere, or larger.
func lost(f *report.Facts) bool {
	return f.Fit.Model == fit.ModelNone || f.Fit.Touches
}

func (d *desk) measureIn(ctx context.Context, k key, arrival int, raw *imageio.Raw, workspace *fit.Workspace) (*report.Facts, ledger.Digest, error) {
	s := d.stand(k)
	select {
	case <-s.made:
	case <-ctx.Done():
		return nil, ledger.Digest{}, context.Cause(ctx)
	}
	if s.err != nil {
		return nil, ledger.Digest{}, &notReadyError{s.err}
	}
	f, err := s.bench.Measure(ctx, arrival, raw, workspace)
	if err != nil {
		return nil, ledger.Digest{}, err
	}
	d.renew(s)
	lights, err := s.bench.Lights(ctx, arrival)
	return f, d.reference(s.from, lights), err
}

// reference is the digest of the shots that a result leans on.
func (d *desk) reference(prepared, lights []int) ledger.Digest {
	d.mu.Lock()
	defer d.mu.Unlock()
	h := sha256.New()
	for _, list := range [][]int{prepared, lights} {
		for _, arrival := range list {
			content := d.contents[arrival]
			h.Write(content[:])
		}
		h.Write([]byte("/"))
	}
	return ledger.Digest(h.Sum(nil))
}

// hold keeps the frames of a shot at hand while it is measured, so that they need not be
// read again for their light.
func (d *desk) hold(arrival int, raw *imageio.Raw) (release func()) {
	d.mu.Lock()
	defer d.mu.Unlock()
	d.held[arrival] = raw
	d.contents[arrival] = raw.Digest
	d.size = sizeOf(raw)
	d.arrivals = max(d.arrivals, arrival+1)
	return func() {
		d.mu.Lock()
		defer d.mu.Unlock()
		delete(d.held, arrival)
	}
}

// read returns the frames of a shot, from memory where it is being measured.
func (d *desk) read(ctx context.Context, arrival int) (*imageio.Raw, error) {
	d.mu.Lock()
	raw := d.held[arrival]
	d.mu.Unlock()
	if raw != nil {
		return raw, nil
	}
	raw, err := d.load(ctx, arrival)
	if err == nil {
		d.mu.Lock()
		d.contents[arrival] = raw.Digest
		d.mu.Unlock()
	}
	return raw, err
}

func sizeOf(raw *imageio.Raw) image.Point {
	for _, f := range raw.Frames {
		if f != nil {
			return image.Pt(f.Width, f.Height)
		}
	}
	return image.Point{}
}
