package night

import (
	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/settings"
)

// Staleness tells the rows that were made with other settings, drawn regions or program
// than those of now. It looks at no frames: a row that it leaves alone may still be stale.
type Staleness struct {
	settings [32]byte
	regions  []ledger.Region
}

// NewStaleness judges by some settings and drawn regions.
func NewStaleness(s *settings.Settings, regions []ledger.Region) Staleness {
	return Staleness{s.Digest(), regions}
}

// Mark marks a row that is stale, and unmarks one that is not.
func (t Staleness) Mark(r *ledger.Row) {
	var region *ledger.Region
	if g, drawn := ledger.RegionFor(t.regions, r.Shot); drawn {
		region = &g
	}
	r.Stale = r.Currency.Analysis != Analysis || !r.Currency.Settings.Same(settingsDigest(t.settings, region))
}

// MarkStale marks the stale ones of some rows.
func MarkStale(rows []ledger.Row, s *settings.Settings, regions []ledger.Region) {
	t := NewStaleness(s, regions)
	for i := range rows {
		t.Mark(&rows[i])
	}
}
