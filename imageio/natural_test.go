package imageio

import (
	"slices"
	"testing"
)

func TestNatural(t *testing.T) {
	sorted := []string{
		"", "0", "01", "1", "1a", "2", "10", "99999999999999999999998", "99999999999999999999999",
		"Shot", "a", "a/2", "a/10", "a0", "a00", "a00b", "a0b", "a1", "a1b01", "a1b1", "a1b2", "a2", "a10", "shot_09", "shot_9", "shot_10", "µ1", "µ2",
	}
	for i, a := range sorted {
		for j, b := range sorted {
			want := min(1, max(-1, i-j))
			if got := Natural(a, b); got != want {
				t.Errorf("Natural(%q, %q) = %d, want %d", a, b, got, want)
			}
		}
	}
	mixed := slices.Clone(sorted)
	slices.Reverse(mixed)
	slices.SortFunc(mixed, Natural)
	if !slices.Equal(mixed, sorted) {
		t.Errorf("sorted to %q", mixed)
	}
}
