package imageio

import (
	"fmt"
	"maps"
	"regexp"
	"slices"
	"strings"

	"fallshadow/imageio/fits"
)

// Metadata is what came with a shot: header cards, parts of the file name, cells of
// a side table. Numbers keep the text they were written with. Where two sources have
// the same key, in whatever case, the side table goes before the file name, the file name
// before the header, and among the headers of several files that of the atoms frame
// before that of the light frame before those of the dark frames.
type Metadata map[string]string

// Get returns the value of a key: the exact one, else one that differs in case only.
func (m Metadata) Get(key string) (string, bool) {
	if v, ok := m[key]; ok {
		return v, true
	}
	for _, k := range slices.Sorted(maps.Keys(m)) {
		if strings.EqualFold(k, key) {
			return m[k], true
		}
	}
	return "", false
}

// Number returns the value of a key as a number, the exponent of FITS (1.5D3) included.
// It fails where the key is missing or its value is no number.
func (m Metadata) Number(key string) (float64, error) {
	text, ok := m.Get(key)
	if !ok {
		return 0, fmt.Errorf("no %s in the header, the file name or the side table", key)
	}
	v, err := fits.ParseNumber(text)
	switch {
	case err != nil && DecimalComma(text):
		return 0, fmt.Errorf("%s is %q: the decimal sign is a point", key, text)
	case err != nil:
		return 0, fmt.Errorf("%s is %q, not a number", key, text)
	}
	return v, nil
}

// DecimalComma reports whether a text would be a number if its only comma were a point. Since
// a comma may also part thousands, it is not read as one.
func DecimalComma(text string) bool {
	if strings.Count(text, ",") != 1 {
		return false
	}
	_, err := fits.ParseNumber(strings.Replace(text, ",", ".", 1))
	return err == nil
}

// under adds what other has and m has not.
func (m Metadata) under(other Metadata) {
	folded := make(map[string]bool, len(m))
	for k := range m {
		folded[strings.ToLower(k)] = true
	}
	for k, v := range other {
		if !folded[strings.ToLower(k)] {
			m[k] = v
		}
	}
}

// groups returns the named groups of a pattern in a path.
func groups(pattern *regexp.Regexp, file string) Metadata {
	m := Metadata{}
	if pattern == nil {
		return m
	}
	match := pattern.FindStringSubmatch(file)
	for i, name := range pattern.SubexpNames() {
		if i < len(match) && name != "" && match[i] != "" {
			m[name] = match[i]
		}
	}
	return m
}

// cards makes metadata of the headers of a FITS file. Of a keyword that is repeated the
// first counts; the lines of COMMENT and HISTORY are joined.
func cards(f *fits.File) Metadata {
	m := Metadata{}
	lines := make(map[string][]string)
	for _, h := range f.HDUs {
		for _, c := range h.Cards {
			switch c.Key {
			case "":
			case "COMMENT", "HISTORY":
				lines[c.Key] = append(lines[c.Key], strings.TrimSpace(c.Comment))
			default:
				m.first(c.Key, c.Value)
			}
		}
	}
	for k, l := range lines {
		m[k] = strings.Join(l, "\n")
	}
	return m
}

// assignment is a line of a description by which acquisition programs pass settings.
var assignment = regexp.MustCompile(`(?m)^[ \t]*([A-Za-z][\w .-]{0,63}?)[ \t]*=[ \t]*(\S[^\r\n]*?)[ \t]*\r?$`)

// tags makes metadata of texts in a file (TIFF tags, PNG text), and of the lines
// "key = value" inside them.
func tags(texts map[string]string) Metadata {
	m := Metadata{}
	for k, v := range texts {
		m[k] = v
	}
	for _, k := range slices.Sorted(maps.Keys(texts)) {
		for _, line := range assignment.FindAllStringSubmatch(texts[k], -1) {
			m.first(line[1], line[2])
		}
	}
	return m
}

func (m Metadata) first(key, value string) {
	if _, ok := m[key]; !ok {
		m[key] = value
	}
}
