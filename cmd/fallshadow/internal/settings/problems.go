package settings

import (
	"bytes"
	"cmp"
	"fmt"
	"slices"
	"sort"
	"strings"
	"unicode"
	"unicode/utf8"
)

// Problem is one thing wrong in a settings file and what to write instead.
type Problem struct {
	File         string
	Line, Column int // from 1, the column in characters
	Text         string
}

func (p Problem) Error() string {
	return fmt.Sprintf("%s:%d:%d: %s", p.File, p.Line, p.Column, p.Text)
}

// Problems is everything wrong in a settings file, in the order of the file.
type Problems []Problem

// maxShown bounds the lines of one message: a file of another kind has a problem a line.
const maxShown = 40

func (p Problems) Error() string {
	lines := make([]string, 0, len(p))
	for i, one := range p {
		if i == maxShown {
			lines = append(lines, fmt.Sprintf("%s: and %d more", one.File, len(p)-i))
			break
		}
		lines = append(lines, one.Error())
	}
	return strings.Join(lines, "\n")
}

// document is a settings file and what is wrong in it. Places are byte offsets until
// they are reported.
type document struct {
	name     string
	data     []byte
	lines    []int // offset of the start of each line
	problems []mark
	spoiled  []string // keys, by their full name, whose line is no TOML
}

type mark struct {
	offset int
	text   string
}

func newDocument(name string, data []byte) *document {
	data = bytes.TrimPrefix(data, []byte("\xef\xbb\xbf")) // a byte-order mark is no character
	d := &document{name: name, data: slices.Clip(data), lines: []int{0}}
	for i, c := range data {
		if c == '\n' {
			d.lines = append(d.lines, i+1)
		}
	}
	return d
}

// wrong takes note of a problem; what the file's own words would do to a terminal is
// taken out.
func (d *document) wrong(offset int, format string, args ...any) {
	said := strings.Map(func(r rune) rune {
		if !unicode.IsPrint(r) {
			return utf8.RuneError
		}
		return r
	}, fmt.Sprintf(format, args...))
	d.problems = append(d.problems, mark{offset, said})
}

// line returns the index of the line that holds the offset.
func (d *document) line(offset int) int {
	return sort.SearchInts(d.lines, offset+1) - 1
}

func (d *document) lineText(line int) string {
	end := len(d.data)
	if line+1 < len(d.lines) {
		end = d.lines[line+1]
	}
	return strings.TrimRight(string(d.data[d.lines[line]:end]), "\r\n")
}

func (d *document) report() Problems {
	slices.SortStableFunc(d.problems, func(a, b mark) int { return cmp.Compare(a.offset, b.offset) })
	out := make(Problems, len(d.problems))
	for i, m := range d.problems {
		line := d.line(m.offset)
		out[i] = Problem{
			File:   d.name,
			Line:   line + 1,
			Column: utf8.RuneCount(d.data[d.lines[line]:m.offset]) + 1,
			Text:   m.text,
		}
	}
	return out
}
