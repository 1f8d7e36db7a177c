package check

import (
	"fmt"
	"strings"

	"fallshadow/cmd/fallshadow/internal/report"
)

// trouble is what is wrong: problems cost shots or make numbers wrong, cautions may.
type trouble struct{ problems, cautions []matter }

// matter is one thing wrong and the shots or files that it is wrong with.
type matter struct {
	text  string
	where []string
}

// problem notes a problem, with the shot or file that has it where there is one. The same
// text again is the same problem.
func (t *trouble) problem(where, format string, args ...any) {
	t.problems = note(t.problems, where, fmt.Sprintf(format, args...))
}

func (t *trouble) caution(where, format string, args ...any) {
	t.cautions = note(t.cautions, where, fmt.Sprintf(format, args...))
}

func note(list []matter, where, text string) []matter {
	i := 0
	for i < len(list) && list[i].text != text {
		i++
	}
	if i == len(list) {
		list = append(list, matter{text: text})
	}
	if where != "" {
		list[i].where = append(list[i].where, where)
	}
	return list
}

func (t *trouble) write(p *page) {
	if len(t.problems) == 0 {
		p.line("\nNo problems found.")
	}
	writeMatters(p, "Problems", t.problems)
	writeMatters(p, "Cautions", t.cautions)
}

func writeMatters(p *page, title string, list []matter) {
	if len(list) == 0 {
		return
	}
	p.title(fmt.Sprintf("%s (%d)", title, len(list)))
	for i, m := range list {
		p.hang(fmt.Sprintf("  %2d. ", i+1), 6, report.Printable(m.String()))
	}
}

// String puts the shots before what is wrong with them.
func (m matter) String() string {
	if len(m.where) == 0 {
		return m.text
	}
	return some(m.where) + ": " + m.text
}

// some names the first few of a list and counts the rest.
func some(names []string) string {
	const most = 3
	if len(names) <= most+1 {
		return strings.Join(names, ", ")
	}
	return fmt.Sprintf("%s and %d more", strings.Join(names[:most], ", "), len(names)-most)
}
