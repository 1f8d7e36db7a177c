package night

import (
	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/settings"
)

// MarkStale marks the rows that were made with other settings, drawn regions or program
// than those of now. It looks at no frames: a row that it leaves alone may still be stale.
func MarkStale(rows []ledger.Row, s *settings.Settings, regions []ledger.Region) {
	digest := s.Digest()
	for i := range rows {
		c := &rows[i].Currency
		var region *ledger.Region
		if g, drawn := ledger.RegionFor(regions, rows[i].Shot); drawn {
			region = &g
		}
		rows[i].Stale = c.Analysis != Analysis || !c.Settings.Same(settingsDigest(digest, region))
	}
}
