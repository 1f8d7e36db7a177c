package ledger

import (
	"context"
	"database/sql"
	"iter"
	"slices"

	"fallshadow/imageio"
)

// Each yields what Rows returns, all of one moment, but holds no more than one row at a
// time: whoever looks at a night again and again while it grows stays light. An error ends
// it.
func (r *Reader) Each(ctx context.Context) iter.Seq2[*Row, error] {
	return func(yield func(*Row, error) bool) {
		if err := r.each(ctx, func(row *Row) bool { return yield(row, nil) }); err != nil {
			yield(nil, wrap("read the rows", err))
		}
	}
}

func (r *Reader) each(ctx context.Context, yield func(*Row) bool) error {
	tx, err := r.read.BeginTx(ctx, &sql.TxOptions{ReadOnly: true})
	if err != nil {
		return err
	}
	defer tx.Rollback()
	heads, err := headsOf(ctx, tx)
	if err != nil {
		return err
	}
	words, err := verdicts(ctx, tx)
	if err != nil {
		return err
	}
	one, err := tx.PrepareContext(ctx, "SELECT "+stored+" FROM row WHERE shot = ?")
	if err != nil {
		return err
	}
	defer one.Close()
	for i := range heads {
		row, err := scanRow(one.QueryRowContext(ctx, heads[i].Shot))
		if err != nil {
			return err
		}
		row.Duplicate, row.Bad = heads[i].Duplicate, words[row.Content]
		if !yield(&row) {
			return nil
		}
	}
	return nil
}

// headsOf returns shot, content and duplicate of the rows in their order.
func headsOf(ctx context.Context, tx *sql.Tx) ([]Row, error) {
	rows, err := tx.QueryContext(ctx, "SELECT shot, content FROM row WHERE present")
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var heads []Row
	for rows.Next() {
		var head Row
		var content []byte
		if err := rows.Scan(&head.Shot, &content); err != nil {
			return nil, err
		}
		head.Content = digestFrom(content)
		heads = append(heads, head)
	}
	slices.SortFunc(heads, func(a, b Row) int { return imageio.Natural(a.Shot, b.Shot) })
	markDuplicates(heads)
	return heads, rows.Err()
}
