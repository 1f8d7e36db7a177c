package study

import (
	"math"
	"testing"
)

// TestFound words where the transition lies, seen from both sides or from one.
func TestFound(t *testing.T) {
	for _, c := range []struct {
		hottest, coldest float64
		want             string
	}{
		{0.93, 1.05, "condensates up to T/Tc0 = 0.930, none found from 1.050 on"},
		{0.93, math.NaN(), "condensates in every shot, up to T/Tc0 = 0.930"},
		{math.NaN(), 1.05, "no condensate found, down to T/Tc0 = 1.050"},
	} {
		a := &Analysis{}
		a.Transition.Hottest, a.Transition.Coldest = c.hottest, c.coldest
		if got := a.found(); got != c.want {
			t.Errorf("%q, want %q", got, c.want)
		}
	}
}
