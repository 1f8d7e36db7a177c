package night

import (
	"context"
	"image"
	"slices"

	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit"
	"fallshadow/imageio"
	"fallshadow/model/numbers"
)

// Everything stands for the region that is the whole frame, whatever the settings say.
var Everything = image.Rect(0, 0, 1<<30, 1<<30)

// Grow looks at the whole frame where the cloud of a shot reaches over the border of a region that
// a person gave, or there is none in it, and returns the facts to keep, with a flag. Those of the
// region stand where whole fails, sees no more, or sees another cloud, which does not reach into
// the region. bin is how many saved pixels a fitted one is wide.
func Grow(f *report.Facts, bin int, whole func() (*report.Facts, error)) *report.Facts {
	empty := f.Fit.Model == fit.ModelNone
	if !empty && !f.Fit.Touches {
		return f
	}
	all, err := whole()
	if err != nil || all.Fit.Model == fit.ModelNone {
		return f
	}
	switch inside := image.Pt(int(all.X), int(all.Y)).In(f.Region); {
	case !inside && empty:
		return outside(f)
	case !inside && !Extent(all, bin, 2, 1, 0).Overlaps(f.Region):
		return f
	}
	all.Notes = append(slices.Clone(all.Notes), report.FlagGrown)
	return all
}

// outside are the facts of a region that misses its cloud: a limit of the atoms in it says nothing.
func outside(f *report.Facts) *report.Facts {
	g, r := *f, *f.Fit
	r.Numbers = numbers.Nothing()
	g.Fit, g.Notes = &r, append(slices.Clone(f.Notes), report.FlagOutside)
	return &g
}

// kit is what one worker has made for the regions it met.
type kit struct {
	*batch
	made *shelf[measure]
}

func (k *kit) in(ctx context.Context, region image.Rectangle) (measure, error) {
	if m, ok := k.made.get(region); ok {
		return m, nil
	}
	worker, err := k.bench(ctx, region)
	if err != nil {
		return nil, err
	}
	m := worker()
	k.made.put(region, m)
	return m, nil
}

// measure measures the shot at a place in its region, or in the whole frame where its cloud is
// not inside.
func (k *kit) measure(ctx context.Context, at int, raw *imageio.Raw) (*report.Facts, error) {
	region := k.regionOf(k.readable[at])
	m, err := k.in(ctx, region)
	if err != nil {
		return nil, err
	}
	f, err := m(ctx, at, raw)
	if err != nil || region.Empty() && k.Settings.Region.Auto() {
		return f, err
	}
	f = Grow(f, k.Settings.Fit.Rebin, func() (*report.Facts, error) {
		m, err := k.in(ctx, Everything)
		if err != nil {
			return nil, err
		}
		return m(ctx, at, raw)
	})
	return f, context.Cause(ctx)
}
