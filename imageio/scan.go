package imageio

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path"
	"path/filepath"
	"slices"
	"strings"
)

// Night is what a folder holds. Shots stand in natural order of their names, Darks and
// Strays in natural order of their paths.
type Night struct {
	Shots  []Shot
	Darks  []ShotFile // files with dark frames for the whole night
	Strays []Stray
	// Unclaimed are the keys of the side table's rows that fit no shot, in their order.
	Unclaimed []string
}

// Stray is a file or folder that belongs to no shot, and why.
type Stray struct {
	Path   string
	Reason string
}

// Scan lists the shots of the night in folder dir, sub-folders included. No pixels are
// read: a file with an ending of a camera file counts as one, any other is judged by its
// first bytes. Files and folders that start with a dot, settings (.toml), the side table
// and a folder "results" at the top are passed over. Scan fails where the folder or the
// side table cannot be read or the layout makes no sense; a shot that cannot be read as
// it stands is in the list with its Problem.
func Scan(ctx context.Context, dir string, layout Layout) (Night, error) {
	p, err := layout.plan()
	if err != nil {
		return Night{}, err
	}
	side, err := readSidecar(dir, layout)
	if err != nil {
		return Night{}, err
	}
	s := search{ctx: ctx, dir: dir, plan: p, shots: make(map[string]*Shot)}
	if err := fs.WalkDir(os.DirFS(dir), ".", s.visit); err != nil {
		return Night{}, fmt.Errorf("scan %s: %w", dir, err)
	}
	return s.finish(side), nil
}

// search is one walk through a night.
type search struct {
	ctx   context.Context
	dir   string
	plan  plan
	shots map[string]*Shot
	night Night
}

func (s *search) stray(file, reason string) {
	s.night.Strays = append(s.night.Strays, Stray{file, reason})
}

func (s *search) visit(file string, d fs.DirEntry, err error) error {
	if ctxErr := s.ctx.Err(); ctxErr != nil {
		return ctxErr
	}
	switch {
	case err != nil && file == ".":
		return err
	case err != nil:
		s.stray(file, "cannot be read: "+cause(err).Error())
		return nil
	case file == ".":
		return nil
	case strings.HasPrefix(d.Name(), ".") || file == "results" && d.IsDir():
		if d.IsDir() {
			return fs.SkipDir
		}
		return nil
	case d.IsDir():
		return nil
	}
	s.file(file, d.Type())
	return nil
}

// file finds the place of one file.
func (s *search) file(file string, mode fs.FileMode) {
	lower := strings.ToLower(file)
	switch {
	case strings.HasSuffix(lower, ".toml") || file == path.Clean(s.plan.Sidecar):
		return
	case strings.HasSuffix(lower, ".tmp") || strings.HasSuffix(lower, ".part"):
		s.stray(file, "unfinished, by its ending")
		return
	}
	if reason := s.unfit(file, mode); reason != "" {
		s.stray(file, reason)
		return
	}
	if s.plan.darks != nil && s.plan.darks.MatchString(file) {
		s.night.Darks = append(s.night.Darks, ShotFile{file, Dark})
		return
	}
	name, role, err := s.plan.place(file)
	if err != nil {
		s.stray(file, err.Error())
		return
	}
	if s.shots[name] == nil {
		s.shots[name] = &Shot{Name: name}
	}
	shot := s.shots[name]
	shot.Files = append(shot.Files, ShotFile{file, role})
}

// unfit says why a file cannot hold frames, or "" where it may. Only links cost a look
// at the file system, and only unknown endings one into the file.
func (s *search) unfit(file string, mode fs.FileMode) string {
	full := filepath.Join(s.dir, filepath.FromSlash(file))
	if mode&fs.ModeSymlink != 0 {
		info, err := os.Stat(full)
		if err != nil {
			return "cannot be read: " + cause(err).Error()
		}
		if mode = info.Mode().Type(); mode.IsDir() {
			return "a link to a folder, which is not followed"
		}
	}
	if !mode.IsRegular() {
		return "not a regular file"
	}
	if ending(file) != "" {
		return ""
	}
	start, err := firstBytes(full)
	if err != nil {
		return "cannot be read: " + cause(err).Error()
	}
	if format := Sniff(start); !format.readable() {
		return fmt.Sprintf("no camera frames: the content is %s", format)
	}
	return ""
}

// cause strips the path of an error of the file system.
func cause(err error) error {
	if e := (*fs.PathError)(nil); errors.As(err, &e) {
		return e.Err
	}
	return err
}

func firstBytes(full string) ([]byte, error) {
	f, err := os.Open(full)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	start := make([]byte, sniffLength)
	n, err := io.ReadFull(f, start)
	if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
		err = nil
	}
	return start[:n], err
}

// finish sorts, and judges whether each shot is complete.
func (s *search) finish(side *sidecar) Night {
	for _, shot := range s.shots {
		slices.SortFunc(shot.Files, func(a, b ShotFile) int {
			if a.Role != b.Role {
				return int(a.Role - b.Role)
			}
			return Natural(a.Path, b.Path)
		})
		shot.Problem = s.plan.incomplete(shot)
		shot.Meta = groups(s.plan.pattern, shot.Files[0].Path)
		s.night.Shots = append(s.night.Shots, *shot)
	}
	slices.SortFunc(s.night.Shots, func(a, b Shot) int { return Natural(a.Name, b.Name) })
	s.night.Unclaimed = side.assign(s.night.Shots, s.plan.pattern)
	slices.SortFunc(s.night.Darks, func(a, b ShotFile) int { return Natural(a.Path, b.Path) })
	slices.SortFunc(s.night.Strays, func(a, b Stray) int { return Natural(a.Path, b.Path) })
	return s.night
}

// incomplete says which frame of a shot is missing or there twice. Its files are sorted.
func (p *plan) incomplete(shot *Shot) error {
	files := shot.Files
	for i, f := range files[1:] {
		if f.Role == files[i].Role && f.Role == Unused {
			return fmt.Errorf("%s and %s have the same name but for the ending: rename one", files[i].Path, f.Path)
		} else if f.Role == files[i].Role {
			return fmt.Errorf("two %v frames, %s and %s: take one away", f.Role, files[i].Path, f.Path)
		}
	}
	if p.Kind != "files" {
		return nil
	}
	for _, r := range p.roles() {
		if !slices.ContainsFunc(files, func(f ShotFile) bool { return f.Role == r }) {
			return fmt.Errorf("%s: the %v frame is missing: no file with %q beside %s", shot.Name, r, p.Suffix[r], files[0].Path)
		}
	}
	return nil
}
