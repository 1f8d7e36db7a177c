package night

import (
	"context"
	"image"
	"iter"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/fit"
	"fallshadow/imageio"
)

// Bench measures the shots of a night that is still being taken, in one region and with
// one set of settings, by the way that Batch goes. It may be used by many goroutines.
type Bench struct{ *bench }

// NewBench prepares a bench from some frames of the night, darks first; an empty region
// is that of the settings. load reads a shot by its place in the order of arrival, of
// which shots are there by now. The results carry maps for the eye.
func NewBench(ctx context.Context, s *settings.Settings, region image.Rectangle, some iter.Seq[*imageio.Raw], shots int, load func(ctx context.Context, at int) (*imageio.Raw, error)) (_ *Bench, err error) {
	defer caught(&err)
	b, err := setUp(ctx, s, region, &frames{all: some, n: shots, load: load})
	if err != nil {
		return nil, err
	}
	b.options.Maps = true
	return &Bench{b}, nil
}

// Measure fits the shot at a place of the order of arrival. A panic becomes an error; the
// workspace is then not to be used again.
func (b *Bench) Measure(ctx context.Context, at int, raw *imageio.Raw, workspace *fit.Workspace) (_ *report.Facts, err error) {
	defer caught(&err)
	if b.references != nil {
		b.references.Extend(at + 1)
	}
	return b.measure(ctx, at, raw, workspace)
}

// Lights returns the places of the shots whose light may serve the shot at a place, and
// reads them.
func (b *Bench) Lights(ctx context.Context, at int) (places []int, err error) {
	defer caught(&err)
	if b.references == nil {
		return []int{at}, nil
	}
	b.references.Extend(at + 1)
	return b.references.Set(ctx, at)
}

// ReadShot reads the frames of a shot; a panic becomes an error.
func ReadShot(ctx context.Context, root string, s imageio.Shot, layout imageio.Layout) (raw *imageio.Raw, err error) {
	defer caught(&err)
	return imageio.Read(ctx, root, s, layout)
}

// Contents returns the digests by which a row knows a shot: that of its pixels, or where
// they cannot be read (raw is nil) of its bytes, and that with the metadata.
func Contents(root string, s imageio.Shot, raw *imageio.Raw) (content, frames ledger.Digest) {
	if raw == nil {
		content = bytesDigest(root, s)
		return content, framesDigest(content, s.Meta)
	}
	return raw.Digest, framesDigest(raw.Digest, raw.Meta)
}

// SettingsDigest returns the digest of the settings that a row names, with the region
// that a person drew for its shot, nil for none.
func SettingsDigest(s *settings.Settings, region *ledger.Region) ledger.Digest {
	return settingsDigest(s.Digest(), region)
}
