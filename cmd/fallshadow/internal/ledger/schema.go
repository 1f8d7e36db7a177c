package ledger

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"net/url"
	"path/filepath"
	"slices"
	"strings"

	"modernc.org/sqlite" // the driver, seen by this package alone
)

// application marks the file as one of ours in SQLite's header ("FSHL").
const application = 0x4653484c

// version is the number of the schema; raised with a step in migrate.
const version = 1

// schema lays out a new ledger. Cells, metadata, file names and flags are JSON, so that
// a new column of the table is no change of the schema and a person can still ask
// `SELECT shot, numbers->>'T_nK' FROM row`. A row whose shot is not in the folder any
// more stays with present = 0. A verdict belongs to pixels, so that it follows a
// renamed shot and does not fall on a new one of the same name.
const schema = `
CREATE TABLE night (
	one  INTEGER PRIMARY KEY CHECK (one = 1),
	path TEXT NOT NULL
);
CREATE TABLE row (
	shot        TEXT PRIMARY KEY,
	files       TEXT NOT NULL,
	content     BLOB,
	frames      BLOB,
	settings    BLOB,
	analysis    INTEGER NOT NULL,
	reference   BLOB,
	provisional INTEGER NOT NULL,
	reason      TEXT NOT NULL,
	flags       TEXT NOT NULL,
	meta        TEXT NOT NULL,
	numbers     TEXT NOT NULL,
	words       TEXT NOT NULL,
	shifts      TEXT NOT NULL,
	present     INTEGER NOT NULL DEFAULT 1
);
CREATE INDEX row_content ON row (content);
CREATE TABLE history (
	id          INTEGER PRIMARY KEY AUTOINCREMENT,
	replaced_at TEXT NOT NULL DEFAULT (strftime('%Y-%m-%dT%H:%M:%SZ', 'now')),
	shot        TEXT NOT NULL,
	files       TEXT NOT NULL,
	content     BLOB,
	frames      BLOB,
	settings    BLOB,
	analysis    INTEGER NOT NULL,
	reference   BLOB,
	provisional INTEGER NOT NULL,
	reason      TEXT NOT NULL,
	flags       TEXT NOT NULL,
	meta        TEXT NOT NULL,
	numbers     TEXT NOT NULL,
	words       TEXT NOT NULL,
	shifts      TEXT NOT NULL
);
CREATE INDEX history_shot ON history (shot);
CREATE TABLE verdict (
	content BLOB PRIMARY KEY,
	word    TEXT NOT NULL
);
CREATE TABLE sighting (
	path     TEXT PRIMARY KEY,
	size     INTEGER NOT NULL,
	modified INTEGER NOT NULL
);
CREATE TABLE region (
	first_shot TEXT PRIMARY KEY,
	x0 INTEGER NOT NULL,
	y0 INTEGER NOT NULL,
	x1 INTEGER NOT NULL,
	y1 INTEGER NOT NULL
);
`

// open opens the database file with the given SQLite mode and connection settings.
func open(file, query string) (*sql.DB, error) {
	path, err := filepath.Abs(file)
	if err != nil {
		return nil, fmt.Errorf("find the ledger %s: %w", file, err)
	}
	path = filepath.ToSlash(path)
	if !strings.HasPrefix(path, "/") {
		path = "/" + path // a drive letter
	}
	name := (&url.URL{Scheme: "file", OmitHost: true, Path: path, RawQuery: query}).String()
	return sql.Open("sqlite", name)
}

// migrate brings the file to the present schema, a new file included.
func migrate(ctx context.Context, db *sql.DB) error {
	was, err := versionOf(ctx, db)
	if err != nil || was == version {
		return err
	}
	tx, err := db.BeginTx(ctx, nil)
	if err != nil {
		return err
	}
	defer tx.Rollback()
	step := fmt.Sprintf("%s PRAGMA application_id = %d; PRAGMA user_version = %d;", schema, application, version)
	if _, err := tx.ExecContext(ctx, step); err != nil {
		return err
	}
	return tx.Commit()
}

// versionOf returns the schema of the file, 0 for an empty one, and an error for a file
// that is no ledger or one of a newer program.
func versionOf(ctx context.Context, db *sql.DB) (int, error) {
	var app, was, tables int
	for query, v := range map[string]*int{
		"PRAGMA application_id":              &app,
		"PRAGMA user_version":                &was,
		"SELECT count(*) FROM sqlite_schema": &tables,
	} {
		if err := db.QueryRowContext(ctx, query).Scan(v); err != nil {
			return 0, err
		}
	}
	switch {
	case tables == 0:
		return 0, nil
	case app != application:
		return 0, fmt.Errorf("the file is a database of another program")
	case was > version:
		return 0, fmt.Errorf("the file was written by a newer fallshadow (schema %d, this one knows %d)", was, version)
	}
	return was, nil
}

// isFull reports whether the disk has no room for what SQLite wanted to write.
func isFull(err error) bool { return hasCode(err, 13) } // SQLITE_FULL

// isForbidden reports whether the file or its folder may not be written.
func isForbidden(err error) bool { return hasCode(err, 3, 8, 14) } // SQLITE_PERM, _READONLY, _CANTOPEN

func hasCode(err error, codes ...int) bool {
	const primary = 0xff // the part of a code that all its kinds share
	var e *sqlite.Error
	return errors.As(err, &e) && slices.Contains(codes, e.Code()&primary)
}
