package imageio

import (
	"context"
	"fmt"
	"path/filepath"
	"strings"

	"fallshadow/imageio/fault"
)

// Read reads one shot of the night in folder dir as Scan found it: its frames by role,
// its metadata and its digests. Nothing is judged but that the frames are all there and of
// one size. Errors name the file, the cause and where it helps the way out, and wrap
// fault.Truncated, fault.Broken or fault.Unsupported where the file is at fault. No more
// than fault.MaxPixels pixels are held.
func Read(ctx context.Context, dir string, shot Shot, layout Layout) (*Raw, error) {
	raw, err := ReadAgain(ctx, dir, shot, layout)
	if err == nil {
		raw.sign()
	}
	return raw, err
}

// ReadAgain is Read for a shot whose digests are known: it leaves them zero, which is a good part
// of the time. Whether the frames are the same still is seen by Raw.Sum.
func ReadAgain(ctx context.Context, dir string, shot Shot, layout Layout) (*Raw, error) {
	p, err := layout.plan()
	if err != nil {
		return nil, err
	}
	if shot.Problem != nil {
		return nil, shot.Problem
	}
	raw := &Raw{Meta: Metadata{}}
	raw.Meta.under(shot.Meta)
	for _, file := range shot.Files {
		roles := p.roles()
		if file.Role != Unused {
			roles = []Role{file.Role}
		}
		if err := raw.add(ctx, dir, file, &p, roles); err != nil {
			return nil, err
		}
	}
	if err := raw.complete(shot.Name, p.roles()); err != nil {
		return nil, err
	}
	return raw, nil
}

// ReadDark reads a file with dark frames for the whole night: every plane is one.
func ReadDark(ctx context.Context, dir string, file ShotFile) (frames []*Frame, err error) {
	err = withContents(join(dir, file), func(c *contents) error {
		var all []pick
		for i := range c.stacks {
			s := &c.stacks[i]
			if s.planes > maxPlanes-len(all) {
				return fmt.Errorf("%w: more than %d planes", fault.Unsupported, maxPlanes)
			}
			for k := range s.planes {
				all = append(all, pick{s, k, Dark})
			}
		}
		if len(all) == 0 {
			return fmt.Errorf("%w: no image inside", fault.Unsupported)
		}
		frames, err = readPicks(ctx, all)
		return err
	})
	if err != nil {
		return nil, fmt.Errorf("%s: %w", file.Path, err)
	}
	return frames, nil
}

// maxPlanes is more than any shot or file of darks has.
const maxPlanes = 4096

func join(dir string, file ShotFile) string {
	return filepath.Join(dir, filepath.FromSlash(file.Path))
}

// add reads the frames of one file into their roles.
func (raw *Raw) add(ctx context.Context, dir string, file ShotFile, p *plan, roles []Role) error {
	err := withContents(join(dir, file), func(c *contents) error {
		picks, err := choose(c, p, file, roles)
		if err != nil {
			return err
		}
		frames, err := readPicks(ctx, picks)
		if err != nil {
			return err
		}
		for i, k := range picks {
			raw.Frames[k.role] = frames[i]
		}
		raw.Meta.under(c.meta)
		return nil
	})
	if err != nil {
		return fmt.Errorf("%s: %w", file.Path, err)
	}
	return nil
}

// pick is a plane chosen for a role.
type pick struct {
	*stack
	plane int
	role  Role
}

// choose finds the planes that play the roles: those of the first array where it is a
// cube of the right number, else those of all arrays in order, so that pages of a file and
// extensions are as good as a cube.
func choose(c *contents, p *plan, file ShotFile, roles []Role) ([]pick, error) {
	if len(c.stacks) == 0 {
		return nil, fmt.Errorf("%w: no image inside", fault.Unsupported)
	}
	if file.Role == Unused && p.byName() {
		return chooseByName(c, p)
	}
	stacks := c.stacks
	if p.Kind != "extensions" && len(roles) > 1 && stacks[0].planes == len(roles) {
		stacks = stacks[:1]
	}
	total := 0
	for _, s := range stacks {
		total += s.planes
	}
	if total != len(roles) {
		return nil, fmt.Errorf("%s where the layout has %d (%s): correct the layout in the settings, or write the shot again",
			count(total, "plane"), len(roles), list(roles))
	}
	var picks []pick
	for i := range stacks {
		for k := range stacks[i].planes {
			if r := roles[0]; r != Unused {
				picks = append(picks, pick{&stacks[i], k, r})
			}
			roles = roles[1:]
		}
	}
	return picks, nil
}

func chooseByName(c *contents, p *plan) ([]pick, error) {
	var picks []pick
	for _, r := range p.roles() {
		found := 0
		for i := range c.stacks {
			if s := &c.stacks[i]; strings.EqualFold(s.name, p.Suffix[r]) {
				found += s.planes
				picks = append(picks, pick{s, 0, r})
			}
		}
		if found != 1 {
			return nil, fmt.Errorf("%s named %q for the %v frame among %q: correct the layout in the settings",
				count(found, "image"), p.Suffix[r], r, names(c.stacks))
		}
	}
	return picks, nil
}

func names(stacks []stack) (all []string) {
	for _, s := range stacks {
		all = append(all, s.name)
	}
	return all
}

func count(n int, what string) string {
	if n == 1 {
		return "1 " + what
	}
	return fmt.Sprintf("%d %ss", n, what)
}

func list(roles []Role) string {
	var all []string
	for _, r := range roles {
		all = append(all, r.String())
	}
	return strings.Join(all, ", ")
}

// readPicks decodes the chosen planes, after a look at their size together.
func readPicks(ctx context.Context, picks []pick) ([]*Frame, error) {
	var total int64
	for _, k := range picks {
		total += int64(k.width) * int64(k.height)
	}
	if err := fault.Size(total, 1, 1); err != nil {
		return nil, err
	}
	frames := make([]*Frame, len(picks))
	for i, k := range picks {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		f := &Frame{Width: k.width, Height: k.height, Pix: make([]float32, k.width*k.height)}
		var err error
		if f.NonFinite, err = k.read(k.plane, f.Pix); err != nil {
			return nil, fmt.Errorf("%v frame: %w", k.role, err)
		}
		frames[i] = f
	}
	return frames, nil
}

// complete checks that the frames are there and of one size.
func (raw *Raw) complete(name string, roles []Role) error {
	var first *Frame
	var firstRole Role
	for _, r := range roles {
		if r == Unused {
			continue
		}
		f := raw.Frames[r]
		if f == nil {
			return fmt.Errorf("%s: the %v frame is missing", name, r)
		}
		if first == nil {
			first, firstRole = f, r
		}
		if f.Width != first.Width || f.Height != first.Height {
			return fmt.Errorf("%s: the %v frame has %d x %d pixels, the %v frame %d x %d: frames of a shot have one size",
				name, r, f.Width, f.Height, firstRole, first.Width, first.Height)
		}
	}
	return nil
}
