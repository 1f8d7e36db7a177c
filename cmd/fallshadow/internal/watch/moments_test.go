package watch

import (
	"cmp"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/imageio"
)

// date gives a file its last change.
func date(t *testing.T, file string, at time.Time) {
	t.Helper()
	if err := os.Chtimes(file, at, at); err != nil {
		t.Fatal(err)
	}
}

// came lists the shots of a roll as they came.
func (r *roll) came() (names []string) {
	for name := range r.shots {
		names = append(names, name)
	}
	slices.SortFunc(names, func(a, b string) int { return inOrder(r.momentOf(a, nil), r.momentOf(b, nil), a, b) })
	return names
}

// Shots go as they were written; those written in one go by name, however many, and
// whatever joins them later.
func TestMoments(t *testing.T) {
	a := newAlbum(t, imageio.Layout{})
	start := time.Now().Add(-time.Hour)
	frame := func(name string, ms int) {
		a.frame(name, 0)
		date(t, filepath.Join(a.dir, name+".fits"), start.Add(time.Duration(ms)*time.Millisecond))
	}
	expect := func(n int, moved bool, want string) {
		t.Helper()
		jobs, _, did := a.after(time.Second)
		if len(jobs) != n || did != moved {
			t.Errorf("%d jobs, moved %v, want %d, %v", len(jobs), did, n, moved)
		}
		for _, j := range jobs {
			a.roll.finish(j, known{}, a.now.Add(tick))
		}
		if got := strings.Join(a.roll.came(), " "); got != want {
			t.Errorf("they came as %s, want %s", got, want)
		}
		if all := a.roll.came(); a.roll.newest() != all[len(all)-1] {
			t.Errorf("%s is the newest", a.roll.newest())
		}
	}
	frame("mot_1", 0)
	frame("bec_1", 4000)
	frame("mot_2", 8000)
	frame("bec_2", 8100)
	expect(4, false, "mot_1 bec_1 mot_2 bec_2")
	frame("c_10", 20000)
	frame("c_9", 20060)
	expect(2, false, "mot_1 bec_1 mot_2 bec_2 c_9 c_10")
	frame("a", 20120)
	expect(1, false, "mot_1 bec_1 mot_2 bec_2 a c_9 c_10")
	frame("b", 19950) // now c_10 was not the first of them
	expect(1, true, "mot_1 bec_1 mot_2 bec_2 a b c_9 c_10")
	frame("mot_1", 30000)
	expect(1, true, "bec_1 mot_2 bec_2 a b c_9 c_10 mot_1")
	expect(0, false, "bec_1 mot_2 bec_2 a b c_9 c_10 mot_1")
}

// Two series in one night are told as they came, after a restart too, and fitted so; the
// table stays in natural order.
func TestTwoSeries(t *testing.T) {
	dir := nightWith(t)
	start := time.Now().Add(-time.Hour)
	add := func(n, name string, s int) {
		file := filepath.Join(dir, name+".fits.part")
		copyFile(t, shotFile(n), file)
		date(t, file, start.Add(time.Duration(s)*time.Second))
		if err := os.Rename(file, strings.TrimSuffix(file, ".part")); err != nil {
			t.Fatal(err)
		}
	}
	add("1", "mot_0001", 0)
	add("2", "bec_0001", 10)
	add("3", "mot_0002", 20)
	came := func(w *Watcher) []string {
		rows := rowsOf(t, w)
		slices.SortStableFunc(rows, func(a, b ledger.Row) int { return cmp.Compare(w.Arrived(&a).UnixNano(), w.Arrived(&b).UnixNano()) })
		return names(rows)
	}
	h := newHall()
	w, stop := run(t, Options{Dir: dir, Workers: 1}, h)
	h.until(t, "three", h.seen(3))
	if want := []string{"mot_0002", "bec_0001", "mot_0001"}; !slices.Equal(h.order, want) {
		t.Errorf("fitted as %v, want the newest first", h.order)
	}
	add("4", "bec_0002", 30)
	h.until(t, "four", h.seen(4))
	want := []string{"mot_0001", "bec_0001", "mot_0002", "bec_0002"}
	if got := came(w); !slices.Equal(got, want) {
		t.Errorf("they came as %v", got)
	}
	if got := names(rowsOf(t, w)); !slices.Equal(got, []string{"bec_0001", "bec_0002", "mot_0001", "mot_0002"}) {
		t.Errorf("rows of %v", got)
	}
	stop()
	table := string(read(t, filepath.Join(w.Out, report.CSVName)))
	if i, j := strings.Index(table, "bec_0002,"), strings.Index(table, "mot_0001,"); i < 0 || j < i {
		t.Errorf("the table is\n%s", table)
	}
	again := newHall()
	w, _ = run(t, Options{Dir: dir, Out: w.Out}, again)
	again.until(t, "the newest one's picture", func() bool { return again.pictures["bec_0002"] != nil })
	if got := came(w); !slices.Equal(got, want) || len(again.pictures) != 1 {
		t.Errorf("after a restart they came as %v, and %d are shown", got, len(again.pictures))
	}
}
