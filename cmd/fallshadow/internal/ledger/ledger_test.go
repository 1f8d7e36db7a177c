package ledger

import (
	"context"
	"database/sql"
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// digest makes a digest that is told apart by one byte.
func digest(b byte) (d Digest) {
	d[0], d[31] = b, 1
	return d
}

func row(shot string, content byte) *Row {
	r := &Row{
		Shot: shot, Files: []string{shot + ".fits"}, Content: digest(content),
		Currency: Currency{Frames: digest(content), Settings: digest(200), Analysis: 3, Reference: digest(201)},
		Flags:    []string{"faint", "part_saturated"},
		Meta:     map[string]string{"TOF": "15.0", "note": "Ω \"quoted\"\n"},
	}
	r.SetNumber("T_nK", 0.1+0.2)
	r.SetNumber("atoms", 1.2345678901234567e5)
	r.SetNumber("mu_nK", math.NaN())
	r.SetNumber("limit", math.Inf(1))
	r.SetWord("model", "bimodal")
	r.SetWord("form", "")
	r.Shifts = map[string]Shift{"alpha": {Known: true, Change: map[string]float64{"atoms": 1e3, "T": -1e-9}}}
	return r
}

func open0(t *testing.T, dir string) *Ledger {
	t.Helper()
	l, err := Open(context.Background(), dir, "/night", func(string, Digest) bool { return false })
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { l.Close() })
	return l
}

func put(t *testing.T, l *Ledger, rows ...*Row) {
	t.Helper()
	for _, r := range rows {
		if err := l.Put(context.Background(), r); err != nil {
			t.Fatal(err)
		}
	}
}

func reconcile(t *testing.T, l *Ledger, shots ...Present) {
	t.Helper()
	if err := l.Reconcile(context.Background(), shots); err != nil {
		t.Fatal(err)
	}
}

func read(t *testing.T, r *Reader) []Row {
	t.Helper()
	rows, err := r.Rows(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	return rows
}

func names(rows []Row) (list []string) {
	for _, r := range rows {
		list = append(list, r.Shot)
	}
	return list
}

func TestRowComesBackAsItWas(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "a b#c?d%20é")
	l := open0(t, dir)
	want := row("s/shot_1", 1)
	failed := &Row{Shot: "s/shot_2", Files: []string{"a", "b"}, Reason: "a_light.fits: truncated", Provisional: true}
	put(t, l, failed, want)
	if err := l.Close(); err != nil {
		t.Fatal(err)
	}
	for _, name := range []string{Name + "-wal", Name + "-shm"} {
		if exists(filepath.Join(dir, name)) {
			t.Errorf("%s is left behind", name)
		}
	}
	r, err := OpenReader(context.Background(), dir)
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	if diff := cmp.Diff([]Row{*want, *failed}, read(t, r)); diff != "" {
		t.Error(diff)
	}
	if v := want.Number("mu_nK"); !math.IsNaN(v) {
		t.Errorf("an empty cell reads %v", v)
	}
	if _, ok := want.Numbers["limit"]; ok {
		t.Error("an infinite number fills its cell")
	}
}

func TestRowsStandInNaturalOrder(t *testing.T) {
	l := open0(t, t.TempDir())
	put(t, l, row("shot_10", 1), row("shot_9", 2), row("b/shot_1", 3))
	if diff := cmp.Diff([]string{"b/shot_1", "shot_9", "shot_10"}, names(read(t, l.Reader))); diff != "" {
		t.Error(diff)
	}
}

func TestDurable(t *testing.T) {
	l := open0(t, t.TempDir())
	for pragma, want := range map[string]string{"journal_mode": "wal", "synchronous": "2", "busy_timeout": "10000"} {
		var got string
		if err := l.write.QueryRow("PRAGMA " + pragma).Scan(&got); err != nil || got != want {
			t.Errorf("%s is %q (%v), want %q", pragma, got, err, want)
		}
	}
}

