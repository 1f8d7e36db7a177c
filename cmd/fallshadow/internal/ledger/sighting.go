package ledger

import (
	"context"
	"database/sql"
)

// Sighting is what a file looked like when the row of its shot was made from it. A file
// that still looks like that need not be read again.
type Sighting struct {
	Path     string // relative to the night, forward slashes
	Size     int64
	Modified int64 // ns since 1970
}

// See stores what the files of a shot look like, for a row that stands already.
func (l *Ledger) See(ctx context.Context, seen ...Sighting) error {
	return l.transact(ctx, "note the files seen", func(tx *sql.Tx) error { return see(ctx, tx, seen) })
}

func see(ctx context.Context, tx *sql.Tx, seen []Sighting) error {
	for _, s := range seen {
		if _, err := tx.ExecContext(ctx, "INSERT OR REPLACE INTO sighting (path, size, modified) VALUES (?,?,?)", s.Path, s.Size, s.Modified); err != nil {
			return err
		}
	}
	return nil
}

// Sightings returns all of them by path.
func (r *Reader) Sightings(ctx context.Context) (map[string]Sighting, error) {
	rows, err := r.read.QueryContext(ctx, "SELECT path, size, modified FROM sighting")
	if err != nil {
		return nil, wrap("read the files seen", err)
	}
	defer rows.Close()
	all := map[string]Sighting{}
	for rows.Next() {
		var s Sighting
		if err := rows.Scan(&s.Path, &s.Size, &s.Modified); err != nil {
			return nil, wrap("read the files seen", err)
		}
		all[s.Path] = s
	}
	return all, wrap("read the files seen", rows.Err())
}
