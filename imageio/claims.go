package imageio

import (
	"errors"
	"fmt"
	"maps"
	"path"
	"regexp"
	"strings"
)

// claim is the row of a side table that a shot takes for its own, -1 for none. An exact one
// is by the shot's path in the night; problem says why a row that might be meant is not taken.
type claim struct {
	row     int
	exact   bool
	problem error
}

// ErrRow is the Problem of a shot whose row in the side table is not told.
var ErrRow = errors.New("no row of its own")

// assign puts the cells of the shots' rows over their metadata, which hold what their file
// names say, and returns the keys of the rows that fit no shot. A row is a shot's by, in this
// order: the shot's name or the path of one of its files; the named group of the pattern that
// is called as the column of keys, where there is one, and else the last part of these paths
// or the shot's number (see counters). A row that fits several shots is that of the one whose
// path it holds; it is a Problem of the others, and so is a number that cannot be told: what a
// row says of the wrong shot, such as its flight, is worse than no shot.
func (s *sidecar) assign(shots []Shot, pattern *regexp.Regexp) (unclaimed []string) {
	if s == nil {
		return nil
	}
	claims := make([]claim, len(shots))
	for i, numbers := range s.counters(shots, pattern) {
		claims[i] = s.claim(&shots[i], numbers)
	}
	by := make([][]int, len(s.rows)) // shots that claim a row
	for i, c := range claims {
		if c.row >= 0 {
			by[c.row] = append(by[c.row], i)
		}
	}
	for i, c := range claims {
		shot := &shots[i]
		if c.row >= 0 && !c.exact && len(by[c.row]) > 1 {
			c = claim{-1, false, s.shared(shots, by[c.row], i, s.rows[c.row].key)}
		}
		if shot.Problem == nil {
			shot.Problem = c.problem
		}
		if c.row >= 0 {
			name := shot.Meta
			shot.Meta = maps.Clone(s.rows[c.row].cells)
			shot.Meta.under(name)
		}
	}
	for i, r := range s.rows {
		if len(by[i]) == 0 {
			unclaimed = append(unclaimed, r.key)
		}
	}
	return unclaimed
}

// claim finds the row of a shot that may have one of the given numbers.
func (s *sidecar) claim(shot *Shot, numbers []string) claim {
	paths := []string{shot.Name}
	for _, f := range shot.Files {
		paths = append(paths, f.Path)
	}
	for _, p := range paths {
		if row, ok := s.byText[p]; ok {
			return claim{row: row, exact: true}
		}
	}
	if key, ok := shot.Meta.Get(s.key); ok { // of the pattern
		return claim{row: s.row(key)}
	}
	for _, p := range paths {
		if row, ok := s.byText[path.Base(p)]; ok {
			return claim{row: row}
		}
	}
	if len(numbers) == 1 {
		return claim{row: s.row(numbers[0])}
	}
	for _, n := range numbers {
		if s.row(n) >= 0 {
			return claim{-1, false, s.untold(shot, numbers)}
		}
	}
	return claim{row: -1}
}

// row returns the place of the row with a key, or with the number that the key is, or -1.
func (s *sidecar) row(key string) int {
	if row, ok := s.byText[key]; ok {
		return row
	}
	if row, ok := s.byNumber[wholeNumber(key)]; ok {
		return row
	}
	return -1
}

// shared says that a row fits shot i and others.
func (s *sidecar) shared(shots []Shot, by []int, i int, key string) error {
	other := by[0]
	if other == i {
		other = by[1]
	}
	also := shots[other].Name
	if n := len(by) - 2; n > 0 {
		also = fmt.Sprintf("%s and %d more", also, n)
	}
	return fmt.Errorf("side table %s: %w: row %s fits %s too: write the path of the shot in %s, such as %s",
		s.file, ErrRow, key, also, s.column(), shots[i].Name)
}

var word = regexp.MustCompile(`^[A-Za-z]\w*$`)

// untold says that the number of a shot is not known.
func (s *sidecar) untold(shot *Shot, numbers []string) error {
	group := ""
	if word.MatchString(s.key) {
		group = fmt.Sprintf(`, or call the number by a group (?P<%s>\d+) in shots.pattern`, s.key)
	}
	return fmt.Errorf("side table %s: %w: whether row %s is meant by the name is not told: write the path of the shot in %s, such as %s%s",
		s.file, ErrRow, strings.Join(numbers, " or "), s.column(), shot.Name, group)
}

// column names that of the keys.
func (s *sidecar) column() string {
	if s.key == "" {
		return "the first column"
	}
	return "the column " + s.key
}
