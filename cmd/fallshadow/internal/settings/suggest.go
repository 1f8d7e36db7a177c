package settings

import (
	"cmp"
	"fmt"
	"slices"
	"strings"
)

// unknownKey reports a key that does not exist, with the one it was meant to be. The
// table is empty for a key that stands before all tables.
func (b *binder) unknownKey(table string, e entry) {
	name := e.path[len(e.path)-1]
	if table != "" {
		name = strings.Join(e.path[1:], ".")
	}
	shown := clip(name)
	where := " in [" + table + "]"
	if table == "" {
		where = " before the first table"
	}
	k := meant(table, name)
	if k == nil {
		b.wrong(e.offset, "unknown key %s%s: %s", shown, where, known(table))
		return
	}
	b.bad[k.full()] = true
	b.wrong(e.offset, "unknown key %s%s: %s", shown, where, k.advice(table, name, *e.value))
}

// known lists what a table knows.
func known(table string) string {
	if table == "" {
		return "the tables are " + strings.Join(tableNames(), ", ")
	}
	var names []string
	for _, k := range keys {
		if k.table == table {
			names = append(names, k.name)
		}
	}
	return "known here are " + strings.Join(names, ", ")
}

// meant finds the key that a wrong name was meant to be, or nil: the same name elsewhere,
// a name that others use, the same name with another unit, the nearest spelling; first
// in its own table.
func meant(table, name string) *key {
	own, others := []*key{}, []*key{}
	for i := range keys {
		if keys[i].table == table {
			own = append(own, &keys[i])
		} else {
			others = append(others, &keys[i])
		}
	}
	stem, _ := splitUnit(name)
	match := func(all []*key, same func(*key) bool) *key {
		if i := slices.IndexFunc(all, same); i >= 0 {
			return all[i]
		}
		return nil
	}
	exactly := func(k *key) bool { return strings.EqualFold(k.name, name) }
	alias := func(k *key) bool {
		return slices.ContainsFunc(k.also, func(a string) bool {
			s, _ := splitUnit(a)
			return strings.EqualFold(a, name) || s == stem
		})
	}
	unit := func(k *key) bool { s, _ := splitUnit(k.name); return s == stem }
	near := func(all []*key) func(*key) bool {
		names := make([]string, len(all))
		for i, k := range all {
			names[i] = k.name
		}
		best := nearest(name, names)
		return func(k *key) bool { return best != "" && k.name == best }
	}
	return cmp.Or(match(own, exactly), match(own, alias), match(own, unit), match(own, near(own)),
		match(others, exactly), match(others, unit), match(others, alias), match(others, near(others)))
}

// advice says which key a wrong name was meant to be and, where only the unit differs,
// what to write.
func (k *key) advice(table, name string, v value) string {
	where := ""
	if k.table != table {
		where = " in [" + k.table + "]"
	}
	_, from := splitUnit(name)
	_, to := splitUnit(k.name)
	x, isNumber := v.number()
	y, converts := convert(x, from, to)
	switch {
	case k.name == name:
		return "it belongs" + where
	case slices.ContainsFunc(k.also, func(a string) bool { return strings.EqualFold(a, name) }):
		return "here it is called " + k.name + where
	case from.name != "" && from.name != to.name && isNumber && converts:
		return fmt.Sprintf("give it in %s%s: %s = %s", k.unit, where, k.name, short(y))
	case from.name != "" && from.name != to.name && k.unit != "":
		return fmt.Sprintf("give it in %s%s, as %s", k.unit, where, k.name)
	}
	return "nearest known key: " + k.name + where
}

// nearest returns the word nearest to the name by edits, the first of equals, or "" where
// more than a third of its letters would have to change.
func nearest(name string, words []string) string {
	name = strings.ToLower(name)
	if len(name) > 64 {
		return ""
	}
	best, least := "", max(1, len(name)/3)+1
	for _, w := range words {
		if d := distance(name, strings.ToLower(w)); d < least {
			best, least = w, d
		}
	}
	return best
}

// distance counts the insertions, deletions, replacements and exchanges of neighbours
// that turn a into b (optimal string alignment; common practice).
func distance(a, b string) int {
	before, last := make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range last {
		last[j] = j
	}
	for i := range len(a) {
		row := make([]int, len(b)+1)
		row[0] = i + 1
		for j := range len(b) {
			cost := 1
			if a[i] == b[j] {
				cost = 0
			}
			row[j+1] = min(last[j+1]+1, row[j]+1, last[j]+cost)
			if i > 0 && j > 0 && a[i] == b[j-1] && a[i-1] == b[j] {
				row[j+1] = min(row[j+1], before[j-1]+1)
			}
		}
		before, last = last, row
	}
	return last[len(b)]
}
