package ledger

import (
	"context"
	"fmt"
	"sync"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"
)

// What the files looked like is stored with the row, and stands when the ledger is
// opened again.
func TestSightings(t *testing.T) {
	ctx, dir := context.Background(), t.TempDir()
	l := open0(t, dir)
	a, b := Sighting{"a.fits", 100, 5}, Sighting{"b_light.fits", 1 << 40, 1 << 62}
	if err := l.Put(ctx, row("a", 1), a, b); err != nil {
		t.Fatal(err)
	}
	b.Modified++
	if err := l.See(ctx, b); err != nil {
		t.Fatal(err)
	}
	if err := l.Close(); err != nil {
		t.Fatal(err)
	}
	got, err := open0(t, dir).Sightings(ctx)
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(map[string]Sighting{a.Path: a, b.Path: b}, got); diff != "" {
		t.Error(diff)
	}
}

// One row alone says what it says among all.
func TestRowAlone(t *testing.T) {
	ctx, l := context.Background(), open0(t, t.TempDir())
	put(t, l, row("shot_10", 1), row("shot_9", 1), row("shot_2", 2), row("gone", 3))
	reconcile(t, l, Present{Shot: "shot_10", Content: digest(1)}, Present{Shot: "shot_9", Content: digest(1)}, Present{Shot: "shot_2", Content: digest(2)})
	if err := l.Judge(ctx, digest(2), "probe off"); err != nil {
		t.Fatal(err)
	}
	for _, want := range read(t, l.Reader) {
		got, err := l.Row(ctx, want.Shot)
		if err != nil || got == nil {
			t.Fatalf("%s: %v, %v", want.Shot, got, err)
		}
		if diff := cmp.Diff(want, *got); diff != "" {
			t.Errorf("%s: %s", want.Shot, diff)
		}
	}
	for _, name := range []string{"gone", "never"} {
		if got, err := l.Row(ctx, name); got != nil || err != nil {
			t.Errorf("%s: %v, %v", name, got, err)
		}
	}
}

// One after another the rows are those that Rows returns, and a stop is one.
func TestEach(t *testing.T) {
	ctx, l := context.Background(), open0(t, t.TempDir())
	put(t, l, row("shot_10", 1), row("shot_9", 1), row("shot_2", 2), row("gone", 3))
	reconcile(t, l, Present{Shot: "shot_10", Content: digest(1)}, Present{Shot: "shot_9", Content: digest(1)}, Present{Shot: "shot_2", Content: digest(2)})
	if err := l.Judge(ctx, digest(1), "probe off"); err != nil {
		t.Fatal(err)
	}
	var got []Row
	for r, err := range l.Each(ctx) {
		if err != nil {
			t.Fatal(err)
		}
		got = append(got, *r)
	}
	if diff := cmp.Diff(read(t, l.Reader), got); diff != "" {
		t.Error(diff)
	}
	for range l.Each(ctx) {
		break
	}
	stopped, stop := context.WithCancel(ctx)
	stop()
	for r, err := range l.Each(stopped) {
		if r != nil || err == nil {
			t.Errorf("after a stop: %v, %v", r, err)
		}
	}
}

// Many may look at a night at the same time: none waits for what another holds.
func TestEachByMany(t *testing.T) {
	ctx, cancel := context.WithTimeout(context.Background(), time.Minute)
	defer cancel()
	l := open0(t, t.TempDir())
	for i := range 100 {
		put(t, l, row(fmt.Sprintf("shot_%d", i), byte(i)))
	}
	var all sync.WaitGroup
	for range 32 {
		all.Go(func() {
			n := 0
			for _, err := range l.Each(ctx) {
				if n++; err != nil {
					t.Error(err)
				}
			}
			if n != 100 {
				t.Errorf("%d rows", n)
			}
		})
	}
	all.Wait()
}

// A row whose shot has left the folder is found by its pixels; one that is there is not.
func TestGone(t *testing.T) {
	ctx, l := context.Background(), open0(t, t.TempDir())
	put(t, l, row("stays", 1), row("left", 2))
	reconcile(t, l, Present{Shot: "stays", Content: digest(1)})
	if r, err := l.Gone(ctx, digest(1)); r != nil || err != nil {
		t.Errorf("the one that is there: %v, %v", r, err)
	}
	if r, err := l.Gone(ctx, Digest{}); r != nil || err != nil {
		t.Errorf("what was never read: %v, %v", r, err)
	}
	if r, err := l.Gone(ctx, digest(2)); r == nil || err != nil || r.Shot != "left" {
		t.Errorf("the one that left: %v, %v", r, err)
	}
}
