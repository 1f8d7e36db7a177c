package settings

import (
	"bytes"
	"errors"
	"regexp"
	"slices"
	"strings"
	"unicode/utf8"

	"github.com/pelletier/go-toml/v2"
	"github.com/pelletier/go-toml/v2/unstable"
)

// kind is what a value is.
type kind int

const (
	kindOther kind = iota // true, false, dates and times: no setting takes them
	kindInteger
	kindFloat
	kindText
	kindList
	kindTable
)

var kinds = map[unstable.Kind]kind{
	unstable.Integer: kindInteger, unstable.Float: kindFloat, unstable.String: kindText,
	unstable.Array: kindList, unstable.InlineTable: kindTable,
}

// value is a value of the file with its place.
type value struct {
	kind    kind
	text    string  // of a scalar, as written or, for text, without quotes
	items   []value // of a list
	entries []entry // of a table
	offset  int
}

// entry is a table's header (value nil) or a key with its value; path is the key in
// full, from the top of the file.
type entry struct {
	path   []string
	offset int
	value  *value
	array  bool // a header in double brackets
}

// maxDepth bounds how deep lists and tables are followed; no setting needs more than 2.
const maxDepth = 4

// reader parses a document from an offset on.
type reader struct {
	*document
	parser unstable.Parser
	base   int
}

// read parses the document into entries. What is not TOML becomes a problem, and reading
// goes on with the next line that looks like a key or a table.
func (d *document) read() []entry {
	var all []entry
	var header []string
	r := &reader{document: d}
	for r.base < len(d.data) {
		r.parser.Reset(d.data[r.base:])
		done := r.base
		for r.parser.NextExpression() {
			var e entry
			e, done = r.expression(header)
			if e.value == nil {
				header = e.path
			}
			all = append(all, e)
		}
		var bad *unstable.ParserError
		if !errors.As(r.parser.Error(), &bad) {
			break
		}
		first := d.line(d.nextText(done))
		r.base = d.resume(first, r.base+int(r.parser.Range(bad.Highlight).Offset), bad.Message, header)
		if m := brokenHeader.FindStringSubmatch(d.lineText(first)); m != nil && isTable(m[1]) {
			header = m[1:]
			all = append(all, entry{path: header, offset: d.lines[first]})
		}
	}
	return all
}

// readable refuses what is no text at all.
func (d *document) readable() bool {
	switch {
	case len(d.data) > maxSize:
		d.wrong(0, "the file is larger than %d kB: this is no settings file", maxSize>>10)
	case bytes.HasPrefix(d.data, []byte{0xff, 0xfe}), bytes.HasPrefix(d.data, []byte{0xfe, 0xff}):
		d.wrong(0, "the file is UTF-16 text: save it as UTF-8")
	case !utf8.Valid(d.data):
		d.wrong(d.firstInvalid(), "the file is not UTF-8 text here: save it as UTF-8")
	default:
		return true
	}
	return false
}

func (d *document) firstInvalid() int {
	for i := 0; i < len(d.data); {
		r, n := utf8.DecodeRune(d.data[i:])
		if r == utf8.RuneError && n == 1 {
			return i
		}
		i += n
	}
	return len(d.data)
}

// expression copies the current expression out of the parser; end is the offset behind it.
func (r *reader) expression(header []string) (e entry, end int) {
	n := r.parser.Expression()
	e, end = r.keyed(n)
	e.array = n.Kind == unstable.ArrayTable
	if n.Kind == unstable.KeyValue {
		v := r.value(n.Value(), r.behindEquals(end), 0)
		e.path, e.value = append(slices.Clone(header), e.path...), &v
		end = r.base + int(n.Raw.Offset+n.Raw.Length)
	}
	return e, end
}

// keyed reads a node that has a key, and the value where it has one; end is the offset
// behind the key.
func (r *reader) keyed(n *unstable.Node) (e entry, end int) {
	e.offset = -1
	for it := n.Key(); it.Next(); {
		part := it.Node()
		e.path = append(e.path, string(part.Data))
		if e.offset < 0 {
			e.offset = r.base + int(part.Raw.Offset)
		}
		end = r.base + int(part.Raw.Offset+part.Raw.Length)
	}
	return e, end
}

func (r *reader) value(n *unstable.Node, offset, depth int) value {
	v := value{kind: kinds[n.Kind], text: string(n.Data), offset: offset}
	if depth == maxDepth {
		return v
	}
	for it := n.Children(); (v.kind == kindList || v.kind == kindTable) && it.Next(); {
		child := it.Node()
		if v.kind == kindTable {
			e, end := r.keyed(child)
			inner := r.value(child.Value(), r.behindEquals(end), depth+1)
			e.value = &inner
			v.entries = append(v.entries, e)
			continue
		}
		at := offset // of a list in a list the parser gives no place
		if child.Raw.Length > 0 {
			at = r.base + int(child.Raw.Offset)
		}
		v.items = append(v.items, r.value(child, at, depth+1))
	}
	return v
}

// behindEquals finds the value behind a key that ends at the given offset.
func (d *document) behindEquals(end int) int {
	for end < len(d.data) && strings.IndexByte(" \t=", d.data[end]) >= 0 {
		end++
	}
	return end
}

var (
	keyLike      = regexp.MustCompile(`^\s*(\[\s*[A-Za-z]|[A-Za-z_][\w.-]*\s*=)`) // a line on which reading can go on
	brokenHeader = regexp.MustCompile(`^\s*\[\s*(\w+)`)
)

// resume reports a syntax error found at the offset bad, in the expression that starts on
// the line first, and returns where to go on.
func (d *document) resume(first, bad int, message string, header []string) int {
	d.wrong(max(bad, d.lines[first]), "%s", d.explain(first, message, header))
	at := d.line(bad)
	if at <= first {
		at = first + 1
	}
	for ; at < len(d.lines); at++ {
		if keyLike.MatchString(d.lineText(at)) {
			return d.lines[at]
		}
	}
	return len(d.data)
}

// nextText returns the offset of the first line behind the one of the offset (or on it,
// at its start) that is neither empty nor a comment.
func (d *document) nextText(offset int) int {
	line := d.line(offset)
	if strings.TrimSpace(string(d.data[d.lines[line]:offset])) != "" {
		line++
	}
	for ; line < len(d.lines); line++ {
		if t := strings.TrimSpace(d.lineText(line)); t != "" && t[0] != '#' {
			return d.lines[line]
		}
	}
	return offset
}

// confirm lets the strict decoder have the last word on a file in which nothing wrong was
// found, for the rules of TOML that the entries do not show.
func (d *document) confirm() {
	if len(d.problems) > 0 {
		return
	}
	var any map[string]any
	err := toml.Unmarshal(d.data, &any)
	var bad *toml.DecodeError
	switch {
	case errors.As(err, &bad):
		line, column := bad.Position()
		line = min(max(line, 1), len(d.lines))
		d.wrong(min(d.lines[line-1]+max(column-1, 0), len(d.data)), "cannot be read: %s", strings.TrimPrefix(bad.Error(), "toml: "))
	case err != nil:
		d.wrong(0, "cannot be read: %v", err)
	}
}
