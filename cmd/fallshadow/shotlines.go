package main

import (
	"fmt"
	"io"
	"maps"
	"slices"
	"strings"
	"sync"
	"time"
	"unicode/utf8"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/imageio"
)

// shotLines is an audience that prints a line a shot, and notes apart from them.
type shotLines struct {
	out, err io.Writer
	json     bool
	color    bool
	scan     func() []string

	mu     sync.Mutex
	head   bool
	widths []int
	now    func() time.Time
	stand  []string             // the notes of now
	said   map[string]time.Time // notes, and when they last were there
}

// again is after how long a note that comes back is printed once more.
const again = 5 * time.Minute

func newShotLines(t terminal, json bool) *shotLines {
	return &shotLines{out: t.out, err: t.err, json: json, color: isScreen(t.out), now: time.Now, said: map[string]time.Time{}}
}

// Row prints a row as one line, aligned with those before as far as they are alike.
func (l *shotLines) Row(r *ledger.Row) {
	l.mu.Lock()
	defer l.mu.Unlock()
	if l.json {
		if line, err := report.Record(r, l.scan()); err == nil {
			fmt.Fprintf(l.out, "%s\n", line)
		}
		return
	}
	names := l.scan()
	if !l.head {
		l.head = true
		l.widths = []int{12, 9, 10, 8, 8}
		head := append([]string{"shot", "flight/ms"}, names...)
		fmt.Fprintln(l.out, l.line(append(head, "N", "fraction", "T/nK"), "flags"))
	}
	cells := []string{report.Printable(r.Shot), report.Concise(r, "flight_ms")}
	for _, name := range names {
		text, _ := imageio.Metadata(r.Meta).Get(name)
		cells = append(cells, report.Printable(text))
	}
	for _, column := range []string{"atoms", "fraction", "T_nK"} {
		cells = append(cells, report.Concise(r, column))
	}
	fmt.Fprintln(l.out, l.line(cells, l.remark(r)))
}

// remark is what stands behind the numbers: why the shot failed, or its flags. That a row
// is provisional is said of all of them once, by the help.
func (l *shotLines) remark(r *ledger.Row) string {
	if r.Reason != "" {
		return l.paint("31", "failed: "+report.Printable(r.Reason))
	}
	var flags []string
	for _, f := range report.Flags(r) {
		if f != report.FlagProvisional {
			flags = append(flags, f)
		}
	}
	return l.paint("33", strings.Join(flags, " "))
}

// paint colours a text on a screen.
func (l *shotLines) paint(code, text string) string {
	if !l.color || text == "" {
		return text
	}
	return "\x1b[" + code + "m" + text + "\x1b[0m"
}

// line pads the cells to the widest so far: the first to the left, the others to the right.
func (l *shotLines) line(cells []string, last string) string {
	var b strings.Builder
	for i, cell := range cells {
		if i == len(l.widths) {
			l.widths = append(l.widths, 8)
		}
		n := utf8.RuneCountInString(cell)
		l.widths[i] = min(max(l.widths[i], n), 40)
		space := strings.Repeat(" ", max(0, l.widths[i]-n))
		if i == 0 {
			b.WriteString(cell + space)
		} else {
			b.WriteString("  " + space + cell)
		}
	}
	return strings.TrimRight(b.String()+"  "+last, " ")
}

// Picture is for screens.
func (l *shotLines) Picture(string, *report.Facts, *imageio.Raw) {}

// Changed is for who shows all rows.
func (l *shotLines) Changed() {}

// Heard prints what a person said elsewhere.
func (l *shotLines) Heard(text string) {
	l.mu.Lock()
	defer l.mu.Unlock()
	fmt.Fprintln(l.err, report.Printable(text))
}

// Notes prints what is new and was not said of late, each line of it on a line.
func (l *shotLines) Notes(notes []string) {
	l.mu.Lock()
	defer l.mu.Unlock()
	now := l.now()
	for _, n := range notes {
		if last, said := l.said[n]; !slices.Contains(l.stand, n) && (!said || now.Sub(last) > again) {
			for i, line := range strings.Split(n, "\n") {
				fmt.Fprintln(l.err, strings.Repeat("  ", min(i, 1))+report.Printable(line))
			}
		}
		l.said[n] = now
	}
	l.stand = slices.Clone(notes)
	maps.DeleteFunc(l.said, func(_ string, last time.Time) bool { return now.Sub(last) > again })
}
