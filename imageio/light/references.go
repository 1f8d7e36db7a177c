package light

import (
	"container/list"
	"context"
	"fmt"
	"slices"
	"sync"

	"fallshadow/imageio"
)

// Cloud is what an earlier fit of a shot says of where its atoms are, in the pixels of
// the exposure. Mask is true where atoms may be and the light must not be compared; all
// false says that the picture is empty. Transmission, where not nil, is the fitted atoms
// frame over the fitted light, positive; the atoms frame is divided by it first, so that
// wings outside the mask do not pull the reference.
type Cloud struct {
	Mask         []bool
	Transmission []float64
}

// References holds the light frames of a night and finds the best light for a shot. It
// may be used by many goroutines; what it returns does not depend on how many.
//
// Memory: the light frames of at most k+8 shots as float32 with their block values, 4.7
// bytes a pixel, and the sums of their products, 8 bytes for each pair and tile of 16x16
// pixels: for k = 40 and 500x500 pixels 57 MB and 15 MB.
type References struct {
	night *Night
	k     int
	load  func(ctx context.Context, shot int) (*imageio.Raw, error)
	tiles *tiling

	mu     sync.Mutex
	shots  int
	recent *list.List // of *lightFrame, the latest used first
	at     map[int]*list.Element
}

// NewReferences prepares the references of a night of so many shots in natural order, k
// light frames to a shot. load reads a shot by its place in that order, again and again
// where memory is short; it must give the same frames each time. Shots that Expose refuses
// lend no light.
func NewReferences(n *Night, k, shots int, load func(ctx context.Context, shot int) (*imageio.Raw, error)) *References {
	return &References{
		night: n, k: k, shots: shots, load: load,
		tiles:  newTiling(n.win.width/n.win.bin, n.win.height/n.win.bin, k),
		recent: list.New(), at: map[int]*list.Element{},
	}
}

// Extend tells that the night has so many shots by now: more may come while it is taken.
func (r *References) Extend(shots int) {
	r.mu.Lock()
	defer r.mu.Unlock()
	r.shots = max(r.shots, shots)
}

func (r *References) size() int {
	r.mu.Lock()
	defer r.mu.Unlock()
	return r.shots
}

// lightFrame is the light frame of one shot, filled and rebinned, electrons.
type lightFrame struct {
	shot     int
	ready    sync.Once
	err      error
	pix      []float32
	values   []float64 // of its tiles
	mean     float64   // of its blocks
	darkVar  float64   // variance of its own dark, 0 where the night's was subtracted
	products map[int][]float64
	guard    sync.Mutex // of products
}

// readVar is the read variance of a pixel of the exposures, electrons².
func (r *References) readVar() float64 { return r.night.readVar() * r.night.win.pixels() }

// frame returns the light frame of a shot, from memory or read again.
func (r *References) frame(ctx context.Context, shot int) (*lightFrame, error) {
	f := r.entry(shot)
	f.ready.Do(func() { f.err = r.read(ctx, f) })
	if f.err != nil && ctx.Err() != nil {
		r.forget(shot)
		return nil, ctx.Err()
	}
	return f, f.err
}

func (r *References) entry(shot int) *lightFrame {
	r.mu.Lock()
	defer r.mu.Unlock()
	if e, ok := r.at[shot]; ok {
		r.recent.MoveToFront(e)
		return e.Value.(*lightFrame)
	}
	f := &lightFrame{shot: shot, products: map[int][]float64{}}
	r.at[shot] = r.recent.PushFront(f)
	for r.recent.Len() > r.k+8 {
		last := r.recent.Back()
		delete(r.at, last.Value.(*lightFrame).shot)
		r.recent.Remove(last)
	}
	return f
}

func (r *References) forget(shot int) {
	r.mu.Lock()
	defer r.mu.Unlock()
	if e, ok := r.at[shot]; ok {
		delete(r.at, shot)
		r.recent.Remove(e)
	}
}