func TestHistory(t *testing.T) {
	tests := []struct {
		name   string
		change func(old, now *Row)
		kept   int
	}{
		{"the same again", func(_, _ *Row) {}, 0},
		{"new pixels", func(_, now *Row) { now.Content, now.Currency.Frames = digest(9), digest(9) }, 1},
		{"new settings", func(_, now *Row) { now.Currency.Settings = digest(9) }, 1},
		{"new analysis", func(_, now *Row) { now.Currency.Analysis++ }, 1},
		{"new reference", func(_, now *Row) { now.Currency.Reference = digest(9) }, 1},
		{"a provisional row made final", func(old, now *Row) {
			old.Provisional, now.Currency.Reference = true, digest(9)
		}, 0},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			l := open0(t, t.TempDir())
			old, now := row("a", 1), row("a", 1)
			now.SetWord("model", "thermal")
			test.change(old, now)
			put(t, l, old, now)
			if diff := cmp.Diff([]Row{*now}, read(t, l.Reader)); diff != "" {
				t.Error(diff)
			}
			kept, err := l.History(context.Background(), "a")
			if err != nil || len(kept) != test.kept {
				t.Fatalf("%d rows in the history (%v), want %d", len(kept), err, test.kept)
			}
			if test.kept == 1 {
				if diff := cmp.Diff(*old, kept[0]); diff != "" {
					t.Error(diff)
				}
			}
		})
	}
}

func TestReconcile(t *testing.T) {
	is := func(shot string, content byte) Present {
		return Present{Shot: shot, Files: []string{shot + ".new"}, Content: digest(content)}
	}
	tests := []struct {
		name    string
		before  []*Row
		folder  []Present
		after   map[string]byte // content of the row by shot
		history map[string]int
	}{
		{"nothing new", []*Row{row("a", 1)}, []Present{is("a", 1)}, map[string]byte{"a": 1}, nil},
		{"renamed", []*Row{row("a", 1), row("b", 2)}, []Present{is("c", 1), is("b", 2)}, map[string]byte{"c": 1, "b": 2}, nil},
		{"copied", []*Row{row("a", 1)}, []Present{is("a", 1), is("b", 1)}, map[string]byte{"a": 1}, nil},
		{"gone", []*Row{row("a", 1), row("b", 2)}, []Present{is("b", 2)}, map[string]byte{"b": 2}, nil},
		{"exchanged", []*Row{row("a", 1), row("b", 2)}, []Present{is("a", 2), is("b", 1)}, map[string]byte{"a": 2, "b": 1}, nil},
		{"moved along", []*Row{row("a", 1), row("b", 2)}, []Present{is("b", 1), is("c", 2)}, map[string]byte{"b": 1, "c": 2}, nil},
		{"moved over another", []*Row{row("a", 1), row("b", 2)}, []Present{is("b", 1)}, map[string]byte{"b": 1}, map[string]int{"b": 1}},
		{"name taken by new pixels", []*Row{row("a", 1)}, []Present{is("a", 7), is("b", 1)}, map[string]byte{"b": 1}, nil},
		{"new pixels", []*Row{row("a", 1)}, []Present{is("a", 7)}, map[string]byte{"a": 1}, nil},
		{"two copies renamed", []*Row{row("a10", 1), row("a9", 1)}, []Present{is("b1", 1), is("b2", 1)}, map[string]byte{"b1": 1, "b2": 1}, nil},
		{"unreadable is like nothing", []*Row{{Shot: "a", Reason: "x"}}, []Present{{Shot: "b"}}, map[string]byte{}, nil},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			l := open0(t, t.TempDir())
			put(t, l, test.before...)
			reconcile(t, l, test.folder...)
			got := map[string]byte{}
			for _, r := range read(t, l.Reader) {
				got[r.Shot] = r.Content[0]
				if want := r.Shot + ".new"; r.Files[0] != want {
					t.Errorf("%s has file %s, want %s", r.Shot, r.Files[0], want)
				}
			}
			if diff := cmp.Diff(test.after, got); diff != "" {
				t.Error(diff)
			}
			for shot, n := range test.history {
				if kept, err := l.History(context.Background(), shot); err != nil || len(kept) != n {
					t.Errorf("%d rows in the history of %s (%v), want %d", len(kept), shot, err, n)
				}
			}
		})
	}
}

