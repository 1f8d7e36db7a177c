package night

import (
	"context"
	"errors"
	"fmt"
	"image"
	"slices"
	"strings"
	"sync"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/imageio"
)

// work brings the ledger in line with the folder, fits what is not current and writes
// the table.
func (b *batch) work(ctx context.Context) (*Outcome, error) {
	todo, err := b.plan(ctx)
	if err != nil {
		return nil, err
	}
	out := &Outcome{Dir: b.Out, Strays: b.scanned.Strays}
	if len(b.readable) > 0 {
		size := b.shots[b.readable[0]].size
		if text := b.Settings.Misplaced(size[0], size[1]); text != "" {
			out.Cautions = append(out.Cautions, text)
		}
	}
	var flights []float64
	for _, i := range b.readable {
		if t, err := b.Settings.Flight(b.shots[i].meta); err == nil {
			flights = append(flights, t)
		}
	}
	if text := b.Settings.Hasty(flights); text != "" {
		out.Cautions = append(out.Cautions, text)
	}
	unread := 0
	for i := range b.shots {
		if b.shots[i].err != nil {
			unread++
		}
	}
	out.Kept = len(b.shots) - len(todo) - unread
	stopped := b.storeUnreadable(ctx)
	if stopped == nil {
		out.Fitted = unread
		stopped = b.fit(ctx, todo, &out.Fitted)
	}
	// What is done is kept, also when something stopped the work.
	ctx = context.WithoutCancel(ctx)
	if out.Rows, err = b.table(ctx); err != nil {
		return nil, err
	}
	for i := range out.Rows {
		if out.Rows[i].Reason != "" {
			out.Failed++
		}
	}
	if err := report.SaveCSV(b.Out, out.Rows, b.Settings.Shots.Scan); err != nil {
		return nil, err
	}
	return out, errors.Join(stopped, b.undrawn.get())
}

// plan brings the rows in line with the folder and returns the readable shots, as places
// among them, whose rows are not current; it prepares the benches that they need.
func (b *batch) plan(ctx context.Context) (todo []int, err error) {
	present := make([]ledger.Present, len(b.shots))
	for i, s := range b.shots {
		present[i] = ledger.Present{Shot: s.Name, Files: files(s.Shot), Content: s.content}
	}
	if err := b.ledger.Reconcile(ctx, present); err != nil {
		return nil, err
	}
	rows, err := b.rowsByShot(ctx)
	if err != nil {
		return nil, err
	}
	for at, i := range b.readable {
		if r := rows[b.shots[i].Name]; b.Again || r == nil || !b.current(i, r) || b.Pictures != nil && r.Reason == "" && !b.Pictures.Has(r) {
			todo = append(todo, at)
		}
	}
	// Backwards, so that the benches that are kept are those of the first shots.
	for _, at := range slices.Backward(todo) {
		i := b.readable[at]
		if _, err := b.bench(ctx, b.regionOf(i)); err != nil {
			return nil, fmt.Errorf("prepare the region drawn for %s: %w", b.region(b.shots[i].Name).First, err)
		}
	}
	return todo, nil
}

func (b *batch) rowsByShot(ctx context.Context) (map[string]*ledger.Row, error) {
	rows, err := b.ledger.Rows(ctx)
	if err != nil {
		return nil, err
	}
	byShot := make(map[string]*ledger.Row, len(rows))
	for i := range rows {
		byShot[rows[i].Shot] = &rows[i]
	}
	return byShot, nil
}

// bench returns what makes measures in a region, prepared when it is asked for and not there.
func (b *batch) bench(ctx context.Context, region image.Rectangle) (func() measure, error) {
	b.preparing.Lock()
	defer b.preparing.Unlock()
	if worker, ok := b.benches.get(region); ok {
		return worker, nil
	}
	worker, err := b.prepare(ctx, b.Settings, region, b.again(ctx))
	if err != nil {
		return nil, err
	}
	b.benches.put(region, worker)
	return worker, nil
}

