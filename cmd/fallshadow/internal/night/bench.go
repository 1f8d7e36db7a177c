package night

import (
	"context"
	"fmt"
	"image"
	"iter"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/fit"
	"fallshadow/imageio"
	"fallshadow/imageio/light"
)

// measure turns the frames of one shot into what is known of it. at is the place of the
// shot among the readable ones. Every worker has its own.
type measure func(ctx context.Context, at int, raw *imageio.Raw) (*report.Facts, error)

// frames gives a bench the frames of the night.
type frames struct {
	all  iter.Seq[*imageio.Raw]                                  // once, in natural order, the night's darks first
	n    int                                                     // readable shots
	load func(ctx context.Context, at int) (*imageio.Raw, error) // one of them, again
}

// prepare makes ready to measure shots inside a region, an empty one being that of the
// settings, and returns what makes a measure for a worker. The number of readable shots
// is not known before all of f has been read.
type prepare func(ctx context.Context, s *settings.Settings, region image.Rectangle, f *frames) (func() measure, error)

// bench is the way from frames to numbers.
type bench struct {
	settings   *settings.Settings
	night      *light.Night
	references *light.References // nil: every shot has its own light
	lab        fit.Lab
	options    fit.Options
	finds      bool // the part of the frame that is fitted
}

// newBench returns what makes ready, with maps for the eye in the results or without. told,
// where not nil, is told the settings with what was measured of the camera filled in.
func newBench(maps bool, told func(*settings.Settings)) prepare {
	return func(ctx context.Context, s *settings.Settings, region image.Rectangle, f *frames) (func() measure, error) {
		b, err := setUp(ctx, s, region, f)
		if err != nil {
			return nil, err
		}
		b.options.Maps = maps
		if told != nil {
			told(b.settings)
		}
		return b.worker, nil
	}
}

func setUp(ctx context.Context, s *settings.Settings, region image.Rectangle, f *frames) (*bench, error) {
	camera := s.LightCamera()
	if !region.Empty() {
		camera.Region = region
	}
	finds := camera.Region.Empty() || region == Everything
	if finds {
		camera.Region = image.Rectangle{}
	}
	shared, err := light.Prepare(ctx, camera, f.all)
	if err != nil {
		return nil, err
	}
	spareMemory(shared.Camera.Region)
	b := &bench{settings: s.WithCamera(shared.Camera), night: shared, options: s.Options(), finds: finds}
	if b.lab, err = b.settings.Lab(); err != nil {
		return nil, err
	}
	if s.Fit.Reference != "own" && s.Shots.Layout != "density" {
		b.references = light.NewReferences(shared, s.Fit.BasisSize, f.n, f.load)
	}
	return b, nil
}

func (b *bench) worker() measure {
	workspace := fit.NewWorkspace()
	return func(ctx context.Context, at int, raw *imageio.Raw) (*report.Facts, error) {
		return b.measure(ctx, at, raw, workspace)
	}
}

func (b *bench) measure(ctx context.Context, at int, raw *imageio.Raw, workspace *fit.Workspace) (*report.Facts, error) {
	flight, err := b.settings.Flight(raw.Meta)
	if err != nil {
		return nil, err
	}
	exposure, found, err := b.fit(ctx, at, raw, flight, workspace)
	if err != nil {
		return nil, err
	}
	f := &report.Facts{
		Flight: flight, Reference: exposure.Reference, Notes: exposure.Notes,
		Region: b.night.Camera.Saved(found.part), Pixel: b.lab.Optics.Pixel, Fit: found.Result,
	}
	f.X, f.Y = b.night.Camera.ToSaved(found.X+float64(found.part.Min.X), found.Y+float64(found.part.Min.Y))
	return f, nil
}

// fitted is the result of a fit and the part of the exposure, in its pixels, that was fitted.
type fitted struct {
	*fit.Result
	part image.Rectangle
}

// fit exposes a shot and fits it after a flight (s). Where the night lends a better light than
// the shot's own, or the picture is large, the cloud is located first, which says where the lights
// may be compared and what part tells the cloud.
func (b *bench) fit(ctx context.Context, at int, raw *imageio.Raw, flight float64, workspace *fit.Workspace) (*imageio.Exposure, *fitted, error) {
	exposure, err := b.night.Expose(raw)
	if err != nil {
		return nil, nil, err
	}
	var place *fit.Place
	if b.references != nil {
		b.references.Offer(at, raw)
		if exposure, place, err = b.relight(ctx, at, exposure, flight, workspace); err != nil {
			return nil, nil, err
		}
	} else if b.finds && exposure.Width*exposure.Height > fit.Large {
		if place, err = fit.Locate(ctx, b.picture(exposure), &b.lab, flight, b.options, workspace); err != nil {
			return nil, nil, unfitted(err)
		}
	}
	found, err := b.fitPart(ctx, b.picture(exposure), place, flight, workspace)
	if err != nil {
		return nil, nil, unfitted(err)
	}
	return exposure, found, nil
}

// unfitted says what a person can do about a fit that failed.
func unfitted(err error) error {
	return fmt.Errorf("the cloud cannot be fitted: look whether it is in the picture, and check flight, resolution_um, pixel_um, magnification, counts_per_isat and region (%w)", err)
}

// fitPart fits the part of a picture that tells the cloud, and all of it where the region is not
// the program's to choose or the cloud turns out to reach over the border of the part.
func (b *bench) fitPart(ctx context.Context, pic *fit.Picture, place *fit.Place, flight float64, workspace *fit.Workspace) (*fitted, error) {
	options, whole := b.options, image.Rect(0, 0, pic.Width, pic.Height)
	if place != nil && b.finds && place.Window != whole {
		options.Near = place.In(place.Window)
		r, err := fit.Cloud(ctx, pic.Crop(place.Window), &b.lab, flight, options, workspace)
		if err != nil || !r.Touches {
			return &fitted{r, place.Window}, err
		}
	}
	options.Near = place
	r, err := fit.Cloud(ctx, pic, &b.lab, flight, options, workspace)
	return &fitted{r, whole}, err
}

// relight returns the exposure with the best light that the night has for it, and the place
// of the cloud. Where fringes spoiled the first look, the second has their better part taken
// off and says anew where light may be compared.
func (b *bench) relight(ctx context.Context, at int, e *imageio.Exposure, flight float64, workspace *fit.Workspace) (*imageio.Exposure, *fit.Place, error) {
	lit := e
	var place *fit.Place
	for range 2 {
		var err error
		place, err = fit.Locate(ctx, b.picture(lit), &b.lab, flight, b.options, workspace)
		if err != nil {
			return nil, nil, unfitted(err)
		}
		lit, err = b.references.Apply(ctx, at, e, light.Cloud{Mask: place.Mask, Transmission: place.Transmission})
		if err != nil || !place.Rough {
			return lit, place, err
		}
	}
	return lit, place, nil
}

// picture hands an exposure to the fit.
func (b *bench) picture(e *imageio.Exposure) *fit.Picture {
	p := &fit.Picture{
		Width: e.Width, Height: e.Height, Atoms: e.Atoms, Light: e.Light, Good: e.Good,
		Noise: fit.Noise(e.Noise),
	}
	if e.Density != nil {
		scale := b.settings.DensityScale(b.lab)
		p.Density = make([]float64, len(e.Density))
		for i, v := range e.Density {
			p.Density[i] = v * scale
		}
	}
	return p
}

// rectangle returns the region of interest that a person drew.
func rectangle(g *ledger.Region) image.Rectangle {
	if g == nil {
		return image.Rectangle{}
	}
	return image.Rect(g.X0, g.Y0, g.X1, g.Y1)
}