// A shot that was away for a while has its row again, without a fit.
func TestGoneShotComesBack(t *testing.T) {
	l := open0(t, t.TempDir())
	put(t, l, row("a", 1))
	reconcile(t, l)
	if rows := read(t, l.Reader); len(rows) != 0 {
		t.Fatalf("rows of an empty folder: %v", names(rows))
	}
	reconcile(t, l, Present{Shot: "a", Files: []string{"a.fits"}, Content: digest(1)})
	if diff := cmp.Diff([]Row{*row("a", 1)}, read(t, l.Reader)); diff != "" {
		t.Error(diff)
	}
}

func TestDuplicateNamesTheFirst(t *testing.T) {
	l := open0(t, t.TempDir())
	put(t, l, row("shot_10", 1), row("shot_2", 1), row("shot_3", 2), &Row{Shot: "x"}, &Row{Shot: "y"})
	got := map[string]string{}
	for _, r := range read(t, l.Reader) {
		got[r.Shot] = r.Duplicate
	}
	want := map[string]string{"shot_2": "", "shot_3": "", "shot_10": "shot_2", "x": "", "y": ""}
	if diff := cmp.Diff(want, got); diff != "" {
		t.Error(diff)
	}
}

func TestVerdictFollowsThePixels(t *testing.T) {
	ctx := context.Background()
	l := open0(t, t.TempDir())
	put(t, l, row("a", 1), row("b", 2))
	if err := l.Judge(ctx, digest(1), "trap off"); err != nil {
		t.Fatal(err)
	}
	reconcile(t, l, Present{Shot: "c", Content: digest(1)}, Present{Shot: "b", Content: digest(2)})
	bad := func() map[string]string {
		got := map[string]string{}
		for _, r := range read(t, l.Reader) {
			got[r.Shot] = r.Bad
		}
		return got
	}
	if diff := cmp.Diff(map[string]string{"c": "trap off", "b": ""}, bad()); diff != "" {
		t.Error(diff)
	}
	if err := l.Judge(ctx, digest(1), ""); err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(map[string]string{"c": "", "b": ""}, bad()); diff != "" {
		t.Error(diff)
	}
}

func TestRegions(t *testing.T) {
	ctx := context.Background()
	l := open0(t, t.TempDir())
	for _, g := range []Region{{"shot_10", 1, 2, 3, 4}, {"shot_9", 5, 6, 7, 8}, {"shot_10", 9, 9, 9, 9}} {
		if err := l.SetRegion(ctx, g); err != nil {
			t.Fatal(err)
		}
	}
	list, err := l.Regions(ctx)
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff([]Region{{"shot_9", 5, 6, 7, 8}, {"shot_10", 9, 9, 9, 9}}, list); diff != "" {
		t.Error(diff)
	}
	for shot, want := range map[string]string{"shot_8": "", "shot_9": "shot_9", "shot_10": "shot_10", "shot_11": "shot_10"} {
		if g, ok := RegionFor(list, shot); g.First != want || ok != (want != "") {
			t.Errorf("region for %s is that of %q, want %q", shot, g.First, want)
		}
	}
	if err := l.DropRegion(ctx, "shot_9"); err != nil {
		t.Fatal(err)
	}
	if list, _ := l.Regions(ctx); len(list) != 1 {
		t.Errorf("%d regions after one of two was dropped", len(list))
	}
}

