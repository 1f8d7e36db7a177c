package check

import (
	"slices"
	"testing"
)

// TestBrief: names are cut where that keeps them apart.
func TestBrief(t *testing.T) {
	for _, c := range []struct{ names, want []string }{
		{[]string{"shot_1", "shot_2"}, []string{"shot_1", "shot_2"}},
		{[]string{"evaporation_0001", "evaporation_0002"}, []string{"~_0001", "~_0002"}},
		{[]string{"Lä 3 tof=18ms ä", "Lä 5 tof=18ms ä"}, []string{"Lä 3 ~", "Lä 5 ~"}},
		{[]string{"a 1 tof=18 b 1", "a 2 tof=18 b 1", "a 1 tof=18 b 2"}, []string{"a 1~ 1", "a 2~ 1", "a 1~ 2"}},
		{[]string{"same start 1 same end", "same start 2 same end"}, []string{"same start 1 same end", "same start 2 same end"}},
		{nil, []string{}},
	} {
		if got := brief(c.names, 6); !slices.Equal(got, c.want) {
			t.Errorf("%q: %q, want %q", c.names, got, c.want)
		}
	}
}
