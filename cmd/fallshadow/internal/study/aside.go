package study

import (
	"strings"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/fit/curve"
)

// byNumber says that the T of a row was computed from the number of its thermal part: the
// flag temperature_from_number, or fugacity = "number" in the settings.
func byNumber(r *ledger.Row) bool {
	_, options, _ := strings.Cut(r.Words["form"], ",")
	for option := range strings.SplitSeq(options, ",") {
		if option == "number" {
			return true
		}
	}
	return false
}

// whyByNumber is why such a row tells no law.
const whyByNumber = "T was computed from the thermal number (flag temperature_from_number, or fugacity = \"number\" in [fit]): the two agree by themselves and tell nothing of each other"

// aside returns the shots that stay in trends and figures but take no part where T and atom
// numbers are held against each other.
func aside(n *curve.Night) (list []LeftOut) {
	for i := range n.Points {
		if p := &n.Points[i]; !p.Independent() {
			list = append(list, LeftOut{Shot: p.Name, Why: whyByNumber})
		}
	}
	return list
}
