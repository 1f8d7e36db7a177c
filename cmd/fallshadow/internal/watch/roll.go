package watch

import (
	"errors"
	"maps"
	"os"
	"path/filepath"
	"slices"
	"sync"
	"syscall"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/imageio"
	"fallshadow/imageio/fault"
)

const (
	// settle is for how long a file must have looked the same before what was read of it
	// is believed: a camera program may make the file in its final size and fill it then.
	settle = 150 * time.Millisecond
	// tick is how long a file system may give a file that is written to the same time: the
	// clocks of systems go in steps of up to 16 ms.
	tick = 20 * time.Millisecond
	// coarseTick is the same for one that knows seconds alone, or every other one.
	coarseTick = 2500 * time.Millisecond
	// unfinished is how long after its last change a shot with a file cut short or a frame
	// missing is waited for before that is reported, and how long one that the system refuses
	// is after the first refusal.
	unfinished = 20 * time.Second
	// broken is the same for a file that contradicts its format.
	broken = 2 * time.Second
	// soon and late bound the waits between two looks at such a shot.
	soon, late = 50 * time.Millisecond, 2 * time.Second
)

// roll is what is known of the shots in the folder. It decides which of them are read now.
type roll struct {
	root string
	rows map[string]known // by shot, of the ledger
	seen map[string]ledger.Sighting

	mu       sync.Mutex
	shots    map[string]*entry
	arrivals []*entry // by arrival; those that are gone too
	layout   int      // counts layouts of the frames
	scanned  bool     // once
	returned bool     // a shot whose row was not of the folder has come back
}

// known is what the ledger says of a shot.
type known struct {
	content, frames ledger.Digest
	meta            map[string]string
}

// entry is a shot of the folder.
type entry struct {
	shot    imageio.Shot
	looks   []ledger.Sighting // of its files
	since   time.Time         // of their last change
	moment  int64             // when it came, see moments
	state   state
	tries   int
	failing time.Time // since when looks fail
	next    time.Time // for the next look
	why     error     // it waits
	held    error     // why it was put back
	arrival int       // -1 before it was whole
	known   known     // of its row; zero where it has none
}

type state int

const (
	waiting state = iota // for its files to be whole
	taken                // by a job
	done
)

// job is a shot to be read, and what it looked like.
type job struct {
	imageio.Shot
	looks   []ledger.Sighting
	since   time.Time
	arrival int
	layout  int
	isNew   bool // no job was made of it before
}

func newRoll(root string, rows []ledger.Row, seen map[string]ledger.Sighting) *roll {
	r := &roll{root: root, rows: make(map[string]known, len(rows)), seen: seen, shots: map[string]*entry{}}
	for i := range rows {
		r.rows[rows[i].Shot] = known{rows[i].Content, rows[i].Currency.Frames, rows[i].Meta}
	}
	return r
}

// update takes in what a scan found and returns the shots to be read now, in the order
// they came, whether shots have left the folder or returned to it, and whether shots that were there have
// another place in that order.
func (r *roll) update(shots []imageio.Shot, now time.Time) (jobs []*job, gone, moved bool) {
	r.mu.Lock()
	defer r.mu.Unlock()
	here := make(map[string]bool, len(shots))
	for _, s := range shots {
		here[s.Name] = true
	}
	for _, m := range moments(r.root, shots) {
		moved = moved || r.moves(m)
		if j := r.meet(m, now); j != nil {
			jobs = append(jobs, j)
		}
	}
	for name := range r.shots {
		if !here[name] {
			delete(r.shots, name)
			gone = true
		}
	}
	// What left while nobody watched has a row still.
	gone = gone || r.returned || !r.scanned && len(r.rows) > 0
	r.scanned, r.returned = true, false
	return jobs, gone, moved
}

// moves reports whether a shot that has a row has another place now.
func (r *roll) moves(m met) bool {
	if e := r.shots[m.shot.Name]; e != nil {
		return e.state == done && e.moment != m.moment
	}
	var files []string
	for _, l := range m.looks {
		files = append(files, l.Path)
	}
	_, has := r.rows[m.shot.Name]
	return has && r.written(files) != m.moment
}

// meet takes in one shot of a scan.
func (r *roll) meet(m met, now time.Time) *job {
	s, looks := m.shot, m.looks
	e := r.shots[s.Name]
	switch {
	case e == nil:
		e = &entry{shot: s, looks: looks, since: now, next: now, arrival: -1, known: r.rows[s.Name]}
		r.shots[s.Name] = e
		if r.isCurrent(e) {
			e.state, r.returned = done, r.scanned
			r.arrive(e)
		}
		e.known.meta = nil // has served
		delete(r.rows, s.Name)
	case !slices.Equal(e.looks, looks) || !maps.Equal(e.shot.Meta, s.Meta):
		e.shot, e.looks, e.since, e.tries, e.next = s, looks, now, 0, now
		if e.state == done {
			e.state = waiting
		}
	}
	e.moment = m.moment
	if e.state == waiting {
		e.shot = s // what its frames are may be another
	}
	if e.state != waiting || now.Before(e.next) {
		return nil
	}
	if err := whole(r.root, s); err != nil && !r.fails(e, err, now) {
		return nil
	}
	return r.take(e)
}

