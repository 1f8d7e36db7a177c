package study

import (
	"fmt"
	"io"
	"strings"

	"fallshadow/cmd/fallshadow/internal/report"
)

// LeftOut is a shot that takes no part, and why.
type LeftOut struct {
	Shot string `json:"shot"`
	Why  string `json:"why"`

	kind string // Why without what is the shot's own, where there is such
}

// cause is a kind of reason and the shots that are left out for it.
type cause struct {
	kind  string
	first LeftOut
	shots []string
}

// causes gathers shots by the kind of their reason, in the order of the first of each.
func causes(list []LeftOut) (all []*cause) {
	of := map[string]*cause{}
	for _, l := range list {
		kind := l.kind
		if kind == "" {
			kind = l.Why
		}
		if of[kind] == nil {
			of[kind] = &cause{kind: kind, first: l}
			all = append(all, of[kind])
		}
		of[kind].shots = append(of[kind].shots, l.Shot)
	}
	return all
}

// String names one shot with its very reason, several with what they have in common, and of
// many the first.
func (r *cause) String() string {
	const most = 3
	switch n := len(r.shots); {
	case n == 1:
		return r.first.Shot + ": " + r.first.Why
	case n <= most:
		return strings.Join(r.shots, ", ") + ": " + r.kind
	default:
		return fmt.Sprintf("%s and %d more: %s", strings.Join(r.shots[:most], ", "), n-most, r.kind)
	}
}

// WriteLeftOut writes a line for each reason, with how many shots it leaves out.
func WriteLeftOut(w io.Writer, what string, list []LeftOut) {
	for _, r := range causes(list) {
		count := ""
		if n := len(r.shots); n > 1 {
			count = fmt.Sprintf(" (%d)", n)
		}
		fmt.Fprintf(w, "%s%s: %s\n", what, count, report.Printable(r.String()))
	}
}

// mostLeft words the reason that leaves out most shots, "" where none are left out.
func mostLeft(list []LeftOut) string {
	var most *cause
	for _, r := range causes(list) {
		if most == nil || len(r.shots) > len(most.shots) {
			most = r
		}
	}
	if most == nil {
		return ""
	}
	return fmt.Sprintf("%d of %d left out, %s", len(most.shots), len(list), most)
}
