package ledger

import (
	"bufio"
	"context"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// listing returns the files of a folder with their bytes and times.
func listing(t *testing.T, dir string) map[string]string {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	list := map[string]string{}
	for _, e := range entries {
		info, err := e.Info()
		if err != nil {
			t.Fatal(err)
		}
		b, err := os.ReadFile(filepath.Join(dir, e.Name()))
		if err != nil {
			t.Fatal(err)
		}
		list[e.Name()] = info.ModTime().String() + string(b)
	}
	return list
}

// readOnce opens the ledger, returns its number of rows and closes it.
func readOnce(t *testing.T, dir string) int {
	t.Helper()
	r, err := OpenReader(context.Background(), dir)
	if err != nil {
		t.Fatal(err)
	}
	rows := read(t, r)
	for range r.Each(context.Background()) {
	}
	if _, err := r.read.Exec("DELETE FROM row"); err == nil {
		t.Error("a reader wrote")
	}
	if err := r.Close(); err != nil {
		t.Fatal(err)
	}
	return len(rows)
}

func TestReaderLeavesTheFolderAsItWas(t *testing.T) {
	dir := t.TempDir()
	l := open0(t, dir)
	put(t, l, row("a", 1), row("b", 2))
	if err := l.Close(); err != nil {
		t.Fatal(err)
	}
	before := listing(t, dir)
	if n := readOnce(t, dir); n != 2 {
		t.Errorf("%d rows", n)
	}
	if diff := cmp.Diff(before, listing(t, dir)); diff != "" {
		t.Error(diff)
	}
}

// TestReadersBesideWriter open and close the ledger while another process writes and is
// killed; nothing that was acknowledged is lost, and what the writer left is cleared away.
func TestReadersBesideWriter(t *testing.T) {
	dir := t.TempDir()
	for range 3 {
		cmd, out := otherWriter(t, dir)
		seen := 0
		for range 10 {
			n := readOnce(t, dir)
			if n < seen {
				t.Errorf("%d rows after %d", n, seen)
			}
			seen = n
		}
		if err := cmd.Process.Kill(); err != nil {
			t.Fatal(err)
		}
		last := acknowledged(t, out)
		cmd.Wait()
		if n := readOnce(t, dir); n < last+1 {
			t.Errorf("%d rows, %d were acknowledged", n, last+1)
		}
		for _, name := range []string{Name + "-wal", Name + "-shm"} {
			if exists(filepath.Join(dir, name)) {
				t.Errorf("%s is left behind", name)
			}
		}
		l := open0(t, dir)
		var check string
		if err := l.write.QueryRow("PRAGMA integrity_check").Scan(&check); err != nil || check != "ok" {
			t.Errorf("integrity: %s (%v)", check, err)
		}
		l.Close()
	}
}

// acknowledged returns the last row that a killed writer said it had stored.
func acknowledged(t *testing.T, out *bufio.Reader) int {
	t.Helper()
	last := 4 // otherWriter has read so far
	for {
		line, err := out.ReadString('\n')
		if err == io.EOF {
			return last
		}
		if err != nil {
			t.Fatal(err)
		}
		fmt.Sscan(line, &last)
	}
}
