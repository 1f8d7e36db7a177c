package settings

import (
	"slices"
	"strings"
)

// binder puts the entries of a document into settings and remembers where each key stood.
type binder struct {
	*document
	s       *Settings
	keys    map[string]int    // offset of each key given, by its full name
	headers map[string]int    // offset of each table given
	renamed map[string]string // a table's wrong name and the one it was taken for, empty for none
	dead    bool              // below a header that cannot be judged
	bad     map[string]bool   // keys (and tables) that are wrong, or that a wrong one was meant to be
}

func newBinder(d *document, s *Settings) *binder {
	return &binder{document: d, s: s, keys: map[string]int{}, headers: map[string]int{}, renamed: map[string]string{}, bad: map[string]bool{}}
}

func (b *binder) bind(entries []entry) {
	for _, name := range b.spoiled {
		b.bad[name] = true
	}
	for _, e := range entries {
		b.entry(e)
	}
}

func (b *binder) entry(e entry) {
	if e.value == nil {
		b.dead = !b.header(e)
		return
	}
	if b.dead {
		return
	}
	if len(e.path) == 1 {
		b.outside(e)
		return
	}
	table := b.tableFor(e)
	k := lookup([]string{table}, e.path[1])
	switch {
	case table == "":
	case k == nil:
		b.unknownKey(table, e)
	case len(e.path) > 2:
		b.bad[k.full()] = true
		b.wrong(e.offset, "%s takes a value: write %s", strings.Join(e.path[1:], "."), k.form())
	default:
		b.set(k, e)
	}
}

// header takes note of a [table] and reports whether the keys below it can be judged.
func (b *binder) header(e entry) bool {
	table := b.tableFor(e)
	if table == "" {
		return false
	}
	if len(e.path) > 1 {
		b.subTable(table, e)
		return false
	}
	at, twice := b.headers[table]
	switch {
	case e.array:
		b.wrong(e.offset, "write [%s] in single brackets: there is only one", table)
	case twice && e.path[0] == table:
		b.wrong(e.offset, "table [%s] stands twice, first in line %d: join them", table, b.line(at)+1)
	}
	if !twice {
		b.headers[table] = e.offset
	}
	return true
}

// subTable reports a header such as [trap.axis1_hz].
func (b *binder) subTable(table string, e entry) {
	name := strings.Join(e.path, ".")
	if k := lookup([]string{table}, e.path[1]); k != nil {
		b.bad[k.full()] = true
		b.wrong(e.offset, "%s is no table: write %s in [%s]", name, k.form(), table)
		return
	}
	b.wrong(e.offset, "unknown table [%s]: there are no tables below [%s]", clip(name), table)
}

// tableFor returns the table that an entry is in; a wrong name is reported once and taken
// for the nearest one, or for none.
func (b *binder) tableFor(e entry) string {
	name := e.path[0]
	if isTable(name) {
		return name
	}
	if meant, known := b.renamed[name]; known {
		return meant
	}
	meant := nearest(name, tableNames())
	b.renamed[name] = meant
	if meant == "" {
		b.wrong(e.offset, "unknown table [%s]: the tables are %s", clip(name), strings.Join(tableNames(), ", "))
	} else {
		b.wrong(e.offset, "unknown table [%s]: nearest known table: [%s]", name, meant)
	}
	return meant
}

// outside is a key before the first header: a table written in braces, or a stray key.
func (b *binder) outside(e entry) {
	name := e.path[0]
	switch {
	case isTable(name) && e.value.kind == kindTable:
		b.headers[name] = e.offset
		for _, inner := range e.value.entries {
			inner.path = append([]string{name}, inner.path...)
			b.entry(inner)
		}
	case isTable(name):
		b.bad[name] = true
		b.wrong(e.offset, "%s is a table: write [%s] on a line of its own, and its keys below", name, name)
	default:
		b.unknownKey("", e)
	}
}

// set gives a key its value.
func (b *binder) set(k *key, e entry) {
	name := k.full()
	if at, twice := b.keys[name]; twice {
		b.wrong(e.offset, "%s is given twice, first in line %d", k.name, b.line(at)+1)
		return
	}
	b.keys[name] = e.offset
	before := len(b.problems)
	b.assign(k, *e.value)
	if len(b.problems) > before {
		b.bad[name] = true
	}
}

// require reports the keys that must be there and are not.
func (b *binder) require() {
	for _, t := range tables {
		var missing []string
		for _, k := range keys {
			if _, given := b.keys[k.full()]; k.table == t.name && k.required && !given && !b.bad[k.full()] {
				missing = append(missing, k.name)
			}
		}
		at, given := b.headers[t.name]
		switch {
		case len(missing) == 0 || b.bad[t.name]:
		case given:
			b.wrong(at, "[%s] lacks %s, such as %s", t.name, strings.Join(missing, ", "), sampleOf(t.name, missing[0]))
		default:
			b.wrong(0, "no table [%s]: it must give %s, such as %s", t.name, strings.Join(missing, ", "), sampleOf(t.name, missing[0]))
		}
	}
}

func sampleOf(table, name string) string {
	return name + " = " + lookup([]string{table}, name).sample
}

// given reports whether all keys stand in the file.
func (b *binder) given(names ...string) bool {
	return !slices.ContainsFunc(names, func(n string) bool { _, ok := b.keys[n]; return !ok })
}

// sound reports whether none of the keys, nor their table, is already reported.
func (b *binder) sound(names ...string) bool {
	return !slices.ContainsFunc(names, func(n string) bool {
		table, _, _ := strings.Cut(n, ".")
		return b.bad[n] || b.bad[table]
	})
}

// at returns where to report what is wrong with a key: where it stands, or its table, or
// the start of the file.
func (b *binder) at(name string) int {
	if at, ok := b.keys[name]; ok {
		return at
	}
	table, _, _ := strings.Cut(name, ".")
	return b.headers[table]
}

func isTable(name string) bool { return slices.Contains(tableNames(), name) }

func tableNames() []string {
	names := make([]string, len(tables))
	for i, t := range tables {
		names[i] = t.name
	}
	return names
}
