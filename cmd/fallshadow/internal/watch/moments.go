package watch

import (
	"cmp"
	"math"
	"slices"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/imageio"
)

// oneGo is how close to one another shots are written that no machine took one after the
// other: they were copied, and the order of copying means nothing.
const oneGo = 100 * time.Millisecond

// met is a shot as a scan met it.
type met struct {
	shot   imageio.Shot
	looks  []ledger.Sighting
	moment int64
}

// moments gives each shot the moment when it came and returns them in that order, equal
// ones in natural order. It is when the last of its files was written, ns since 1970; of
// shots that follow one another closer than oneGo it is that of the first. It depends on
// the files alone, so that it is the same after a restart. A shot of which a file went away
// is left out; the next scan tells.
func moments(root string, shots []imageio.Shot) []met {
	list := make([]met, 0, len(shots))
	for _, s := range shots {
		m := met{shot: s}
		var ok bool
		if m.looks, ok = look(root, s); !ok {
			continue
		}
		for _, l := range m.looks {
			m.moment = max(m.moment, l.Modified)
		}
		list = append(list, m)
	}
	byArrival := func(a, b met) int { return inOrder(a.moment, b.moment, a.shot.Name, b.shot.Name) }
	slices.SortFunc(list, byArrival)
	before := int64(math.MinInt64 / 2)
	for i := range list {
		m := &list[i]
		last := m.moment
		if last-before < int64(oneGo) {
			m.moment = list[i-1].moment
		}
		before = last
	}
	slices.SortFunc(list, byArrival)
	return list
}

// inOrder compares shots by when they came, and by name where that is the same.
func inOrder(a, b int64, nameA, nameB string) int {
	return cmp.Or(cmp.Compare(a, b), imageio.Natural(nameA, nameB))
}
