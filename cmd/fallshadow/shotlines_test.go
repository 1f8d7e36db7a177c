package main

import (
	"bytes"
	"strings"
	"testing"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
)

func shotRow(shot string, atoms float64) *ledger.Row {
	r := &ledger.Row{Shot: shot, Provisional: true, Flags: []string{"dense", "cut"}, Meta: map[string]string{"RAMP": "310"}}
	r.SetNumber("flight_ms", 16)
	r.SetNumber("atoms", atoms)
	r.SetNumber("atoms_err", atoms/100)
	return r
}

// Lines stand in columns, say nothing of what is true of all, and hold no command for a
// terminal when they are piped.
func TestShotLines(t *testing.T) {
	var out, errs bytes.Buffer
	l := newShotLines(terminal{out: &out, err: &errs}, false)
	l.scan = func() []string { return []string{"RAMP"} }
	l.Row(shotRow("ramp_1", 51234))
	l.Row(shotRow("ramp_2\x1b[2J", 1e6))
	l.Row(&ledger.Row{Shot: "ramp_3", Reason: "cut\x07 short"})
	want := strings.Join([]string{
		"shot          flight/ms        RAMP         N  fraction      T/nK  flags",
		"ramp_1               16         310  51234(512)                      dense cut",
	}, "\n")
	if got := out.String(); !strings.HasPrefix(got, want) || strings.ContainsAny(got, "\x1b\x07") || !strings.Contains(got, "failed: cut? short") || strings.Contains(got, "provisional") {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
	l.color = true
	l.Row(shotRow("ramp_4", 1))
	if !strings.Contains(out.String(), "\x1b[33mdense cut\x1b[0m") {
		t.Error("no colour on a screen")
	}
	clock := time.Now()
	l.now = func() time.Time { return clock }
	l.Notes([]string{"waiting", "crowded"})
	l.Notes([]string{"crowded"})
	l.Notes([]string{"waiting", "crowded"})
	clock = clock.Add(again + time.Second)
	l.Notes([]string{"crowded"}) // it stood all the time
	l.Notes(nil)
	l.Notes([]string{"crowded"})
	clock = clock.Add(again + time.Second)
	l.Notes(nil)
	l.Notes([]string{"two are wrong:\none\x07\nother"})
	l.Notes([]string{"crowded"})
	l.Heard("ramp_4 was marked\x07")
	if got := errs.String(); got != "waiting\ncrowded\ntwo are wrong:\n  one?\n  other\ncrowded\nramp_4 was marked?\n" {
		t.Errorf("said %q", got)
	}
}

// Lines of JSON hold nothing else.
func TestShotLinesJSON(t *testing.T) {
	var out bytes.Buffer
	l := newShotLines(terminal{out: &out, err: &out}, true)
	l.scan = func() []string { return nil }
	l.Row(shotRow("ramp_1", 51234))
	if got := out.String(); !strings.HasPrefix(got, `{"shot":"ramp_1",`) || strings.Count(got, "\n") != 1 {
		t.Error(got)
	}
}
