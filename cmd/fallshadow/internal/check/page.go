package check

import (
	"fmt"
	"strings"
	"unicode/utf8"
)

// width is that of the text, in characters.
const width = 96

// page is text for people, a line at most width characters where words allow.
type page struct{ strings.Builder }

func (p *page) line(text string) { p.WriteString(text + "\n") }

func (p *page) title(text string) { p.line("\n" + text) }

// pair writes a name and what there is to say of it.
func (p *page) pair(name, format string, args ...any) {
	const names = 16
	p.hang(fmt.Sprintf("  %-*s", names, name), names+2, fmt.Sprintf(format, args...))
}

// hang writes text behind a head, its further lines indented.
func (p *page) hang(head string, indent int, text string) {
	at := utf8.RuneCountInString(head)
	p.WriteString(head)
	fresh := true
	for _, word := range strings.Fields(text) {
		n := utf8.RuneCountInString(word)
		if !fresh && at+1+n > width {
			p.WriteString("\n" + strings.Repeat(" ", indent))
			at, fresh = indent, true
		}
		if !fresh {
			p.WriteByte(' ')
			at++
		}
		p.WriteString(word)
		at += n
		fresh = false
	}
	p.WriteByte('\n')
}

// table writes lines of cells, the first and, where it holds words, the last column to
// the left, the others to the right; columns that are empty but for their head are left
// out.
func (p *page) table(lines [][]string, lastLeft bool) {
	columns := len(lines[0])
	widths := make([]int, columns)
	for c := range columns {
		filled := false
		for i, line := range lines {
			widths[c] = max(widths[c], utf8.RuneCountInString(line[c]))
			filled = filled || i > 0 && line[c] != ""
		}
		if !filled {
			widths[c] = 0
		}
	}
	for _, line := range lines {
		var b strings.Builder
		for c, cell := range line {
			if widths[c] == 0 {
				continue
			}
			space := strings.Repeat(" ", widths[c]-utf8.RuneCountInString(cell))
			if c == 0 || lastLeft && c == columns-1 {
				b.WriteString("  " + cell + space)
			} else {
				b.WriteString("  " + space + cell)
			}
		}
		p.line(strings.TrimRight(b.String(), " "))
	}
}
