package report

import (
	"bufio"
	"fmt"
	"io"
	"strings"
	"unicode"
	"unicode/utf8"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/fit"
)

// summaryColumns are the columns of the table on the terminal.
var summaryColumns = []struct {
	head string
	cell func(*ledger.Row) string
}{
	{"flight/ms", concise("flight_ms")},
	{"N", concise("atoms")},
	{"N0", concise("condensate")},
	{"fraction", concise("fraction")},
	{"T/nK", concise("T_nK")},
	{"mu/nK", concise("mu_nK")},
	{"T/Tc0", concise("t_reduced")},
}

func concise(column string) func(*ledger.Row) string {
	return func(r *ledger.Row) string { return Concise(r, column) }
}

// Summary writes the rows as a table for people, then what each flag in it means.
// Statistical errors stand in parentheses.
func Summary(w io.Writer, rows []ledger.Row) error {
	head := []string{"shot"}
	for _, c := range summaryColumns {
		head = append(head, c.head)
	}
	lines := [][]string{append(head, "flags")}
	for i := range rows {
		r := &rows[i]
		line := []string{Printable(r.Shot)}
		for _, c := range summaryColumns {
			line = append(line, c.cell(r))
		}
		last := strings.Join(Flags(r), " ")
		if r.Reason != "" {
			last = strings.TrimSpace(last + " failed: " + Printable(r.Reason))
		}
		lines = append(lines, append(line, last))
	}
	out := bufio.NewWriter(w)
	align(out, lines)
	legend(out, rows)
	return out.Flush()
}

// align writes lines of cells: the first column to the left, the last as it comes, the
// others to the right.
func align(out io.Writer, lines [][]string) {
	last := len(lines[0]) - 1
	widths := make([]int, last)
	for _, line := range lines {
		for i := range widths {
			widths[i] = max(widths[i], utf8.RuneCountInString(line[i]))
		}
	}
	for _, line := range lines {
		var b strings.Builder
		for i, cell := range line[:last] {
			space := strings.Repeat(" ", widths[i]-utf8.RuneCountInString(cell))
			if i == 0 {
				b.WriteString(cell + space)
			} else {
				b.WriteString("  " + space + cell)
			}
		}
		b.WriteString("  " + line[last])
		fmt.Fprintln(out, strings.TrimRight(b.String(), " "))
	}
}

// legend writes the sentence of every flag that a row has.
func legend(out io.Writer, rows []ledger.Row) {
	seen := map[string]int{}
	for i := range rows {
		for _, f := range Flags(&rows[i]) {
			seen[f]++
		}
	}
	if len(seen) == 0 {
		return
	}
	fmt.Fprintln(out)
	for _, f := range AllFlags() {
		if n := seen[f.Name]; n > 0 {
			f = Worded(f, seen[fit.FlagDensityNoReference] > 0)
			fmt.Fprintf(out, "%s (%d): %s\n", f.Name, n, f.Sentence)
		}
	}
}

// Printable replaces what a terminal could take for a command; names of files may hold
// anything.
func Printable(text string) string {
	return strings.Map(func(r rune) rune {
		if unicode.IsPrint(r) {
			return r
		}
		return '?'
	}, text)
}

// Line tells of one row in a line.
func Line(r *ledger.Row) string {
	name := Printable(r.Shot)
	if r.Reason != "" {
		return name + "  failed: " + Printable(r.Reason)
	}
	parts := []string{name, r.Words["model"]}
	for _, c := range summaryColumns[1:] {
		if text := c.cell(r); text != "" {
			parts = append(parts, c.head+" "+text)
		}
	}
	return strings.Join(append(parts, Flags(r)...), "  ")
}
