package watch

import (
	"context"
	"fmt"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit"
	"fallshadow/imageio"
)

// load reads the shot of an arrival.
func (w *Watcher) load(ctx context.Context, arrival int) (*imageio.Raw, error) {
	s, ok := w.roll.at(arrival)
	if !ok {
		return nil, fmt.Errorf("shot %s has left the folder", s.Name)
	}
	return night.ReadShot(ctx, w.root, s, w.settings().Layout())
}

func (w *Watcher) darks(ctx context.Context, file imageio.ShotFile) ([]*imageio.Frame, error) {
	return imageio.ReadDark(ctx, w.root, file)
}

// recall fits the last shot once more where its row stands, as after a restart: it can be
// seen at once, and the next one finds all prepared. Other frames than its row was made of
// mean that the layout changed while nobody watched.
func (w *Watcher) recall(ctx context.Context) {
	last := w.roll.newest()
	content := w.roll.knownOf(last).content
	if content == (ledger.Digest{}) {
		return
	}
	f, raw, err := w.Measure(ctx, last)
	if raw != nil && !content.Same(raw.Digest) {
		w.roll.again(time.Now())
	} else if r, _ := w.Row(ctx, last); err == nil && r != nil && !r.Stale { // else it is not of its numbers
		w.audience.Picture(last, f, raw)
	}
}

// Measure fits a shot once more, for who wants to see it; nothing is stored.
func (w *Watcher) Measure(ctx context.Context, shot string) (*report.Facts, *imageio.Raw, error) {
	if !w.isReady() {
		return nil, nil, errNoShot(shot)
	}
	s, arrival, ok := w.roll.find(shot)
	if !ok {
		return nil, nil, errNoShot(shot)
	}
	lab := w.settings()
	raw, err := night.ReadShot(ctx, w.root, s, lab.Layout())
	if err != nil {
		return nil, nil, err
	}
	region := w.regionOf(shot)
	if r, err := w.Row(ctx, shot); err == nil && r != nil && w.Drawn(r) == "left out" {
		region = nil // as its numbers
	}
	f, _, err := w.desk.measure(ctx, lab, region, arrival, raw, fit.NewWorkspace())
	return f, raw, err
}