func TestOtherNightIsRefused(t *testing.T) {
	ctx := context.Background()
	dir := t.TempDir()
	l := open0(t, dir)
	put(t, l, row("a", 1))
	l.Close()

	_, err := Open(ctx, dir, "/other", func(string, Digest) bool { return false })
	var other *OtherNightError
	if !errors.As(err, &other) || other.Night != "/night" || !strings.Contains(err.Error(), "--out") {
		t.Fatalf("another night: %v", err)
	}
	moved, err := Open(ctx, dir, "/other", func(shot string, c Digest) bool { return shot == "a" && c == digest(1) })
	if err != nil {
		t.Fatalf("the night that has moved: %v", err)
	}
	if night, err := moved.Night(ctx); night != "/other" || err != nil {
		t.Errorf("the night is %q (%v) after it has moved", night, err)
	}
	moved.Close()
}

func TestForeignFiles(t *testing.T) {
	foreign := func(statement string) func(string) error {
		return func(file string) error {
			db, err := sql.Open("sqlite", file)
			if err != nil {
				return err
			}
			defer db.Close()
			_, err = db.Exec(statement)
			return err
		}
	}
	tests := []struct {
		name, want string
		make       func(file string) error
	}{
		{"text", "not a database", func(file string) error {
			return os.WriteFile(file, []byte(strings.Repeat("no ledger\n", 200)), 0o644)
		}},
		{"another program", "another program", foreign("CREATE TABLE x (y)")},
		{"a newer one", "newer fallshadow", foreign("CREATE TABLE x (y); PRAGMA application_id = 1179863116; PRAGMA user_version = 99")},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			dir := t.TempDir()
			file := filepath.Join(dir, Name)
			if err := test.make(file); err != nil {
				t.Fatal(err)
			}
			before, _ := os.ReadFile(file)
			_, err := Open(context.Background(), dir, "/night", nil)
			if err == nil || !strings.Contains(err.Error(), test.want) || !strings.Contains(err.Error(), Name) {
				t.Errorf("writer: %v", err)
			}
			if _, err := OpenReader(context.Background(), dir); err == nil || !strings.Contains(err.Error(), test.want) {
				t.Errorf("reader: %v", err)
			}
			if after, _ := os.ReadFile(file); test.name == "text" && string(before) != string(after) {
				t.Error("the file was changed")
			}
		})
	}
}

func TestReaderWithoutLedger(t *testing.T) {
	dir := t.TempDir()
	if _, err := OpenReader(context.Background(), dir); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("%v", err)
	}
	if list, _ := os.ReadDir(dir); len(list) != 0 {
		t.Errorf("the reader left %v", list)
	}
}

// TestFullDisk: a ledger without room, or leave to write it, is not to be moved away, a broken
// one is.
func TestFullDisk(t *testing.T) {
	db, err := open(filepath.Join(t.TempDir(), Name), "")
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	db.SetMaxOpenConns(1)
	if _, err := db.Exec("PRAGMA max_page_count = 2"); err != nil {
		t.Fatal(err)
	}
	err = migrate(context.Background(), db)
	if got := unreadable(Name, err).Error(); !strings.Contains(got, "free space") || strings.Contains(got, "move the file") {
		t.Errorf("a full disk: %s", got)
	}
	file := filepath.Join(t.TempDir(), Name)
	if err := os.WriteFile(file, nil, 0o644); err != nil {
		t.Fatal(err)
	}
	shut, err := open(file, "mode=ro")
	if err != nil {
		t.Fatal(err)
	}
	defer shut.Close()
	err = migrate(context.Background(), shut)
	if got := unreadable(Name, err).Error(); !strings.Contains(got, "leave to write") || strings.Contains(got, "move the file") {
		t.Errorf("a file that may not be written: %s", got)
	}
	if got := unreadable(Name, errors.New("file is not a database")).Error(); !strings.Contains(got, "move the file away") {
		t.Errorf("a broken file: %s", got)
	}
}
