package ledger

import (
	"context"
	"database/sql"
)

// Judge stores a person's word against the shot with the given content; an empty word
// takes it back. It holds for the pixels under whatever name they stand.
func (l *Ledger) Judge(ctx context.Context, content Digest, word string) error {
	query, args := "INSERT OR REPLACE INTO verdict (content, word) VALUES (?, ?)", []any{content[:], word}
	if word == "" {
		query, args = "DELETE FROM verdict WHERE content = ?", args[:1]
	}
	_, err := l.write.ExecContext(ctx, query, args...)
	return wrap("store the verdict", err)
}

// asker is a pool of connections, or a transaction that holds one.
type asker interface {
	QueryContext(ctx context.Context, query string, args ...any) (*sql.Rows, error)
}

func verdicts(ctx context.Context, from asker) (map[Digest]string, error) {
	rows, err := from.QueryContext(ctx, "SELECT content, word FROM verdict")
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	words := map[Digest]string{}
	for rows.Next() {
		var content []byte
		var word string
		if err := rows.Scan(&content, &word); err != nil {
			return nil, err
		}
		words[digestFrom(content)] = word
	}
	return words, rows.Err()
}
