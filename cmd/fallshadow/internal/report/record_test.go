package report

import (
	"encoding/json"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/ledger"
)

// A record is one line of JSON with columns in their order, numbers as numbers, empty
// cells left out and flags as a list.
func TestRecord(t *testing.T) {
	r := &ledger.Row{
		Shot: "a<b>\n\"c", Files: []string{"x", "y"}, Flags: []string{"dense"}, Provisional: true,
		Meta: map[string]string{"RAMP": "1.5D2", "NOTE": "dull"},
	}
	r.SetNumber("atoms", 1.25e5)
	r.SetNumber("T_nK", 0.1)
	r.SetWord("model", "thermal")
	line, err := Record(r, []string{"RAMP", "NOTE", "NONE"})
	if err != nil || strings.ContainsAny(string(line), "\n<") {
		t.Fatalf("%s, %v", line, err)
	}
	want := `{"shot":"a\u003cb\u003e\n\"c","file":"x;y","status":"ok","flags":["dense","provisional"],"model":"thermal","atoms":125000,"T_nK":0.1,"RAMP":150,"NOTE":"dull"}`
	if string(line) != want {
		t.Errorf("got  %s\nwant %s", line, want)
	}
	var back map[string]any
	if err := json.Unmarshal(line, &back); err != nil || back["shot"] != r.Shot {
		t.Errorf("%v, %v", back, err)
	}
}
