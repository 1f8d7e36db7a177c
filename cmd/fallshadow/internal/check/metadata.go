package check

import (
	"errors"
	"fmt"
	"maps"
	"math"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/imageio"
	"fallshadow/imageio/fits"
)

// entry is one key of the metadata over the readable shots, in whatever case.
type entry struct {
	key    string   // as it is first found
	from   []string // each source once
	values []string // each once, in the order of the shots
	shots  int      // that have it
}

// entriesOf returns what the metadata of the readable shots hold, by key.
func (v *visit) entriesOf() []entry {
	all, known := map[string]*entry{}, map[[2]string]bool{}
	for _, s := range v.look.Shots {
		if s.Err != nil {
			continue
		}
		for _, key := range slices.Sorted(maps.Keys(s.Meta)) {
			if settings.IsStructural(key) {
				continue
			}
			folded := strings.ToLower(key)
			e := all[folded]
			if e == nil {
				e = &entry{key: key}
				all[folded] = e
			}
			e.shots++
			if from := v.source(s.Shot, key); !slices.Contains(e.from, from) {
				e.from = append(e.from, from)
			}
			if value := s.Meta[key]; !known[[2]string{folded, value}] {
				known[[2]string{folded, value}] = true
				e.values = append(e.values, value)
			}
		}
	}
	var out []entry
	for _, key := range slices.Sorted(maps.Keys(all)) {
		out = append(out, *all[key])
	}
	return out
}

func (e *entry) source() string { return strings.Join(e.from, " and ") }

// source says where a key of a shot's metadata comes from.
func (v *visit) source(s imageio.Shot, key string) string {
	if _, ok := s.Meta.Get(key); !ok {
		return "the header"
	}
	if re, err := regexp.Compile(v.Settings.Shots.Pattern); err == nil && v.Settings.Shots.SideTable != "" {
		inName := slices.ContainsFunc(re.SubexpNames(), func(n string) bool { return strings.EqualFold(n, key) })
		if !inName {
			return v.Settings.Shots.SideTable
		}
		match := re.FindStringSubmatch(s.Files[0].Path)
		for i, n := range re.SubexpNames() {
			if text, _ := s.Meta.Get(key); strings.EqualFold(n, key) && match != nil && match[i] != text {
				return v.Settings.Shots.SideTable
			}
		}
	}
	return "the file name"
}

// writeSideTable tells which shots the side table has a row for.
func (v *visit) writeSideTable() {
	table := v.Settings.Shots.SideTable
	if table == "" || len(v.shots) == 0 {
		return
	}
	var without []string
	with := len(v.shots)
	for _, s := range v.look.Shots {
		if errors.Is(s.Problem, imageio.ErrRow) {
			with--
		} else if !slices.ContainsFunc(slices.Collect(maps.Keys(s.Shot.Meta)), func(key string) bool { return v.source(s.Shot, key) == table }) {
			without = append(without, s.Name)
		}
	}
	with -= len(without)
	v.page.pair("side table", "%s has a row for %d of %d shots", table, with, len(v.shots))
	switch {
	case len(without) == len(v.shots):
		v.trouble.problem("", "%s names no shot: its column side_key must hold a shot's path, such as %s, a file name, or the number that counts the shot in its name", table, without[0])
	case len(without) > 0:
		v.trouble.caution("", "%s has no row for %s", table, some(without))
	}
	if rows := v.look.Unclaimed; len(rows) > 0 {
		v.trouble.caution("", "%s has rows that fit no shot: %s", table, some(rows))
	}
}

// span tells of the values of an entry.
func (e *entry) span() string {
	numbers, all := []float64{}, true
	for _, text := range e.values {
		x, err := fits.ParseNumber(text)
		all = all && err == nil
		numbers = append(numbers, x)
	}
	switch {
	case all && len(numbers) == 1:
		return number(numbers[0])
	case len(e.values) == 1:
		return clip(e.values[0], 40)
	case all:
		return fmt.Sprintf("%d values, %s to %s", len(numbers), number(slices.Min(numbers)), number(slices.Max(numbers)))
	}
	return fmt.Sprintf("%d values, such as %s", len(e.values), clip(e.values[0], 40))
}

func number(x float64) string { return digits(x, 6) }

// digits writes a number to so many digits, without an exponent where it is of ordinary
// size.
func digits(x float64, n int) string {
	text := strconv.FormatFloat(x, 'g', n, 64)
	if a := math.Abs(x); a >= 1e-4 && a < 1e9 {
		rounded, _ := strconv.ParseFloat(text, 64)
		return strconv.FormatFloat(rounded, 'f', -1, 64)
	}
	return text
}

// find returns the entry that a name means, in whatever case.
func (v *visit) find(name string) (entry, bool) {
	for _, e := range v.entries {
		if strings.EqualFold(e.key, name) {
			return e, true
		}
	}
	return entry{}, false
}

// flightSource says where the time of flight comes from.
func (v *visit) flightSource() string {
	c := &v.Settings.Clock
	text := fmt.Sprintf("%g ms for all shots, from the settings", c.FixedMs.Value)
	if !c.FixedMs.Given {
		e, ok := v.find(c.From)
		if !ok {
			return fmt.Sprintf("%s is in no header, file name or side table", c.From)
		}
		text = fmt.Sprintf("%s %s, from %s in %s", e.span(), c.Unit, e.key, e.source())
	}
	if z := c.ZeroMs.Value; z != 0 {
		text += fmt.Sprintf("; zero_ms = %g is added", z)
	}
	return text
}

func (v *visit) scanSource(name string) string {
	e, ok := v.find(name)
	if !ok {
		v.trouble.caution("", "scan: %s is in no header, file name or side table: its column stays empty", name)
		return name + " is nowhere"
	}
	if i := slices.IndexFunc(e.values, imageio.DecimalComma); i >= 0 {
		v.trouble.caution("", "scan: %s holds %s, from %s, which is no number but text: the decimal sign is a point", e.key, e.values[i], e.source())
	}
	return fmt.Sprintf("%s: %s, from %s", e.key, e.span(), e.source())
}

// writeMetadata lists what came with the shots.
func (v *visit) writeMetadata() {
	if len(v.entries) == 0 {
		return
	}
	v.page.title("Metadata")
	readable := len(v.shots) - v.unread()
	var same []string
	const most = 24
	shown := 0
	for _, e := range v.entries {
		if len(e.values) == 1 && e.shots == readable && readable > 1 {
			same = append(same, clip(e.key, 24)+" = "+clip(e.values[0], 40))
			continue
		}
		if shown++; shown > most {
			continue
		}
		text := e.span() + ", from " + e.source()
		if e.shots < readable {
			text += fmt.Sprintf(", in %d of %d shots", e.shots, readable)
		}
		v.page.pair(report.Printable(clip(e.key, 16)), "%s", report.Printable(text))
	}
	if shown > most {
		v.page.pair("...", "%d more that differ", shown-most)
	}
	if len(same) > 0 {
		v.page.pair("in all shots", "%s", report.Printable(strings.Join(same, "; ")))
	}
}
