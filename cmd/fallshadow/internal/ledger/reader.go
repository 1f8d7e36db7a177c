package ledger

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"

	"fallshadow/imageio"
)

// Reader is a ledger open for reading, at any time and beside a writer. It leaves the folder
// as it was, but that it clears away the log that a killed writer left.
type Reader struct{ read *sql.DB }

// OpenReader opens the ledger in the folder dir for reading. It fails where there is
// none, and on a network file system.
func OpenReader(ctx context.Context, dir string) (*Reader, error) {
	if err := refuseNetwork(dir); err != nil {
		return nil, err
	}
	file := filepath.Join(dir, Name)
	if _, err := os.Stat(file); err != nil {
		return nil, fmt.Errorf("no ledger in %s (run batch first): %w", dir, err)
	}
	// A connection that may not write at all cannot take its log and the shared memory of it
	// away again; this one can, and query_only keeps it from changing anything else. SQLite
	// does so only for the last connection, under its locks, a writer beside it or not.
	db, err := openForReading(ctx, file, "mode=rw&_pragma=busy_timeout(10000)&_pragma=query_only(1)")
	if err != nil && !exists(file+"-wal") {
		// A folder that cannot be written to has no place for the shared memory of the
		// log; a ledger at rest can be read without.
		db, err = openForReading(ctx, file, "mode=ro&immutable=1")
	}
	if err != nil {
		return nil, fmt.Errorf("open %s: %w", file, err)
	}
	return &Reader{db}, nil
}

func openForReading(ctx context.Context, file, query string) (*sql.DB, error) {
	db, err := open(file, query)
	if err != nil {
		return nil, err
	}
	db.SetMaxOpenConns(4)
	was, err := versionOf(ctx, db)
	if err == nil && was < version {
		err = errors.New("it has not been written to by this version yet: run batch first")
	}
	if err != nil {
		return nil, errors.Join(err, db.Close())
	}
	return db, nil
}

func exists(file string) bool {
	_, err := os.Stat(file)
	return err == nil
}

// Close lets go of the ledger.
func (r *Reader) Close() error { return r.read.Close() }

// Night returns the absolute path of the night that the ledger was made from, "" for a
// ledger that was never written to.
func (r *Reader) Night(ctx context.Context) (string, error) {
	var path string
	err := r.read.QueryRowContext(ctx, "SELECT path FROM night").Scan(&path)
	if errors.Is(err, sql.ErrNoRows) {
		return "", nil
	}
	return path, wrap("find the night", err)
}

// Rows returns the rows of the shots that are in the folder, in natural order of the
// shots, with Duplicate and Bad filled in.
func (r *Reader) Rows(ctx context.Context) ([]Row, error) {
	list, err := r.rows(ctx, "SELECT "+stored+" FROM row WHERE present")
	if err != nil {
		return nil, wrap("read the rows", err)
	}
	slices.SortFunc(list, func(a, b Row) int { return imageio.Natural(a.Shot, b.Shot) })
	markDuplicates(list)
	words, err := verdicts(ctx, r.read)
	if err != nil {
		return nil, wrap("read the verdicts", err)
	}
	for i := range list {
		list[i].Bad = words[list[i].Content]
	}
	return list, nil
}

// Row returns the row of a shot that is in the folder, with Duplicate and Bad filled in;
// nil where there is none.
func (r *Reader) Row(ctx context.Context, shot string) (*Row, error) {
	row, err := scanRow(r.read.QueryRowContext(ctx, "SELECT "+stored+" FROM row WHERE present AND shot = ?", shot))
	if errors.Is(err, sql.ErrNoRows) {
		return nil, nil
	}
	if err != nil {
		return nil, wrap("read the row of "+shot, err)
	}
	first, err := r.firstOf(ctx, row.Content)
	if err != nil {
		return nil, wrap("read the row of "+shot, err)
	}
	if first != shot {
		row.Duplicate = first
	}
	err = r.read.QueryRowContext(ctx, "SELECT word FROM verdict WHERE content = ?", row.Content.blob()).Scan(&row.Bad)
	if err != nil && !errors.Is(err, sql.ErrNoRows) {
		return nil, wrap("read the verdict on "+shot, err)
	}
	return &row, nil
}

// firstOf returns the first shot in natural order with the given content, "" for none.
func (r *Reader) firstOf(ctx context.Context, content Digest) (first string, err error) {
	rows, err := r.read.QueryContext(ctx, "SELECT shot FROM row WHERE present AND content = ?", content.blob())
	if err != nil {
		return "", err
	}
	defer rows.Close()
	for rows.Next() {
		var shot string
		if err := rows.Scan(&shot); err != nil {
			return "", err
		}
		if first == "" || imageio.Natural(shot, first) < 0 {
			first = shot
		}
	}
	return first, rows.Err()
}

// History returns the rows that once stood under the name of the shot, oldest first.
func (r *Reader) History(ctx context.Context, shot string) ([]Row, error) {
	list, err := r.rows(ctx, "SELECT "+stored+" FROM history WHERE shot = ? ORDER BY id", shot)
	return list, wrap("read the history of "+shot, err)
}
