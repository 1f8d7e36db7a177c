package ledger

import (
	"context"
	"slices"

	"fallshadow/imageio"
)

// Region is a region of interest that a person drew: columns X0 to X1-1 and rows Y0 to
// Y1-1 of the picture, from the shot First on, until another one begins.
type Region struct {
	First          string
	X0, Y0, X1, Y1 int
}

// SetRegion stores a region in place of one that began with the same shot.
func (l *Ledger) SetRegion(ctx context.Context, g Region) error {
	_, err := l.write.ExecContext(ctx, "INSERT OR REPLACE INTO region (first_shot, x0, y0, x1, y1) VALUES (?,?,?,?,?)", g.First, g.X0, g.Y0, g.X1, g.Y1)
	return wrap("store the region", err)
}

// DropRegion takes back the region that begins with the shot.
func (l *Ledger) DropRegion(ctx context.Context, first string) error {
	_, err := l.write.ExecContext(ctx, "DELETE FROM region WHERE first_shot = ?", first)
	return wrap("drop the region", err)
}

// Regions returns the regions in natural order of their first shots.
func (r *Reader) Regions(ctx context.Context) ([]Region, error) {
	rows, err := r.read.QueryContext(ctx, "SELECT first_shot, x0, y0, x1, y1 FROM region")
	if err != nil {
		return nil, wrap("read the regions", err)
	}
	defer rows.Close()
	var list []Region
	for rows.Next() {
		var g Region
		if err := rows.Scan(&g.First, &g.X0, &g.Y0, &g.X1, &g.Y1); err != nil {
			return nil, wrap("read the regions", err)
		}
		list = append(list, g)
	}
	slices.SortFunc(list, func(a, b Region) int { return imageio.Natural(a.First, b.First) })
	return list, wrap("read the regions", rows.Err())
}

// RegionFor returns the region in force for the shot, of regions in natural order; ok is
// false where none is.
func RegionFor(regions []Region, shot string) (g Region, ok bool) {
	for _, r := range regions {
		if imageio.Natural(r.First, shot) <= 0 {
			g, ok = r, true
		}
	}
	return g, ok
}
