package study

import (
	"math"
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

// Why shots tell no law.
const (
	whyByNumber = "T was computed from the thermal number (flag temperature_from_number, or fugacity = \"number\" in [fit]): the two agree by themselves and tell nothing of each other"
	whyUnknown  = "any number of condensate atoms could hide where the picture ends"
	whyShift    = "the fit did not find how its numbers move with a setting that may be off"
)

// whyAside says why a shot tells no law though it has what laws need, "" where it may.
func whyAside(p *curve.Point) string {
	switch {
	case !p.Independent():
		return whyByNumber
	case math.IsNaN(p.Vector[curve.Condensate]):
		return whyUnknown
	case !p.Shifted():
		return whyShift
	}
	return ""
}

// aside returns the shots that stay in trends and figures but take no part where T and atom
// numbers are held against each other.
func aside(n *curve.Night) (list []LeftOut) {
	for i := range n.Points {
		if why := whyAside(&n.Points[i]); why != "" {
			list = append(list, LeftOut{Shot: n.Points[i].Name, Why: why})
		}
	}
	return list
}
