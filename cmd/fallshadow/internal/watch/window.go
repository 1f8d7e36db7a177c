package watch

import (
	"image"
	"math"
	"slices"

	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/fit"
)

// window is the part of large frames in which shots are fitted.
type window struct {
	recent []image.Rectangle // what the last shots needed
	now    *key              // nil: there is none yet
	next   *stand            // in the making
}

const (
	// remembered is how many shots a window is made for: a scan jumps between large and
	// small clouds.
	remembered = 12
	// windowMargin is added on every side, saved pixels.
	windowMargin = 32
	// windowGrid is what its corners are rounded to.
	windowGrid = 32
)

// windowKey returns the key of the window's bench, nil where there is none yet.
func (d *desk) windowKey(lab *settings.Settings) *key {
	d.mu.Lock()
	defer d.mu.Unlock()
	w := &d.window
	if w.next != nil {
		select {
		case <-w.next.made:
			d.moveWindow()
		default:
		}
	}
	if w.now != nil && w.now.lab != lab {
		w.now = nil
	}
	return w.now
}

// moveWindow takes the next window, if its bench came to something; the lock is held.
func (d *desk) moveWindow() {
	w := &d.window
	next := w.next
	w.next = nil
	if next.err != nil || next.lab != d.lab {
		return
	}
	if w.now != nil {
		old := *w.now
		d.stands = slices.DeleteFunc(d.stands, func(s *stand) bool { return s.key == old })
	}
	w.now = &next.key
	d.keep(next)
}

// follow lets the window follow the cloud of a shot.
func (d *desk) follow(lab *settings.Settings, f *report.Facts, frame image.Point) {
	if f.Fit.Model == fit.ModelNone {
		return
	}
	d.mu.Lock()
	defer d.mu.Unlock()
	w := &d.window
	w.recent = append(w.recent, night.Extent(f, lab.Fit.Rebin, 4, 1.8, windowMargin))
	w.recent = w.recent[max(0, len(w.recent)-remembered):]
	if lab != d.lab || w.next != nil {
		return
	}
	k := key{lab: lab, region: d.wanted(frame)}
	if w.now != nil && w.now.lab == lab {
		now := regionOr(w.now.region, frame)
		tight := night.Extent(f, lab.Fit.Rebin, 3, 1.4, 8).Intersect(image.Rectangle{Max: frame})
		if *w.now == k || tight.In(now) && area(now) <= 2*area(regionOr(k.region, frame)) {
			return
		}
	}
	w.next = d.make(k, first, true)
}

// wanted is the region that holds what the last shots needed, empty for the whole frame
// where that is not much more; the lock is held.
func (d *desk) wanted(frame image.Point) image.Rectangle {
	union := image.Rectangle{}
	for _, r := range d.window.recent {
		union = union.Union(r)
	}
	if r := onGrid(union, frame); area(r)*10 <= frame.X*frame.Y*6 {
		return r
	}
	return image.Rectangle{}
}

// onGrid rounds a region outwards to the grid, inside the frame.
func onGrid(r image.Rectangle, frame image.Point) image.Rectangle {
	floor := func(x int) int { return int(math.Floor(float64(x)/windowGrid)) * windowGrid }
	r = image.Rect(floor(r.Min.X), floor(r.Min.Y), floor(r.Max.X+windowGrid-1), floor(r.Max.Y+windowGrid-1))
	return r.Intersect(image.Rectangle{Max: frame})
}

func regionOr(r image.Rectangle, frame image.Point) image.Rectangle {
	if r.Empty() {
		return image.Rectangle{Max: frame}
	}
	return r
}

func area(r image.Rectangle) int { return r.Dx() * r.Dy() }