// Offer hands over the frames of a shot that Expose took, so that they need not be loaded and
// judged again to lend their light.
func (r *References) Offer(shot int, raw *imageio.Raw) {
	f := r.entry(shot)
	f.ready.Do(func() { f.err = r.fill(f, raw, true) })
}

// read loads a light frame.
func (r *References) read(ctx context.Context, f *lightFrame) error {
	raw, err := r.load(ctx, f.shot)
	if err != nil {
		return err
	}
	if raw == nil {
		return refuse(NoLight, "")
	}
	return r.fill(f, raw, false)
}

// fill fills a light frame in from the frames of its shot. Frames that Expose would refuse lend
// no light: exchanged ones have the shadow of a cloud in it.
func (r *References) fill(f *lightFrame, raw *imageio.Raw, sound bool) error {
	n := r.night
	l, err := n.lend(raw, sound)
	if err != nil {
		return err
	}
	if l.saturated*1000 > len(l.pix) {
		return refuse(Saturated, "light: %d pixels", l.saturated)
	}
	if l.dark.own {
		f.darkVar = l.dark.variance * n.win.pixels()
	}
	pix := n.win.sum(l.pix)
	f.values = r.tiles.values(pix)
	blocks := 0
	for i, v := range r.tiles.sums(f.values) {
		f.mean += v
		blocks += r.tiles.blocks[i]
	}
	f.mean /= float64(max(blocks, 1))
	if !(f.mean > 0) {
		return refuse(EmptyProbe, "mean %.2g electrons a pixel", f.mean)
	}
	f.pix = make([]float32, len(pix))
	for i, v := range pix {
		f.pix[i] = float32(v)
	}
	return nil
}

// Set returns the shots, by their place in natural order, whose light frames the reference
// of a shot may be made of, the nearest first.
func (r *References) Set(ctx context.Context, shot int) ([]int, error) {
	frames, err := r.nearest(ctx, shot)
	set := make([]int, len(frames))
	for i, f := range frames {
		set[i] = f.shot
	}
	return set, err
}

// nearest returns the light frames of the k shots nearest to a shot in natural order, the
// shot itself among them, ties to the earlier, shots without a usable light frame passed
// over; the nearest stands first. Of frames of the same pixels, as copies of a shot have, only
// the nearest is returned: their noise is one, and two of them would be taken for less of it.
func (r *References) nearest(ctx context.Context, shot int) ([]*lightFrame, error) {
	shots := r.size()
	if shot < 0 || shot >= shots {
		return nil, fmt.Errorf("shot %d is not one of the %d shots of the night", shot, shots)
	}
	var frames []*lightFrame
	for d := 0; d < shots && len(frames) < r.k; d++ {
		for _, s := range []int{shot - d, shot + d} {
			if s < 0 || s >= shots || d == 0 && len(frames) > 0 || len(frames) == r.k {
				continue
			}
			f, err := r.frame(ctx, s)
			if ctx.Err() != nil {
				return nil, ctx.Err()
			}
			if err == nil {
				frames = append(frames, f)
			}
		}
	}
	return distinct(frames), nil
}

func distinct(frames []*lightFrame) (kept []*lightFrame) {
	for _, f := range frames {
		if !slices.ContainsFunc(kept, func(g *lightFrame) bool { return f.mean == g.mean && slices.Equal(f.pix, g.pix) }) {
			kept = append(kept, f)
		}
	}
	return kept
}

// productsOf returns the sums over tiles of the products of two light frames; they are
// kept with the later of the two.
func (r *References) productsOf(a, b *lightFrame) []float64 {
	if a.shot < b.shot {
		a, b = b, a
	}
	a.guard.Lock()
	defer a.guard.Unlock()
	p, ok := a.products[b.shot]
	if !ok {
		p = r.tiles.products(a.values, b.values)
		a.products[b.shot] = p
	}
	return p
}
