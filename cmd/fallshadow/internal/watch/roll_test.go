package watch

import (
	"context"
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"syscall"
	"testing"
	"time"

	"fallshadow/imageio"
	"fallshadow/imageio/fits"
)

// album is a folder that a roll looks at, with a clock of its own.
type album struct {
	t      *testing.T
	dir    string
	layout imageio.Layout
	roll   *roll
	now    time.Time
}

func newAlbum(t *testing.T, layout imageio.Layout) *album {
	dir := t.TempDir()
	return &album{t, dir, layout, newRoll(dir, nil, nil), time.Now()}
}

// after lets time go by and scans.
func (a *album) after(d time.Duration) (jobs []*job, gone, moved bool) {
	a.t.Helper()
	a.now = a.now.Add(d)
	night, err := imageio.Scan(context.Background(), a.dir, a.layout)
	if err != nil {
		a.t.Fatal(err)
	}
	return a.roll.update(night.Shots, a.now)
}

// expect wants so many jobs after a while.
func (a *album) expect(d time.Duration, n int) []*job {
	a.t.Helper()
	jobs, _, _ := a.after(d)
	if len(jobs) != n {
		a.t.Fatalf("%d jobs, want %d", len(jobs), n)
	}
	return jobs
}

var threeFiles = imageio.Layout{Kind: "files", Planes: []imageio.Role{imageio.Atoms, imageio.Light, imageio.Dark},
	Suffix: map[imageio.Role]string{imageio.Atoms: "_atoms", imageio.Light: "_light", imageio.Dark: "_dark"}}

func (a *album) frame(name string, bytes int) {
	a.t.Helper()
	out, err := os.Create(filepath.Join(a.dir, name+".fits"))
	if err != nil {
		a.t.Fatal(err)
	}
	defer out.Close()
	if err := fits.WriteCube(out, 8, 8, [][]uint16{make([]uint16, 64)}, nil); err != nil {
		a.t.Fatal(err)
	}
	if bytes > 0 {
		if err := out.Truncate(int64(bytes)); err != nil {
			a.t.Fatal(err)
		}
	}
}

// A shot of several files is taken when its last frame is whole.
func TestRollWaitsForAllFrames(t *testing.T) {
	a := newAlbum(t, threeFiles)
	a.frame("x_atoms", 0)
	a.expect(0, 0)
	a.frame("x_light", 0)
	a.expect(time.Second, 0)
	a.frame("x_dark", 3000)
	a.expect(time.Second, 0)
	a.frame("x_dark", 0)
	j := a.expect(time.Second, 1)[0]
	if j.Name != "x" || len(j.looks) != 3 || !j.isNew {
		t.Errorf("%+v", j)
	}
	a.expect(time.Hour, 0) // taken
}

// A frame that does not come is waited for a while, then the shot is read as it stands, so
// that its row says what is missing; a frame that comes late makes a new look.
func TestRollGivesUp(t *testing.T) {
	a := newAlbum(t, threeFiles)
	a.frame("x_atoms", 0)
	a.frame("x_light", 0)
	a.expect(0, 0)
	a.expect(unfinished-time.Second, 0)
	j := a.expect(2*time.Second, 1)[0]
	if j.Problem == nil {
		t.Error("nothing is said of the missing frame")
	}
	if !a.roll.refused(j, j.Problem, a.now) {
		t.Error("the shot is not given up")
	}
	a.roll.finish(j, known{}, a.now.Add(tick))
	a.expect(time.Hour, 0)
	a.frame("x_dark", 0)
	if j := a.expect(time.Second, 1)[0]; j.isNew || j.Problem != nil {
		t.Errorf("%+v", j)
	}
}

// What the system refuses, as while another program holds a file or a share is away, is waited for
// from the first refusal on, however old the file is.
func TestRollWaitsForTheSystem(t *testing.T) {
	a := newAlbum(t, imageio.Layout{})
	a.frame("x", 0)
	j := a.expect(0, 1)[0]
	refused := &fs.PathError{Op: "read", Path: "x.fits", Err: syscall.EIO}
	a.now = a.now.Add(time.Hour)
	if a.roll.refused(j, refused, a.now) {
		t.Fatal("the shot is given up at once")
	}
	j = a.expect(broken+time.Second, 1)[0]
	if a.roll.refused(j, refused, a.now) {
		t.Fatal("the shot is given up soon")
	}
	j = a.expect(unfinished, 1)[0]
	if !a.roll.refused(j, refused, a.now) {
		t.Error("the shot is not given up")
	}
}

