package watch

import (
	"context"
	"errors"
	"fmt"
	"image"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/imageio"
)

// drawing is a region of interest that waits for the first shot it holds for.
type drawing struct{ region image.Rectangle }

// Judge stores a person's word against a shot; an empty one takes it back.
func (w *Watcher) Judge(ctx context.Context, shot, word string) error {
	r, err := w.Row(ctx, shot)
	if err != nil {
		return err
	}
	if r == nil {
		return errNoShot(shot)
	}
	if r.Content == (ledger.Digest{}) {
		return fmt.Errorf("the frames of %s could not be read, so there is nothing to judge", shot)
	}
	if err := w.store.Judge(ctx, r.Content, word); err != nil {
		return err
	}
	w.audience.Changed()
	if word == "" {
		w.audience.Heard(shot + " is no longer marked as bad, by a person at the page")
	} else {
		w.audience.Heard(shot + " was marked as bad at the page: " + word)
	}
	w.askTable()
	return nil
}

// Region returns the region in force for the last shot, nil where no one drew any, and
// the one that waits for its first shot.
func (w *Watcher) Region() (now, next *image.Rectangle) {
	if !w.isReady() {
		return nil, nil
	}
	last := w.roll.newest()
	w.mu.Lock()
	defer w.mu.Unlock()
	if g, ok := ledger.RegionFor(w.regions, last); ok {
		now = &image.Rectangle{Min: image.Pt(g.X0, g.Y0), Max: image.Pt(g.X1, g.Y1)}
	}
	if w.drawn != nil {
		next = &w.drawn.region
	}
	return now, next
}

// smallest is the least side of a region, in saved pixels.
const smallest = 16

// Draw sets the region of interest, in saved pixels, from the next shot on.
func (w *Watcher) Draw(region image.Rectangle) error {
	if !w.isReady() {
		return errors.New("there is no night yet")
	}
	frame, ok := w.desk.frame()
	if !ok {
		return errors.New("no shot was read yet: the size of a frame is not known")
	}
	region = region.Canon().Intersect(image.Rectangle{Max: frame})
	if region.Dx() < smallest || region.Dy() < smallest {
		return fmt.Errorf("a region has at least %d x %d saved pixels inside the frame", smallest, smallest)
	}
	w.mu.Lock()
	w.drawn = &drawing{region}
	w.mu.Unlock()
	w.notes.set("region", "")
	w.desk.foresee(w.settings(), region)
	w.audience.Changed()
	w.audience.Heard(fmt.Sprintf("a region was drawn at the page: x %d to %d, y %d to %d; it holds from the next shot on, the first after %s",
		region.Min.X, region.Max.X, region.Min.Y, region.Max.Y, w.roll.newest()))
	return nil
}

// Undraw takes back a region that has not held for any shot yet.
func (w *Watcher) Undraw() {
	w.mu.Lock()
	waited := w.drawn != nil
	w.drawn = nil
	w.mu.Unlock()
	w.notes.set("region", "")
	w.audience.Changed()
	if waited {
		w.audience.Heard("the region that waited for the next shot was taken back at the page")
	}
}

// beginRegion stores the region that was drawn with the first new shot behind all that
// were there, by name as in a batch, and reports whether there was one. Shots that come late
// but belong before them keep what held then, and a note says that the region waits still.
func (w *Watcher) beginRegion(ctx context.Context, jobs []*job, last string) bool {
	w.mu.Lock()
	defer w.mu.Unlock()
	if w.drawn == nil {
		return false
	}
	for _, j := range jobs {
		if !j.isNew {
			continue
		}
		if last != "" && imageio.Natural(j.Name, last) <= 0 {
			w.notes.set("region", fmt.Sprintf("the region drawn at the page waits for a shot whose name sorts behind %s, as that of %s does not", last, j.Name))
			continue
		}
		r := w.drawn.region
		g := ledger.Region{First: j.Name, X0: r.Min.X, Y0: r.Min.Y, X1: r.Max.X, Y1: r.Max.Y}
		ctx = context.WithoutCancel(ctx)
		err := w.store.SetRegion(ctx, g)
		var regions []ledger.Region
		if err == nil {
			regions, err = w.store.Regions(ctx)
		}
		if err != nil {
			w.notes.set("region", err.Error())
			return false
		}
		w.notes.set("region", "")
		w.regions, w.drawn = regions, nil
		return true
	}
	return false
}

// regionOf returns the region that a person drew and that is in force for a shot.
func (w *Watcher) regionOf(shot string) *ledger.Region {
	w.mu.Lock()
	defer w.mu.Unlock()
	if g, ok := ledger.RegionFor(w.regions, shot); ok {
		return &g
	}
	return nil
}

// Drawn says how a row stands to the region that a person drew and that is in force for its
// shot: "used", "left out", "unknown" where the settings were others, "" where there is none.
func (w *Watcher) Drawn(r *ledger.Row) string {
	region, lab := w.regionOf(r.Shot), w.settings()
	switch {
	case region == nil:
		return ""
	case r.Currency.Settings.Same(night.SettingsDigest(lab, region)):
		return "used"
	case r.Currency.Settings.Same(night.SettingsDigest(lab, nil)):
		return "left out"
	}
	return "unknown"
}
