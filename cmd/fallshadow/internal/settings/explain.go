package settings

import (
	"regexp"
	"strings"
)

// slip is a way to write a value that is no TOML, and what to say of it. KEY stands for
// the key, $1 and $2 for parts of the value.
type slip struct {
	value *regexp.Regexp
	say   string
	text  bool // also where the key takes text
}

// comment may stand behind a value.
const comment = `\s*(?:#.*)?$`

var slips = []slip{
	{regexp.MustCompile(`^` + comment), "KEY has no value", true},
	{regexp.MustCompile(`^("[^"]*|'[^']*)$`), "the text of KEY lacks its closing quote", true},
	{regexp.MustCompile(`^([-+]?\d+),(\d+)` + comment), "the decimal sign is a point: write KEY = $1.$2", false},
	{regexp.MustCompile(`^([-+\d.eE]+)\s*(?:±|\+/?-)\s*([\d.eE]+)`), "an uncertainty is written KEY = { value = $1, err = $2 }", false},
	{regexp.MustCompile(`^[-+]?[\d.]+\(\d+\)`), "an uncertainty is written KEY = { value = ..., err = ... }", false},
	{regexp.MustCompile(`^([-+]?\d+)\.` + comment), "a number has digits on both sides of the point: write KEY = $1.0", false},
	{regexp.MustCompile(`^([-+]?)\.(\d+)` + comment), "a number has digits on both sides of the point: write KEY = ${1}0.$2", false},
	{regexp.MustCompile(`^[-+]?[\d.]+(?:[eE][-+]?\d+)?\s*[A-Za-zµμ%°/]+` + comment), "the unit stands in the name of the key: give KEY a bare number, in that unit", false},
	{regexp.MustCompile(`^\[.*`), "the list of KEY is not closed, or lacks a comma", true},
	{regexp.MustCompile(`^([\w|<>,*+. -]*[A-Za-z|][\w|<>,*+. -]*?)` + comment), `text stands in quotes: write KEY = "$1"`, true},
}

var (
	colon      = regexp.MustCompile(`^\s*(\w+)\s*:`)
	openHeader = regexp.MustCompile(`^\s*\[\s*(\w+)\s*$`)
)

// explain words a syntax error for a person, by what stands on the line, and notes the
// key that it spoils.
func (d *document) explain(line int, message string, header []string) string {
	whole := d.lineText(line)
	name, after, equals := strings.Cut(whole, "=")
	name, after = strings.TrimSpace(name), strings.TrimSpace(after)
	if m := colon.FindStringSubmatch(whole); m != nil {
		d.spoil(header, m[1])
		return "write key = value, with an equals sign"
	}
	if m := openHeader.FindStringSubmatch(whole); m != nil {
		return "the name of a table stands in brackets: write [" + m[1] + "]"
	}
	k := d.spoil(header, name)
	if k != nil {
		name = k.name
	}
	for _, s := range slips {
		m := s.value.FindStringSubmatchIndex(after)
		if m != nil && equals && (s.text || k == nil || !k.isText()) {
			say := strings.ReplaceAll(s.say, "KEY", name)
			return string(s.value.ExpandString(nil, say, after, m))
		}
	}
	return "cannot be read: " + message
}

// spoil notes that nothing more is to be said of the key that a name means, and returns it.
func (d *document) spoil(header []string, name string) *key {
	k := meant(strings.Join(header, "."), name)
	if k != nil {
		d.spoiled = append(d.spoiled, k.full())
	}
	return k
}