// Looks at a file that is not whole get rarer, and a change makes them frequent again.
func TestRollBacksOff(t *testing.T) {
	a := newAlbum(t, imageio.Layout{})
	a.frame("x", 2900)
	a.expect(0, 0)
	var waits []time.Duration
	for range 8 {
		next, n, why := a.roll.patience()
		if n != 1 || why == nil {
			t.Fatalf("%d wait, %v", n, why)
		}
		waits = append(waits, next.Sub(a.now))
		a.expect(next.Sub(a.now), 0)
	}
	for i := 1; i < len(waits); i++ {
		if waits[i] < waits[i-1] || waits[i] > late {
			t.Errorf("waits %v", waits)
		}
	}
	if waits[0] != soon || waits[len(waits)-1] != late {
		t.Errorf("waits %v", waits)
	}
	a.frame("x", 2950)
	a.expect(time.Millisecond, 0)
	if next, _, _ := a.roll.patience(); next.Sub(a.now) != soon {
		t.Errorf("after a change the next look is in %v", next.Sub(a.now))
	}
}

// A file that changes while it is read is read again; one that is put back waits.
func TestRollReadsAgain(t *testing.T) {
	a := newAlbum(t, imageio.Layout{})
	a.frame("x", 0)
	j := a.expect(0, 1)[0]
	if !a.roll.unchanged(j, a.now) {
		t.Error("the file changed by itself")
	}
	if err := os.Chtimes(filepath.Join(a.dir, "x.fits"), time.Time{}, a.now.Add(time.Minute)); err != nil {
		t.Fatal(err)
	}
	if a.roll.unchanged(j, a.now) {
		t.Error("the change is not seen")
	}
	j = a.expect(time.Second, 1)[0]
	a.roll.hold(j, errors.New("no bench"), a.now)
	a.expect(late/2, 0)
	j = a.expect(late, 1)[0]
	if a.roll.refused(j, errors.New("read half of it"), a.now) != true {
		t.Error("a file that is broken for long is not given up")
	}
	if err := os.Remove(filepath.Join(a.dir, "x.fits")); err != nil {
		t.Fatal(err)
	}
	if a.roll.unchanged(j, a.now) {
		t.Error("a file that is gone is unchanged")
	}
	if _, gone, _ := a.after(time.Second); !gone || a.roll.last() != "" || len(a.roll.present()) != 0 {
		t.Error("the shot that left is still there")
	}
	if _, ok := a.roll.at(j.arrival); ok {
		t.Error("the frames of a shot that left are offered")
	}
}

// inWork is how many shots jobs have that are not done.
func (r *roll) inWork() (n int) {
	r.mu.Lock()
	defer r.mu.Unlock()
	for _, e := range r.shots {
		if e.state == taken {
			n++
		}
	}
	return n
}

// A shot that was read while its files could still change within a tick of the clock of their
// file system is read once more when that is over, however long its fit took.
func TestRollReadsOnceMore(t *testing.T) {
	second := time.Now().Truncate(time.Second)
	for _, test := range []struct {
		written time.Time
		tick    time.Duration
	}{{second, coarseTick}, {second.Add(time.Millisecond), tick}} {
		a := newAlbum(t, imageio.Layout{})
		a.frame("x", 0)
		date(t, filepath.Join(a.dir, "x.fits"), test.written)
		j := a.expect(0, 1)[0]
		early := a.now.Add(test.tick - 1)
		a.now = a.now.Add(test.tick - 2)
		a.roll.finish(j, known{}, early)
		a.expect(1, 0)
		j = a.expect(1, 1)[0]
		a.roll.finish(j, known{}, a.now)
		a.expect(time.Hour, 0)
		date(t, filepath.Join(a.dir, "x.fits"), test.written.Add(time.Minute))
		j = a.expect(0, 1)[0]
		read := a.now
		a.now = a.now.Add(time.Hour) // of fitting
		a.roll.finish(j, known{}, read)
		a.expect(0, 1)
	}
}
