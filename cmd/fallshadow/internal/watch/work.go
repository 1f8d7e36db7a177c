package watch

import (
	"context"
	"errors"
	"strings"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/fit"
	"fallshadow/imageio"
)

// work takes jobs until the queue is closed. It fails where the ledger does.
func (w *Watcher) work(ctx context.Context) error {
	workspace := fit.NewWorkspace()
	for {
		j, ok := w.queue.pop()
		if !ok {
			return nil
		}
		m, err := w.measure(ctx, j, workspace)
		if ctx.Err() != nil {
			return nil
		}
		if err == nil {
			err = w.conclude(ctx, j, m)
		}
		if err != nil {
			return err
		}
		if m.err != nil {
			workspace = fit.NewWorkspace() // a panic may have left it in any state
		}
	}
}

// measured is what became of a job.
type measured struct {
	read            time.Time // when that began
	raw             *imageio.Raw
	content, frames ledger.Digest
	lab             *settings.Settings
	region          *ledger.Region
	reference       ledger.Digest
	facts           *report.Facts
	err             error // of reading or fitting
	unread          bool  // the frames could not be read
	stands          bool  // the row of these frames is there
}

// measure reads and fits a shot, unless its row stands. It fails where the ledger does.
func (w *Watcher) measure(ctx context.Context, j *job, workspace *fit.Workspace) (m measured, err error) {
	m.lab, m.read = w.settings(), time.Now()
	m.raw, m.err = night.ReadShot(ctx, w.root, j.Shot, m.lab.Layout())
	if m.err != nil {
		m.raw, m.unread = nil, true
		return m, nil
	}
	m.content, m.frames = night.Contents(w.root, j.Shot, m.raw)
	if m.stands, err = w.stored(ctx, j, &m); m.stands || err != nil {
		return m, err
	}
	m.region = w.regionOf(j.Name)
	m.facts, m.reference, m.err = w.desk.measure(ctx, m.lab, m.region, j.arrival, m.raw, workspace)
	return m, nil
}

// conclude stores what became of a job, or puts it back. It fails where the ledger does.
func (w *Watcher) conclude(ctx context.Context, j *job, m measured) error {
	var early *notReadyError
	switch {
	case errors.As(m.err, &early):
		w.roll.hold(j, early, time.Now())
		w.noteHoldup()
		return nil
	case m.unread && !w.roll.refused(j, m.err, time.Now()):
		return nil
	}
	if d := time.Until(j.since.Add(settle)); d > 0 && !pause(ctx, d) {
		return nil
	}
	if !w.roll.unchanged(j, time.Now()) {
		return nil
	}
	if m.unread {
		m.content, m.frames = night.Contents(w.root, j.Shot, nil)
	}
	return w.keep(context.WithoutCancel(ctx), j, m)
}

// keep stores the row of a job and tells of it.
func (w *Watcher) keep(ctx context.Context, j *job, m measured) error {
	k := known{content: m.content, frames: m.frames}
	if m.stands {
		w.roll.finish(j, k, m.read)
		return w.store.See(ctx, j.looks...)
	}
	if err := w.store.Put(ctx, w.row(j, &m), j.looks...); err != nil {
		return err
	}
	before := w.roll.knownOf(j.Name).content
	if !w.roll.finish(j, k, m.read) { // it left the folder meanwhile, which no scan will see again
		if err := w.store.Reconcile(ctx, w.roll.present()); err != nil {
			return err
		}
		w.audience.Changed()
	}
	w.noteBacklog()
	w.noteHoldup()
	w.askTable()
	if err := w.tell(ctx, j, &m); err != nil {
		return err
	}
	if w.roll.twin(j.Name, before) || w.roll.twin(j.Name, k.content) {
		w.audience.Changed() // the other may be a duplicate now, or none any more
	}
	return nil
}

// row makes the row of a job.
func (w *Watcher) row(j *job, m *measured) *ledger.Row {
	r := &ledger.Row{
		Shot: j.Name, Content: m.content, Provisional: true, Meta: j.Meta,
		Currency: ledger.Currency{
			Frames: m.frames, Settings: night.SettingsDigest(m.lab, m.region), Analysis: night.Analysis, Reference: m.reference,
		},
	}
	for _, f := range j.Files {
		r.Files = append(r.Files, f.Path)
	}
	if m.raw != nil {
		r.Meta = m.raw.Meta
	}
	if m.err != nil {
		r.Reason = strings.Join(strings.Fields(m.err.Error()), " ")
		return r
	}
	report.Fill(r, m.facts)
	return r
}

// tell shows a stored row to the audience, the numbers before the picture.
func (w *Watcher) tell(ctx context.Context, j *job, m *measured) error {
	r, err := w.Row(ctx, j.Name)
	if err != nil || r == nil {
		return err
	}
	w.audience.Row(r)
	if m.facts != nil || m.raw != nil {
		w.audience.Picture(j.Name, m.facts, m.raw)
	}
	return nil
}

// stored reports whether the row of a job is in the ledger: that of a shot that left and came
// back too, and of one that was renamed. Rows of shots that left are looked for first, since
// another worker may bring them back meanwhile.
func (w *Watcher) stored(ctx context.Context, j *job, m *measured) (bool, error) {
	if is, err := w.renamed(ctx, j, m); is || err != nil {
		return is, err
	}
	r, err := w.store.Row(ctx, j.Name)
	return r != nil && r.Content.Same(m.content) && r.Currency.Frames.Same(m.frames), err
}

// renamed reports whether the frames of a job are those of a row whose shot has left the
// folder; the row then goes on under the new name.
func (w *Watcher) renamed(ctx context.Context, j *job, m *measured) (bool, error) {
	old, err := w.store.Gone(ctx, m.content)
	if err != nil || old == nil || !old.Currency.Frames.Same(m.frames) {
		return false, err
	}
	w.roll.finish(j, known{content: m.content, frames: m.frames}, m.read)
	if err := w.store.Reconcile(context.WithoutCancel(ctx), w.roll.present()); err != nil {
		return false, err
	}
	w.audience.Changed()
	w.askTable()
	return true, nil
}