// again are the frames of a night that was read once.
func (b *batch) again(ctx context.Context) *frames {
	f := &frames{n: len(b.readable), load: b.load}
	f.all = func(yield func(*imageio.Raw) bool) {
		if !b.yieldDarks(ctx, false, yield) {
			return
		}
		for _, raw := range inOrder(len(b.readable), b.Workers, func(at int) *imageio.Raw {
			raw, _ := b.load(ctx, at) // a shot that has changed is found again when it is fitted
			return raw
		}) {
			if !yield(raw) {
				return
			}
		}
	}
	return f
}

// regionOf is the region that a person drew for shot i, empty for that of the settings.
func (b *batch) regionOf(i int) image.Rectangle { return rectangle(b.region(b.shots[i].Name)) }

// storeUnreadable writes the rows of shots that have no frames to fit.
func (b *batch) storeUnreadable(ctx context.Context) error {
	for i, s := range b.shots {
		if s.err == nil {
			continue
		}
		if ctx.Err() != nil {
			return context.Cause(ctx)
		}
		if err := b.ledger.Put(ctx, b.failed(i, s.err)); err != nil {
			return err
		}
	}
	return nil
}

// fit lets the workers measure the shots at the given places among the readable ones. One
// goroutine commits, a row as soon as it is there.
func (b *batch) fit(ctx context.Context, todo []int, done *int) error {
	if len(todo) == 0 {
		return nil
	}
	ctx, cancel := context.WithCancelCause(ctx)
	defer cancel(nil)
	b.progress.Begin("fitting", len(todo))
	defer b.progress.End()
	next, rows := make(chan int), make(chan *ledger.Row)
	go func() {
		defer close(next)
		for _, at := range todo {
			select {
			case next <- at:
			case <-ctx.Done():
				return
			}
		}
	}()
	var workers sync.WaitGroup
	for range min(b.Workers, len(todo)) {
		workers.Go(func() { b.worker(ctx, next, rows) })
	}
	go func() {
		workers.Wait()
		close(rows)
	}()
	for r := range rows {
		if err := b.ledger.Put(context.WithoutCancel(ctx), r); err != nil {
			cancel(err)
			continue
		}
		*done++
		b.progress.Step(report.Line(r), r.Reason != "")
	}
	return context.Cause(ctx)
}

// worker measures shots until there are none left or ctx is done.
func (b *batch) worker(ctx context.Context, next <-chan int, rows chan<- *ledger.Row) {
	k := kit{b, &shelf[measure]{most: 1}}
	for at := range next {
		r, err := b.row(ctx, at, k.measure)
		if err != nil {
			if ctx.Err() != nil {
				return
			}
			r = b.failed(b.readable[at], err)
			k.made = &shelf[measure]{most: 1} // a panic may have left its scratch in any state
		}
		rows <- r
	}
}

// row measures one shot.
func (b *batch) row(ctx context.Context, at int, measure measure) (_ *ledger.Row, err error) {
	defer caught(&err)
	raw, err := b.load(ctx, at)
	if err != nil {
		return nil, err
	}
	facts, err := measure(ctx, at, raw)
	if err != nil {
		return nil, err
	}
	r := b.blank(b.readable[at])
	report.Fill(r, facts)
	if b.Pictures != nil {
		b.undrawn.note(b.Pictures.Draw(r, facts))
	}
	return r, nil
}

// blank returns the row of shot i without its cells.
func (b *batch) blank(i int) *ledger.Row {
	s := &b.shots[i]
	return &ledger.Row{Shot: s.Name, Files: files(s.Shot), Content: s.content, Currency: b.currency(i), Meta: s.meta}
}

// failed returns the row of a shot that could not be fitted.
func (b *batch) failed(i int, err error) *ledger.Row {
	r := b.blank(i)
	r.Reason = strings.Join(strings.Fields(err.Error()), " ")
	return r
}

// table returns the rows of the table; those that are not current are marked.
func (b *batch) table(ctx context.Context) ([]ledger.Row, error) {
	rows, err := b.ledger.Rows(ctx)
	if err != nil {
		return nil, err
	}
	place := make(map[string]int, len(b.shots))
	for i, s := range b.shots {
		place[s.Name] = i
	}
	for k := range rows {
		i, ok := place[rows[k].Shot]
		rows[k].Stale = ok && b.shots[i].err == nil && !rows[k].Provisional && !b.current(i, &rows[k])
	}
	return rows, nil
}
