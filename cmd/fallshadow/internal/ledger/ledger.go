// Package ledger is the store of results of a night: one SQLite file in the folder of
// its results, written by one process at a time and read by any number. It alone sees
// SQLite.
package ledger

import (
	"context"
	"database/sql"
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"path/filepath"
)

// Name of the ledger in the folder of a night's results.
const Name = "ledger.sqlite"

const lockName = "ledger.lock"

// Files are the names of all files that a ledger may have beside one another.
var Files = []string{Name, Name + "-wal", Name + "-shm", lockName}

// Ledger is a ledger open for writing. It is safe for concurrent use; writes wait for
// one another.
type Ledger struct {
	*Reader
	write *sql.DB
	lock  *os.File
}

// OtherNightError says that the ledger was made from another night.
type OtherNightError struct{ Dir, Night string }

func (e *OtherNightError) Error() string {
	return fmt.Sprintf("the ledger in %s belongs to another night, %s: choose another folder with --out", e.Dir, e.Night)
}

// Open opens the ledger in the folder dir for writing and makes it where there is none.
// night is the absolute path of the night. A ledger made from another path is refused
// with an *OtherNightError unless knows, asked for one shot of the ledger after another,
// finds one of them in this night: a night that has moved brings its shots along.
// While another process writes, Open fails at once with a *BusyError.
func Open(ctx context.Context, dir, night string, knows func(shot string, content Digest) bool) (*Ledger, error) {
	if err := refuseNetwork(dir); err != nil {
		return nil, err
	}
	if err := os.MkdirAll(dir, 0o755); err != nil {
		return nil, fmt.Errorf("make the folder of results: %w", err)
	}
	held, err := lock(dir)
	if err != nil {
		return nil, err
	}
	l := &Ledger{lock: held}
	if err := l.open(ctx, dir, night, knows); err != nil {
		return nil, errors.Join(err, l.Close())
	}
	return l, nil
}

func (l *Ledger) open(ctx context.Context, dir, night string, knows func(string, Digest) bool) (err error) {
	file := filepath.Join(dir, Name)
	l.write, err = open(file, "_pragma=busy_timeout(10000)&_pragma=journal_mode(wal)&_pragma=synchronous(full)&_txlock=immediate")
	if err != nil {
		return unreadable(file, err)
	}
	l.write.SetMaxOpenConns(1)
	if err := migrate(ctx, l.write); err != nil {
		return unreadable(file, err)
	}
	if l.Reader, err = OpenReader(ctx, dir); err != nil {
		return err
	}
	made, err := l.Night(ctx)
	if err != nil || made == night {
		return err
	}
	if made != "" {
		same, err := l.sharesShot(ctx, knows)
		if err != nil {
			return err
		}
		if !same {
			return &OtherNightError{Dir: dir, Night: made}
		}
	}
	_, err = l.write.ExecContext(ctx, "INSERT INTO night (one, path) VALUES (1, ?) ON CONFLICT DO UPDATE SET path = excluded.path", night)
	return wrap("note the night", err)
}

func (l *Ledger) sharesShot(ctx context.Context, knows func(string, Digest) bool) (bool, error) {
	rows, err := l.Rows(ctx)
	if err != nil {
		return false, err
	}
	for _, r := range rows {
		if r.Content != (Digest{}) && knows(r.Shot, r.Content) {
			return true, nil
		}
	}
	return false, nil
}

// Close lets go of the ledger.
func (l *Ledger) Close() error {
	var errs []error
	if l.Reader != nil {
		errs = append(errs, l.Reader.Close())
	}
	if l.write != nil {
		errs = append(errs, l.write.Close())
	}
	return errors.Join(append(errs, l.lock.Close())...)
}

// Put stores a row in one transaction. A row that it replaces is kept as history when
// it was final and its pixels, settings, analysis or reference were others. The files that
// the row was made from may be noted with it.
func (l *Ledger) Put(ctx context.Context, r *Row, seen ...Sighting) error {
	args, err := r.columns()
	if err != nil {
		return fmt.Errorf("store %s: %w", r.Shot, err)
	}
	return l.transact(ctx, "store "+r.Shot, func(tx *sql.Tx) error {
		if err := keep(ctx, tx, r); err != nil {
			return err
		}
		_, err := tx.ExecContext(ctx, "INSERT OR REPLACE INTO row ("+stored+", present) VALUES (?,?,?,?,?,?,?,?,?,?,?,?,?,?, 1)", args...)
		if err != nil {
			return err
		}
		return see(ctx, tx, seen)
	})
}

// keep copies the row that r is about to replace into the history, if it is worth it.
func keep(ctx context.Context, tx *sql.Tx, r *Row) error {
	old, err := scanRow(tx.QueryRowContext(ctx, "SELECT "+stored+" FROM row WHERE shot = ?", r.Shot))
	if errors.Is(err, sql.ErrNoRows) {
		return nil
	}
	if err != nil {
		return err
	}
	if old.Provisional || old.Content.Same(r.Content) && old.Currency.Same(r.Currency) {
		return nil
	}
	return toHistory(ctx, tx, r.Shot)
}

func toHistory(ctx context.Context, tx *sql.Tx, shot string) error {
	_, err := tx.ExecContext(ctx, "INSERT INTO history ("+stored+") SELECT "+stored+" FROM row WHERE shot = ?", shot)
	return err
}

// Present is a shot that is in the folder now.
type Present struct {
	Shot    string
	Files   []string
	Content Digest
}

// Reconcile brings the rows in line with the shots that are in the folder, in one
// transaction. A shot without a row of its own content takes that of a row with the same
// content whose own shot is gone or has other content now: the shot was renamed. Rows of
// shots that are not in the folder are kept, but Rows leaves them out. Ties go in the
// order of the shots and of the old names.
func (l *Ledger) Reconcile(ctx context.Context, shots []Present) error {
	return l.transact(ctx, "bring the ledger in line with the folder", func(tx *sql.Tx) error {
		old, err := contents(ctx, tx)
		if err != nil {
			return err
		}
		if err := rename(ctx, tx, renames(old, shots)); err != nil {
			return err
		}
		if _, err := tx.ExecContext(ctx, "UPDATE row SET present = 0"); err != nil {
			return err
		}
		for _, s := range shots {
			files, err := json.Marshal(s.Files)
			if err != nil {
				return err
			}
			if _, err := tx.ExecContext(ctx, "UPDATE row SET present = 1, files = ? WHERE shot = ?", string(files), s.Shot); err != nil {
				return err
			}
		}
		return nil
	})
}

func (l *Ledger) transact(ctx context.Context, what string, do func(*sql.Tx) error) error {
	tx, err := l.write.BeginTx(ctx, nil)
	if err != nil {
		return wrap(what, err)
	}
	defer tx.Rollback()
	if err := do(tx); err != nil {
		return wrap(what, err)
	}
	return wrap(what, tx.Commit())
}

func wrap(what string, err error) error {
	if err == nil {
		return nil
	}
	return fmt.Errorf("%s in the ledger: %w", what, err)
}

// unreadable says what to do about a ledger that cannot be opened for writing.
func unreadable(file string, err error) error {
	switch {
	case isFull(err):
		return fmt.Errorf("open %s: %w (free space on the disk, and run again)", file, err)
	case isForbidden(err):
		return fmt.Errorf("open %s: %w (get leave to write the file and its folder, or name another folder with --out)", file, err)
	}
	return fmt.Errorf("open %s: %w (move the file away to start a new ledger)", file, err)
}
