package watch

import (
	"context"
	"fmt"
	"time"

	"fallshadow/imageio"
)

// gap is the least time between two scans: a camera program that writes a file in pieces
// wakes the watch with each. A long scan rests longer.
const gap = 25 * time.Millisecond

// scan looks through the folder whenever it is woken or a shot is due for another look.
func (w *Watcher) scan(ctx context.Context, wake <-chan struct{}) {
	for first := true; ; first = false {
		began := time.Now()
		w.rereadSettings(began)
		w.scanOnce(ctx)
		if first {
			w.desk.work.Go(func() { w.recall(ctx) })
		}
		took := time.Since(began)
		if !pause(ctx, max(gap, 3*took)-took) {
			return
		}
		timer := time.NewTimer(w.untilDue())
		select {
		case <-wake:
		case <-timer.C:
		case <-ctx.Done():
		}
		timer.Stop()
		if ctx.Err() != nil {
			return
		}
	}
}

// untilDue is the time until a waiting shot or settings that changed are to be looked at
// again.
func (w *Watcher) untilDue() time.Duration {
	due := w.Poll
	if next, _, _ := w.roll.patience(); !next.IsZero() {
		due = time.Until(next)
	}
	if !w.sheet.judged {
		due = min(due, time.Until(w.sheet.due()))
	}
	return max(0, due)
}

// scanOnce finds what is new and hands it to the workers.
func (w *Watcher) scanOnce(ctx context.Context) {
	scanned, err := imageio.Scan(ctx, w.root, w.settings().Layout())
	if ctx.Err() != nil {
		return
	}
	if err != nil {
		w.notes.set("folder", "the folder cannot be read: "+err.Error())
		return
	}
	w.notes.set("folder", "")
	w.desk.setDarks(scanned.Darks)
	last := w.roll.last()
	jobs, gone, moved := w.roll.update(scanned.Shots, time.Now())
	w.noteStrays(scanned)
	if gone || w.owed {
		w.reconcile(ctx)
	}
	if w.beginRegion(ctx, jobs, last) || moved {
		w.audience.Changed()
	}
	w.queue.push(jobs...)
	w.noteBacklog()
	w.noteHoldup()
	w.noteWaiting()
}

// reconcile brings the ledger in line with the folder, and notes where that failed: the next
// scan tries again.
func (w *Watcher) reconcile(ctx context.Context) {
	err := w.store.Reconcile(context.WithoutCancel(ctx), w.roll.present())
	if w.owed = err != nil; w.owed {
		w.notes.set("ledger", err.Error())
		return
	}
	w.notes.set("ledger", "")
	w.audience.Changed()
	w.askTable()
}

// noteStrays says that there are files but no shots: a layout that does not fit the files
// would otherwise look like a night that has not begun.
func (w *Watcher) noteStrays(scanned imageio.Night) {
	text := ""
	if n := len(scanned.Strays); n > 0 && len(scanned.Shots) == 0 {
		text = fmt.Sprintf("no shots yet; files that fit none: %d, such as %s: %s", n, scanned.Strays[0].Path, scanned.Strays[0].Reason)
	}
	w.notes.set("strays", text)
}

// crowded is how many shots wait before that is said.
const crowded = 4

// noteBacklog says that shots come faster than they are fitted.
func (w *Watcher) noteBacklog() {
	text := ""
	if w.queue.waiting() >= crowded {
		text = "there are more shots than can be fitted at once: the newest go first, the others follow"
	}
	w.notes.set("backlog", text)
}

// noteHoldup says why shots are not fitted yet that were read.
func (w *Watcher) noteHoldup() {
	text := ""
	if why := w.roll.holdup(); why != nil {
		text = "waiting with the fit: " + why.Error()
	}
	w.notes.set("bench", text)
}

// noteWaiting says which shot is waited for, once that has lasted.
func (w *Watcher) noteWaiting() {
	next, n, why := w.roll.patience()
	text := ""
	if n > 0 && why != nil && time.Until(next) > late/2 {
		text = fmt.Sprintf("waiting for unfinished shots (%d): %v", n, why)
	}
	w.notes.set("unfinished", text)
}
