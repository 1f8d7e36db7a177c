package ledger

import (
	"context"
	"database/sql"
	"slices"

	"fallshadow/imageio"
)

// renamed is a row that goes on under another name.
type renamed struct{ from, to string }

// contents returns the content of every row by its shot, present or not.
func contents(ctx context.Context, tx *sql.Tx) (map[string]Digest, error) {
	rows, err := tx.QueryContext(ctx, "SELECT shot, content FROM row")
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	old := map[string]Digest{}
	for rows.Next() {
		var shot string
		var content []byte
		if err := rows.Scan(&shot, &content); err != nil {
			return nil, err
		}
		old[shot] = digestFrom(content)
	}
	return old, rows.Err()
}

// renames finds the rows whose shot now stands in the folder under another name. A row
// whose own shot still has its content stays where it is, so that a copy is no renaming.
func renames(old map[string]Digest, shots []Present) []renamed {
	settled := map[string]bool{}
	for _, s := range shots {
		settled[s.Shot] = old[s.Shot].Same(s.Content)
	}
	free := map[Digest][]string{}
	for shot, content := range old {
		if !settled[shot] && content != (Digest{}) {
			free[content] = append(free[content], shot)
		}
	}
	for _, names := range free {
		slices.SortFunc(names, imageio.Natural)
	}
	var moves []renamed
	for _, s := range shots {
		names := free[s.Content]
		if settled[s.Shot] || len(names) == 0 || s.Content == (Digest{}) {
			continue
		}
		moves = append(moves, renamed{from: names[0], to: s.Shot})
		free[s.Content] = names[1:]
	}
	return moves
}

// rename gives the rows their new names. They are first set aside under names that no
// path can have, because names may be exchanged; a row left in the place of another goes
// to the history.
func rename(ctx context.Context, tx *sql.Tx, moves []renamed) error {
	const move = "UPDATE row SET shot = ? WHERE shot = ?"
	for _, m := range moves {
		if _, err := tx.ExecContext(ctx, move, "\x00"+m.to, m.from); err != nil {
			return err
		}
	}
	for _, m := range moves {
		if err := toHistory(ctx, tx, m.to); err != nil {
			return err
		}
		if _, err := tx.ExecContext(ctx, "DELETE FROM row WHERE shot = ?", m.to); err != nil {
			return err
		}
		if _, err := tx.ExecContext(ctx, move, m.to, "\x00"+m.to); err != nil {
			return err
		}
	}
	return nil
}
