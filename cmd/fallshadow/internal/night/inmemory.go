package night

import (
	"context"
	"image"
	"iter"

	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/fit"
	"fallshadow/imageio"
)

// InMemory measures the shots of a night whose frames are at hand and whose results nobody
// stores, the way a batch does.
type InMemory struct {
	bench *bench
	load  func(at int) *imageio.Raw
}

// NewInMemory prepares the light of n shots; load returns one of them by its place, as often
// as asked for and from several goroutines.
func NewInMemory(ctx context.Context, s *settings.Settings, n int, load func(at int) *imageio.Raw) (*InMemory, error) {
	b, err := setUp(ctx, s, image.Rectangle{}, &frames{
		n:    n,
		all:  inTurn(n, load),
		load: func(_ context.Context, at int) (*imageio.Raw, error) { return load(at), nil },
	})
	if err != nil {
		return nil, err
	}
	return &InMemory{b, load}, nil
}

func inTurn(n int, load func(at int) *imageio.Raw) iter.Seq[*imageio.Raw] {
	return func(yield func(*imageio.Raw) bool) {
		for at := range n {
			if !yield(load(at)) {
				return
			}
		}
	}
}

// Fit measures one shot after a flight (s), whatever its metadata say; it also returns the
// exposure that was fitted, with the reference and the noise in use.
func (m *InMemory) Fit(ctx context.Context, at int, flight float64, workspace *fit.Workspace) (*imageio.Exposure, *fit.Result, error) {
	exposure, found, err := m.bench.fit(ctx, at, m.load(at), flight, workspace)
	if err != nil {
		return nil, nil, err
	}
	return exposure, found.Result, nil
}
