package imageio

import (
	"errors"
	"fmt"
	"path"
	"regexp"
	"slices"
	"strings"
)

// Layout says what makes a shot. The zero value is a cube of atoms, light, dark.
type Layout struct {
	// Kind is "cube" (one file, planes of one array or pages of one file), "extensions"
	// (one file, image extensions or named arrays), "files" (one file a frame) or
	// "density" (one file with a density image). Empty means cube.
	Kind string
	// Planes is the order of the frames in a cube or in the extensions, such as
	// atoms, light, dark, which is what nil means; two frames take the dark from the night.
	Planes []Role
	// Suffix gives, for Kind "files", the end of the file name before its ending, by role
	// ("_atoms"); or a folder name where it ends in "/". For Kind "extensions" it gives,
	// where set, the names of the extensions (EXTNAME) or arrays instead of their order.
	Suffix map[Role]string
	// Pattern, where set, is a regular expression over the path in the night; its named
	// groups become metadata and files that do not match are not shots.
	Pattern string
	// DarkPattern, where set, is a regular expression over the path in the night; files
	// that match hold dark frames for the whole night and belong to no shot.
	DarkPattern string
	// Sidecar, where set, is the path in the night of a table (CSV) whose cells become
	// metadata. SidecarKey names the column that says which shot a row belongs to, the
	// first where empty: the shot's name, a file name, or the shot's number.
	Sidecar, SidecarKey string
}

// plan is a layout checked and with its defaults filled in.
type plan struct {
	Layout
	pattern, darks *regexp.Regexp
}

// plan checks the layout. It fails on an unknown kind, roles that make no shot, two
// equal suffixes, and an expression that does not compile.
func (l Layout) plan() (p plan, err error) {
	p.Layout = l
	if p.Kind == "" {
		p.Kind = "cube"
	}
	if p.Planes == nil {
		p.Planes = []Role{Atoms, Light, Dark}
	}
	if p.Kind == "density" {
		p.Planes = []Role{Density}
	}
	if !slices.Contains([]string{"cube", "extensions", "files", "density"}, p.Kind) {
		return p, fmt.Errorf("layout kind %q is none of cube, extensions, files, density", p.Kind)
	}
	if err := checkRoles(p.roles()); err != nil {
		return p, fmt.Errorf("layout: %w", err)
	}
	if err := p.checkSuffixes(); err != nil {
		return p, err
	}
	if p.pattern, err = expression("pattern", l.Pattern); err != nil {
		return p, err
	}
	p.darks, err = expression("dark pattern", l.DarkPattern)
	return p, err
}

// byName reports whether names, not the order of planes, give the roles.
func (p *plan) byName() bool {
	return p.Kind == "files" || p.Kind == "extensions" && len(p.Suffix) > 0
}

// roles returns the roles of a shot's frames in the order in which they stand.
func (p *plan) roles() []Role {
	if !p.byName() {
		return p.Planes
	}
	var roles []Role
	for r := range numRoles {
		if _, ok := p.Suffix[r]; ok {
			roles = append(roles, r)
		}
	}
	return roles
}

func (p *plan) checkSuffixes() error {
	seen := make(map[string]Role)
	for _, r := range p.roles() {
		s := p.Suffix[r]
		if other, ok := seen[s]; ok && p.byName() {
			return fmt.Errorf("layout: %v and %v have the same suffix %q", other, r, s)
		}
		seen[s] = r
	}
	return nil
}

func checkRoles(roles []Role) error {
	var count [numRoles]int
	for _, r := range roles {
		if r >= numRoles {
			return fmt.Errorf("unknown role %d", r)
		}
		if r >= 0 {
			count[r]++
		}
	}
	for r, n := range count {
		if n > 1 {
			return fmt.Errorf("two frames are called %v", Role(r))
		}
	}
	if count[Density] == 1 && count[Atoms]+count[Light]+count[Dark]+count[DarkOfLight] == 0 {
		return nil
	}
	if count[Density] == 1 {
		return errors.New("a density image does not mix with raw frames")
	}
	if count[Atoms] == 0 || count[Light] == 0 {
		return errors.New("a shot needs an atoms and a light frame")
	}
	return nil
}

func expression(what, text string) (*regexp.Regexp, error) {
	if text == "" {
		return nil, nil
	}
	re, err := regexp.Compile(text)
	if err != nil {
		return nil, fmt.Errorf("layout %s: %w", what, err)
	}
	return re, nil
}

// place says which frame of which shot a file is, by its path. It fails, with the reason
// why the file is a stray, where the layout has no place for it.
func (p *plan) place(file string) (name string, role Role, err error) {
	if p.pattern != nil && !p.pattern.MatchString(file) {
		return "", 0, fmt.Errorf("the path does not match the pattern %s", p.Pattern)
	}
	name = stem(file)
	if p.Kind != "files" {
		return name, Unused, nil
	}
	longest := -1
	shot := ""
	for _, r := range p.roles() {
		s := p.Suffix[r]
		if rest, ok := cutSuffix(name, s); ok && len(s) > longest {
			shot, role, longest = rest, r, len(s)
		}
	}
	if longest < 0 {
		return "", 0, fmt.Errorf("the name fits no frame: %s", p.suffixes())
	}
	return shot, role, nil
}

// cutSuffix takes a suffix off the end of a name, or a folder out of it.
func cutSuffix(name, suffix string) (string, bool) {
	folder, ok := strings.CutSuffix(suffix, "/")
	if !ok {
		rest, ok := strings.CutSuffix(name, suffix)
		return rest, ok && path.Base(rest) != "." && !strings.HasSuffix(rest, "/")
	}
	dir, base := path.Split(name)
	dir = strings.TrimSuffix(dir, "/")
	if dir != folder && !strings.HasSuffix(dir, "/"+folder) {
		return "", false
	}
	return strings.TrimSuffix(dir, folder) + base, true
}

// suffixes lists the suffixes for a message.
func (p *plan) suffixes() string {
	var parts []string
	for _, r := range p.roles() {
		parts = append(parts, fmt.Sprintf("%v is %s", r, p.Suffix[r]))
	}
	return strings.Join(parts, ", ")
}