// isCurrent reports whether the row of a shot was made of files that looked like this.
func (r *roll) isCurrent(e *entry) bool {
	for _, l := range e.looks {
		if r.seen[l.Path] != l {
			return false
		}
	}
	for k, v := range e.shot.Meta {
		if e.known.meta[k] != v {
			return false
		}
	}
	return e.known.content != ledger.Digest{} && len(e.looks) > 0
}

// arrive gives a shot its place in the order of arrival.
func (r *roll) arrive(e *entry) {
	if e.arrival < 0 {
		e.arrival = len(r.arrivals)
		r.arrivals = append(r.arrivals, e)
	}
}

func (r *roll) take(e *entry) *job {
	isNew := e.arrival < 0
	r.arrive(e)
	e.state = taken
	return &job{Shot: e.shot, looks: e.looks, since: e.since, arrival: e.arrival, layout: r.layout, isNew: isNew}
}

// fails notes why a shot cannot be read yet, and reports whether to give it up.
func (r *roll) fails(e *entry, err error, now time.Time) (givenUp bool) {
	if e.tries == 0 {
		e.failing = now
	}
	since, patience := e.since, broken
	switch errno := syscall.Errno(0); {
	case errors.As(err, &errno): // another program holds the file, or a share is away
		since, patience = e.failing, unfinished
	case errors.Is(err, fault.Truncated) || e.shot.Problem != nil:
		patience = unfinished
	}
	e.why = err
	if now.Sub(since) >= patience {
		return true
	}
	e.state = waiting
	e.next = now.Add(min(soon<<min(e.tries, 10), late))
	e.tries++
	return false
}

// refused is told that a job's frames could not be read, and reports whether to give up.
func (r *roll) refused(j *job, err error, now time.Time) (givenUp bool) {
	r.mu.Lock()
	defer r.mu.Unlock()
	e := r.shots[j.Name]
	return e != nil && r.fails(e, err, now)
}

// hold puts a job back for a while, without limit.
func (r *roll) hold(j *job, why error, now time.Time) {
	r.mu.Lock()
	defer r.mu.Unlock()
	if e := r.shots[j.Name]; e != nil {
		e.state, e.held, e.next = waiting, why, now.Add(late)
	}
}

// holdup returns why the latest of the shots that were put back was, nil where there is none.
func (r *roll) holdup() error {
	r.mu.Lock()
	defer r.mu.Unlock()
	latest := &entry{arrival: -1}
	for _, e := range r.shots {
		if e.held != nil && e.arrival > latest.arrival {
			latest = e
		}
	}
	return latest.held
}

// unchanged reports whether the files of a job look as they did when it was made; where
// they do not, they are read again.
func (r *roll) unchanged(j *job, now time.Time) bool {
	looks, ok := look(r.root, j.Shot)
	r.mu.Lock()
	defer r.mu.Unlock()
	e := r.shots[j.Name]
	if ok && e != nil && slices.Equal(looks, j.looks) && maps.Equal(e.shot.Meta, j.Meta) {
		return true
	}
	if e != nil {
		e.state, e.next, e.tries = waiting, now, 0
	}
	return false
}

// finish closes a job whose row stands, and reports whether its shot is in the folder still. A
// shot that was read so soon that its files may have changed unseen is read once more.
func (r *roll) finish(j *job, k known, read time.Time) bool {
	r.mu.Lock()
	defer r.mu.Unlock()
	e := r.shots[j.Name]
	if e == nil {
		return false
	}
	e.known, e.why, e.held, e.state = k, nil, nil, done
	if !slices.Equal(e.looks, j.looks) || !maps.Equal(e.shot.Meta, j.Meta) || j.layout != r.layout {
		e.state = waiting
	} else if end := e.since.Add(tickOf(j.looks)); read.Before(end) {
		e.state, e.next, e.tries = waiting, end, 0
	}
	return true
}

// tickOf is the tick of the file system that files are on, told by their times.
func tickOf(looks []ledger.Sighting) time.Duration {
	if slices.ContainsFunc(looks, func(l ledger.Sighting) bool { return l.Modified%int64(time.Second) != 0 }) {
		return tick
	}
	return coarseTick
}

