package night

import (
	"context"
	"errors"
	"slices"
	"sync"
	"testing"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
)

// album remembers the pictures that were drawn.
type album struct {
	sync.Mutex
	has    map[string]bool
	drawn  []string
	broken bool
}

func (a *album) Has(r *ledger.Row) bool { return a.has[r.Shot] }

func (a *album) Draw(r *ledger.Row, f *report.Facts) error {
	a.Lock()
	defer a.Unlock()
	if a.broken {
		return errors.New("the disk is full")
	}
	a.drawn = append(a.drawn, r.Shot)
	return nil
}

// A shot without a picture is fitted for it, one with a picture is not; the table is the
// same as without.
func TestPicturesOfABatch(t *testing.T) {
	dir := newNight(t, 3)
	var f fake
	_, plain := mustBatch(t, &f, Options{Dir: dir})
	f.fitted()
	a := &album{has: map[string]bool{"shot_2": true}}
	_, table := mustBatch(t, &f, Options{Dir: dir, Pictures: a})
	slices.Sort(a.drawn)
	equal(t, "drawn", a.drawn, []string{"shot_1", "shot_3"})
	equal(t, "fitted", f.fitted(), []string{"1000", "3000"})
	equal(t, "table", table, plain)
}

// A picture that cannot be written costs no row, and is told at the end.
func TestPictureThatCannotBeWritten(t *testing.T) {
	dir := newNight(t, 3)
	var f fake
	out, table, err := batchOf(t, context.Background(), &f, Options{Dir: dir, Pictures: &album{broken: true}})
	if err == nil || err.Error() != "the disk is full" || out == nil || out.Failed != 0 || len(out.Rows) != 3 {
		t.Errorf("%v, %+v", err, out)
	}
	_, plain := mustBatch(t, &f, Options{Dir: dir})
	equal(t, "table", table, plain)
}
