package ledger

import "context"

// Gone returns a row with the given content whose shot is not in the folder, nil where
// there is none: the shot may have been renamed.
func (r *Reader) Gone(ctx context.Context, content Digest) (*Row, error) {
	rows, err := r.rows(ctx, "SELECT "+stored+" FROM row WHERE NOT present AND content = ? ORDER BY shot LIMIT 1", content.blob())
	if err != nil || len(rows) == 0 {
		return nil, wrap("look for a renamed shot", err)
	}
	return &rows[0], nil
}
