package page

import (
	"container/list"
	"context"
	"crypto/rand"
	"image"
	"math"
	"sync"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/picture"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/imageio"
)

// view is what a browser draws of a shot: pictures ready to be sent, and lines in the
// pixels of the fitted map.
type view struct {
	Mark     string        `json:"mark"` // tells it from other views, also of the same shot
	Width    int           `json:"width"`
	Height   int           `json:"height"`
	Region   [4]int        `json:"region"`          // x0, y0, x1, y1 of the saved frame
	Frame    [2]int        `json:"frame"`           // size of the saved frame
	Stale    bool          `json:"stale,omitempty"` // drawn with other settings than the numbers are of
	PixelUm  float64       `json:"pixel_um"`
	Top      float64       `json:"top"`
	Sigmas   float64       `json:"sigmas"`
	Outlines []viewOutline `json:"outlines"`
	Cuts     []viewCut     `json:"cuts"`
	pictures map[string][]byte
}

type viewOutline struct {
	Part string       `json:"part"`
	Line [][2]float64 `json:"line"`
}

// viewCut holds null where no pixel counts.
type viewCut struct {
	Line    [4]float64 `json:"line"`
	Strip   int        `json:"strip"`
	Um      []*float64 `json:"um"`
	Data    []*float64 `json:"data"`
	Thermal []*float64 `json:"thermal"`
	Total   []*float64 `json:"total"`
}

// newView draws a shot. Either argument may be nil.
func newView(f *report.Facts, raw *imageio.Raw) *view {
	v := &view{Mark: rand.Text(), pictures: map[string][]byte{}}
	if raw != nil {
		for _, frame := range raw.Frames {
			if frame != nil {
				v.Frame = [2]int{frame.Width, frame.Height}
			}
		}
		if img := picture.Frame(raw); img != nil {
			v.add("frame", img)
		}
	}
	if f == nil {
		return v
	}
	p := picture.New(f)
	if p == nil {
		return v
	}
	v.Width, v.Height, v.PixelUm, v.Top, v.Sigmas = p.Width, p.Height, p.PixelUm, p.Top, p.Sigmas
	v.Region = [4]int{p.Region.Min.X, p.Region.Min.Y, p.Region.Max.X, p.Region.Max.Y}
	for _, o := range p.Outlines {
		v.Outlines = append(v.Outlines, viewOutline{o.Part, rounded(o.Line)})
	}
	for _, c := range p.Cuts {
		v.Cuts = append(v.Cuts, viewCut{
			[4]float64{c.StartX, c.StartY, c.EndX, c.EndY}, c.Strip,
			digits(c.Um, 0.1), digits(c.Data, 1e-4), digits(c.Thermal, 1e-4), digits(c.Total, 1e-4),
		})
	}
	v.add("density", p.Density)
	v.add("faint", p.Faint)
	v.add("residual", p.Residual)
	return v
}

func (v *view) add(kind string, img image.Image) {
	if data, err := picture.PNG(img); err == nil {
		v.pictures[kind] = data
	}
}

func rounded(line []picture.Point) [][2]float64 {
	out := make([][2]float64, len(line))
	for i, p := range line {
		out[i] = [2]float64{math.Round(100*p.X) / 100, math.Round(100*p.Y) / 100}
	}
	return out
}

// digits rounds values to a step for the way to the browser.
func digits(values []float64, step float64) []*float64 {
	out := make([]*float64, len(values))
	for i, v := range values {
		if v-v == 0 {
			r := math.Round(v/step) / math.Round(1/step)
			out[i] = &r
		}
	}
	return out
}

// views keeps the views of the shots seen last. Others are measured again when they are
// asked for, one at a time.
type views struct {
	measure func(ctx context.Context, shot string) (*report.Facts, *imageio.Raw, error)
	one     chan struct{} // held by who measures

	mu     sync.Mutex
	recent *list.List // of *kept, the latest first
	at     map[seen]*list.Element
}

// seen is what a view was drawn from: a shot with these pixels.
type seen struct {
	shot    string
	content ledger.Digest
}

type kept struct {
	seen
	view *view
}

// remembered is how many views are kept: about 0.3 MB each.
const remembered = 48

func newViews(measure func(context.Context, string) (*report.Facts, *imageio.Raw, error)) *views {
	return &views{measure: measure, one: make(chan struct{}, 1), recent: list.New(), at: map[seen]*list.Element{}}
}

// put keeps the view of a shot.
func (s *views) put(shot string, v *view, raw *imageio.Raw) *view {
	of := seen{shot: shot}
	if raw != nil {
		of.content = raw.Digest
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	if e, ok := s.at[of]; ok {
		s.recent.Remove(e)
	}
	s.at[of] = s.recent.PushFront(&kept{of, v})
	for s.recent.Len() > remembered {
		last := s.recent.Back()
		delete(s.at, last.Value.(*kept).seen)
		s.recent.Remove(last)
	}
	return v
}

// forgetStale drops the views that were drawn with other settings than the numbers are of: the
// settings may have changed again.
func (s *views) forgetStale() {
	s.mu.Lock()
	defer s.mu.Unlock()
	for of, e := range s.at {
		if e.Value.(*kept).view.Stale {
			delete(s.at, of)
			s.recent.Remove(e)
		}
	}
}

func (s *views) find(of seen) *view {
	s.mu.Lock()
	defer s.mu.Unlock()
	e, ok := s.at[of]
	if !ok {
		return nil
	}
	s.recent.MoveToFront(e)
	return e.Value.(*kept).view
}

// get returns the view of the shot of a row, measured now where it is not kept: by settings
// that its numbers are not of if they are stale. One that cannot be fitted shows its frame.
func (s *views) get(ctx context.Context, row *ledger.Row, stale bool) (*view, error) {
	of := seen{row.Shot, row.Content}
	if v := s.find(of); v != nil {
		return v, nil
	}
	select {
	case s.one <- struct{}{}:
		defer func() { <-s.one }()
	case <-ctx.Done():
		return nil, ctx.Err()
	}
	if v := s.find(of); v != nil {
		return v, nil
	}
	f, raw, err := s.measure(ctx, row.Shot)
	switch {
	case ctx.Err() != nil: // who asked has left, and a fit was cut short
		return nil, ctx.Err()
	case raw == nil:
		return nil, err
	case err != nil && row.Reason == "": // it was fitted before, so will be again
		return newView(nil, raw), nil
	}
	v := newView(f, raw)
	v.Stale = stale
	return s.put(row.Shot, v, raw), nil
}
