package imageio

import (
	"path"
	"regexp"
	"slices"
	"strings"

	"fallshadow/imageio/fits"
)

var (
	numeral = regexp.MustCompile(`\d+(\.\d+)?`)
	label   = regexp.MustCompile(`([A-Za-z]+)[ _=.-]*$`) // the word before a number
	unit    = regexp.MustCompile(`^ ?([mun]?s|[kM]?Hz|[mun]?K|[mu]?W)($|[^A-Za-z])`)
	timed   = regexp.MustCompile(`^(?i:tof|t|time|flight)$`)
	date    = regexp.MustCompile(`^(19|20)\d{6}(\d{6})?$`)
)

// counters returns for each shot the numbers in the last part of its name, without leading
// zeros, that may be its number in the side table: one where it can be told, none where there
// is none. Left out are, as long as others are left in the third and fourth case:
//
//   - what measures something: a number with a unit or a point, one that follows a word such as
//     tof, one to which the pattern gives the name of a time or of a column of the table;
//   - what is the same in all shots whose names are alike but for their numbers;
//   - dates, the time of day behind a date, and what else the pattern names;
//   - all but the one that follows the name of the column of keys, as in shot_7.
func (s *sidecar) counters(shots []Shot, pattern *regexp.Regexp) [][]string {
	names := make([][]number, len(shots))
	alike := make(map[string][]int)
	for i := range shots {
		base := path.Base(shots[i].Name)
		names[i] = s.numbers(base, groupsIn(pattern, shots[i].Files))
		form := numeral.ReplaceAllString(base, "0")
		alike[form] = append(alike[form], i)
	}
	out := make([][]string, len(shots))
	for _, members := range alike {
		places := counting(names, members)
		for _, i := range members {
			for _, k := range places {
				out[i] = append(out[i], names[i][k].text)
			}
		}
	}
	return out
}

// number is a number in a name.
type number struct {
	text   string // without leading zeros
	keyed  bool   // it follows the name of the column of keys
	length bool   // it measures something
	stamp  bool   // it is a date or time of day, or has another name
}

// numbers returns those in the last part of a shot's name, of which the pattern names some.
func (s *sidecar) numbers(base string, named []group) (list []number) {
	after := false
	for _, at := range numeral.FindAllStringIndex(base, -1) {
		text, word := base[at[0]:at[1]], ""
		if m := label.FindStringSubmatch(base[:at[0]]); m != nil {
			word = m[1]
		}
		n := number{text: normal(text), keyed: word != "" && strings.EqualFold(word, s.key)}
		n.length = strings.Contains(text, ".") || unit.MatchString(base[at[1]:]) || timed.MatchString(word) && !n.keyed
		n.stamp = date.MatchString(text) || after && len(text) == 6
		after = date.MatchString(text)
		for _, g := range named {
			if g.from <= at[0] && at[1] <= g.to {
				n.length = n.length || timed.MatchString(g.name) || s.hasColumn(g.name)
				n.stamp = true
			}
		}
		list = append(list, n)
	}
	return list
}

// counting returns the places among their numbers that may count the members, whose names are
// alike.
func counting(names [][]number, members []int) (places []int) {
	some := func(k int, is func(number) bool) bool {
		return slices.ContainsFunc(members, func(i int) bool { return is(names[i][k]) })
	}
	for k := range names[members[0]] {
		if !some(k, func(n number) bool { return n.length }) {
			places = append(places, k)
		}
	}
	for _, drop := range []func(k int) bool{
		func(k int) bool { return !some(k, func(n number) bool { return n.text != names[members[0]][k].text }) },
		func(k int) bool { return some(k, func(n number) bool { return n.stamp }) },
		func(k int) bool { return !some(k, func(n number) bool { return n.keyed }) },
	} {
		if left := slices.DeleteFunc(slices.Clone(places), drop); len(left) > 0 {
			places = left
		}
	}
	return places
}

// group is a named group of the pattern that holds a number, and its place in the last part of
// a path.
type group struct {
	name     string
	from, to int
}

func groupsIn(pattern *regexp.Regexp, files []ShotFile) (list []group) {
	if pattern == nil || len(files) == 0 {
		return nil
	}
	file := files[0].Path
	before := len(file) - len(path.Base(file))
	at := pattern.FindStringSubmatchIndex(file)
	for i, name := range pattern.SubexpNames() {
		if name == "" || 2*i+1 >= len(at) || at[2*i] < before {
			continue
		}
		if _, err := fits.ParseNumber(file[at[2*i]:at[2*i+1]]); err == nil {
			list = append(list, group{name, at[2*i] - before, at[2*i+1] - before})
		}
	}
	return list
}