// again has all shots read once more, whatever their files look like: the layout that says
// what their frames are is another now.
func (r *roll) again(now time.Time) {
	r.mu.Lock()
	defer r.mu.Unlock()
	r.layout++
	for _, e := range r.shots {
		if e.state == done {
			e.state, e.next, e.tries = waiting, now, 0
		}
	}
}

// knownOf returns what the ledger says of a shot.
func (r *roll) knownOf(name string) known {
	r.mu.Lock()
	defer r.mu.Unlock()
	if e := r.shots[name]; e != nil {
		return e.known
	}
	return known{}
}

// twin reports whether a shot shares pixels with another, the first of which makes the others
// duplicates.
func (r *roll) twin(name string, content ledger.Digest) bool {
	r.mu.Lock()
	defer r.mu.Unlock()
	for other, e := range r.shots {
		if other != name && e.known.content.Same(content) {
			return true
		}
	}
	return false
}

// present lists the shots that are there and were read, for the ledger.
func (r *roll) present() (list []ledger.Present) {
	r.mu.Lock()
	defer r.mu.Unlock()
	for name, e := range r.shots {
		p := ledger.Present{Shot: name, Content: e.known.content}
		for _, f := range e.shot.Files {
			p.Files = append(p.Files, f.Path)
		}
		list = append(list, p)
	}
	slices.SortFunc(list, func(a, b ledger.Present) int { return imageio.Natural(a.Shot, b.Shot) })
	return list
}

// at returns the shot of an arrival; ok is false where it is gone.
func (r *roll) at(arrival int) (s imageio.Shot, ok bool) {
	r.mu.Lock()
	defer r.mu.Unlock()
	if arrival < 0 || arrival >= len(r.arrivals) {
		return s, false
	}
	e := r.arrivals[arrival]
	return e.shot, r.shots[e.shot.Name] == e
}

// find returns a shot that was whole, with its arrival.
func (r *roll) find(name string) (s imageio.Shot, arrival int, ok bool) {
	r.mu.Lock()
	defer r.mu.Unlock()
	e := r.shots[name]
	if e == nil || e.arrival < 0 {
		return s, 0, false
	}
	return e.shot, e.arrival, true
}

// newest returns the shot that came last and was whole, "" where there is none.
func (r *roll) newest() (name string) {
	r.mu.Lock()
	defer r.mu.Unlock()
	var latest *entry
	for _, e := range r.shots {
		if e.arrival >= 0 && (latest == nil || inOrder(latest.moment, e.moment, latest.shot.Name, e.shot.Name) < 0) {
			latest = e
		}
	}
	if latest == nil {
		return ""
	}
	return latest.shot.Name
}

// momentOf returns when a shot came, from the ledger's word on its files where it is not in
// the folder, and 0 where that is not known.
func (r *roll) momentOf(name string, files []string) int64 {
	r.mu.Lock()
	defer r.mu.Unlock()
	if e := r.shots[name]; e != nil {
		return e.moment
	}
	return r.written(files)
}

// written returns when the last of some files was written that the ledger knows.
func (r *roll) written(files []string) (last int64) {
	for _, f := range files {
		last = max(last, r.seen[f].Modified)
	}
	return last
}

// last returns the last shot in natural order that was whole, "" where there is none.
func (r *roll) last() (name string) {
	r.mu.Lock()
	defer r.mu.Unlock()
	for other, e := range r.shots {
		if e.arrival >= 0 && (name == "" || imageio.Natural(other, name) > 0) {
			name = other
		}
	}
	return name
}

// patience returns the time of the next look at a shot that waits, and what it waits for.
func (r *roll) patience() (next time.Time, waits int, why error) {
	r.mu.Lock()
	defer r.mu.Unlock()
	for _, e := range r.shots {
		if e.state != waiting {
			continue
		}
		waits++
		if next.IsZero() || e.next.Before(next) {
			next, why = e.next, e.why
		}
	}
	return next, waits, why
}

// look returns what the files of a shot look like from outside; ok is false where one is
// not there.
func look(root string, s imageio.Shot) (looks []ledger.Sighting, ok bool) {
	for _, f := range s.Files {
		info, err := os.Stat(filepath.Join(root, filepath.FromSlash(f.Path)))
		if err != nil {
			return nil, false
		}
		looks = append(looks, ledger.Sighting{Path: f.Path, Size: info.Size(), Modified: info.ModTime().UnixNano()})
	}
	return looks, true
}

// whole reports what is missing of a shot.
func whole(root string, s imageio.Shot) error {
	if s.Problem != nil {
		return s.Problem
	}
	for _, f := range s.Files {
		if err := imageio.Whole(filepath.Join(root, filepath.FromSlash(f.Path))); err != nil {
			return err
		}
	}
	return nil
}
