package ledger

import (
	"context"
	"database/sql"
	"runtime"
	"sync"
)

// batch is how many rows are decoded at a time.
const batch = 128

// rows returns what a query of the stored columns finds, in its order.
func (r *Reader) rows(ctx context.Context, query string, args ...any) ([]Row, error) {
	found, err := r.read.QueryContext(ctx, query, args...)
	if err != nil {
		return nil, err
	}
	defer found.Close()
	d := decoding{free: make(chan struct{}, runtime.GOMAXPROCS(0))}
	for more := true; more; {
		var list []storedRow
		if list, more, err = next(found); err != nil {
			break
		}
		d.start(list)
	}
	return d.wait(err)
}

// next reads up to a batch of rows; more is false after the last.
func next(found *sql.Rows) (list []storedRow, more bool, err error) {
	for len(list) < batch {
		if !found.Next() {
			return list, false, found.Err()
		}
		s, err := scanStored(found)
		if err != nil {
			return nil, false, err
		}
		list = append(list, s)
	}
	return list, true, nil
}

// decoding is rows being decoded on all processors, batch by batch, while more are read.
type decoding struct {
	free    chan struct{}
	workers sync.WaitGroup
	parts   []*part
}

type part struct {
	rows []Row
	err  error
}

// start waits for a free processor.
func (d *decoding) start(list []storedRow) {
	p := &part{}
	d.parts = append(d.parts, p)
	d.free <- struct{}{}
	d.workers.Go(func() {
		defer func() { <-d.free }()
		words := dictionary{}
		for i := range list {
			row, err := list[i].decode(words)
			if err != nil {
				p.err = err
				return
			}
			p.rows = append(p.rows, row)
		}
	})
}

// wait returns the rows of all batches in the order they were started, unless reading them
// or decoding one failed.
func (d *decoding) wait(err error) ([]Row, error) {
	d.workers.Wait()
	var list []Row
	for _, p := range d.parts {
		if err == nil {
			err = p.err
		}
		list = append(list, p.rows...)
	}
	if err != nil {
		return nil, err
	}
	return list, nil
}
