package ledger

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"strings"
	"testing"
)

const holdIn = "FALLSHADOW_TEST_HOLD_LEDGER"

// TestMain lets the test binary play the other writer: it opens the ledger, stores rows
// without end and says so after the first.
func TestMain(m *testing.M) {
	dir := os.Getenv(holdIn)
	if dir == "" {
		os.Exit(m.Run())
	}
	l, err := Open(context.Background(), dir, "/night", nil)
	for i := 0; err == nil; i++ {
		err = l.Put(context.Background(), row(fmt.Sprint("shot_", i), byte(i)))
		if err == nil {
			fmt.Println(i)
		}
	}
	fmt.Fprintln(os.Stderr, err)
	os.Exit(1)
}

// otherWriter starts a process that writes to the ledger, and waits for its first rows.
func otherWriter(t *testing.T, dir string) (*exec.Cmd, *bufio.Reader) {
	t.Helper()
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	cmd := exec.Command(self)
	cmd.Env = append(os.Environ(), holdIn+"="+dir)
	pipe, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { cmd.Process.Kill() })
	out := bufio.NewReader(pipe)
	for range 5 {
		if _, err := out.ReadString('\n'); err != nil {
			t.Fatal(err)
		}
	}
	return cmd, out
}

func TestSecondWriterStopsAtOnce(t *testing.T) {
	dir := t.TempDir()
	cmd, _ := otherWriter(t, dir)
	_, err := Open(context.Background(), dir, "/night", nil)
	var busy *BusyError
	if !errors.As(err, &busy) || busy.PID != cmd.Process.Pid {
		t.Fatalf("got %v, want a *BusyError with process %d", err, cmd.Process.Pid)
	}
	if text := err.Error(); !strings.Contains(text, fmt.Sprint("process ", busy.PID)) || !strings.Contains(text, "--out") {
		t.Errorf("the message is %q", text)
	}
	r, err := OpenReader(context.Background(), dir)
	if err != nil {
		t.Fatalf("reading beside the writer: %v", err)
	}
	defer r.Close()
	if rows := read(t, r); len(rows) < 5 {
		t.Errorf("%d rows beside the writer, want 5 or more", len(rows))
	}
}

// What the writer said it stored is there after a kill, and the lock is free.
func TestKilledWriter(t *testing.T) {
	dir := t.TempDir()
	for range 3 {
		cmd, out := otherWriter(t, dir)
		if err := cmd.Process.Kill(); err != nil {
			t.Fatal(err)
		}
		last := acknowledged(t, out)
		cmd.Wait()
		l := open0(t, dir)
		if rows := read(t, l.Reader); len(rows) < last+1 {
			t.Errorf("%d rows after the kill, %d were acknowledged", len(rows), last+1)
		}
		var check string
		if err := l.write.QueryRow("PRAGMA integrity_check").Scan(&check); err != nil || check != "ok" {
			t.Errorf("integrity: %s (%v)", check, err)
		}
		l.Close()
	}
}
