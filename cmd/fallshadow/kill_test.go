package main

import (
	"bufio"
	"context"
	"encoding/csv"
	"io"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
)

// smallNight simulates a night of a few small shots.
func smallNight(t *testing.T, shots int) string {
	t.Helper()
	dir := filepath.Join(t.TempDir(), "night")
	if _, code := program(t, "simulate", dir, "--shots", strconv.Itoa(shots)); code != 0 {
		t.Fatalf("simulate ended with %d", code)
	}
	return dir
}

func tableOf(t *testing.T, results string) string {
	t.Helper()
	data, err := os.ReadFile(filepath.Join(results, report.CSVName))
	if err != nil {
		t.Fatal(err)
	}
	return string(data)
}

// kills is how often a run is killed: FALLSHADOW_KILLS, or 3.
func kills(t *testing.T) int {
	t.Helper()
	text := os.Getenv("FALLSHADOW_KILLS")
	if text == "" {
		return 3
	}
	n, err := strconv.Atoi(text)
	if err != nil || n < 1 {
		t.Fatalf("FALLSHADOW_KILLS=%q is no number of kills", text)
	}
	return n
}

// A batch killed at a random moment and run again leaves the table of an undisturbed one,
// byte for byte, with no row lost or doubled.
func TestKilledBatchGoesOn(t *testing.T) {
	const shots = 4
	night := smallNight(t, shots)
	undisturbed := filepath.Join(t.TempDir(), "undisturbed")
	reading, fitting := stages(t, "batch", night, "--out", undisturbed, "--workers", "1")
	want := tableOf(t, undisturbed)
	if rows := lines(t, want); len(rows) != shots+1 {
		t.Fatalf("%d lines in the table", len(rows))
	}
	seed := uint64(time.Now().UnixNano())
	t.Logf("seed %d, an undisturbed run takes %v and %v", seed, reading, fitting)
	random := rand.New(rand.NewPCG(seed, 1))
	for _, workers := range []string{"1", "2"} {
		for k := range kills(t) {
			results := filepath.Join(t.TempDir(), "r")
			after := time.Duration(random.Float64() * float64(fitting))
			if k%4 == 3 {
				after = -time.Duration(random.Float64() * float64(reading))
			}
			killed(t, after, "batch", night, "--out", results, "--workers", workers)
			before := rowsIn(t, results)
			out, code := program(t, "batch", night, "--out", results, "--workers", workers)
			if code != 0 {
				t.Fatalf("%s workers: after a kill batch ended with %d", workers, code)
			}
			t.Logf("%s workers: %d rows after the kill", workers, before)
			if says := strconv.Itoa(before) + " current before"; !strings.Contains(out, says) {
				t.Errorf("%s workers: %d rows were there after the kill, but the run does not say %q:\n%s", workers, before, says, out)
			}
			if got := tableOf(t, results); got != want {
				t.Errorf("%s workers, killed with %d rows: the table is\n%s\nwant\n%s", workers, before, got, want)
			}
		}
	}
}

// started starts the program; the channel is closed when it begins to fit
// or ends.
func started(t *testing.T, args ...string) (*exec.Cmd, <-chan struct{}) {
	t.Helper()
	cmd := exec.Command("fallshadow", args...)
	pipe, err := cmd.StderrPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	fits := make(chan struct{})
	go func() {
		tell := sync.OnceFunc(func() { close(fits) })
		defer tell()
		for said := bufio.NewScanner(pipe); said.Scan(); {
			if strings.HasPrefix(said.Text(), "fitting") {
				tell()
			}
		}
	}()
	return cmd, fits
}

// stages runs the program to its end and returns how long it took before it began to fit,
// and from then on.
func stages(t *testing.T, args ...string) (reading, fitting time.Duration) {
	t.Helper()
	start := time.Now()
	cmd, fits := started(t, args...)
	<-fits
	reading = time.Since(start)
	if err := cmd.Wait(); err != nil {
		t.Fatal(err)
	}
	return reading, time.Since(start) - reading
}

// killed starts the program and kills it, if it still runs, so long after it began to
// fit, or for a negative time so long after its start.
func killed(t *testing.T, after time.Duration, args ...string) {
	t.Helper()
	cmd, fits := started(t, args...)
	if after >= 0 {
		<-fits
	}
	time.Sleep(after.Abs())
	cmd.Process.Kill()
	cmd.Wait()
}

// rowsIn counts the rows that a killed run left, 0 where it had no ledger yet.
func rowsIn(t *testing.T, results string) int {
	t.Helper()
	ctx := context.Background()
	l, err := ledger.OpenReader(ctx, results)
	if err != nil {
		t.Logf("no ledger after the kill: %v", err)
		return 0
	}
	defer l.Close()
	rows, err := l.Rows(ctx)
	if err != nil {
		t.Fatal(err)
	}
	return len(rows)
}

func lines(t *testing.T, table string) [][]string {
	t.Helper()
	all, err := csv.NewReader(strings.NewReader(table)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return all
}

// A first interrupt ends a batch in an orderly way: what is done stands in the table, and
// the same command goes on from there.
func TestInterruptedBatchKeepsWhatIsDone(t *testing.T) {
	if runtime.GOOS == "windows" {
		t.Skip("this system sends no interrupts")
	}
	night := smallNight(t, 5)
	undisturbed, results := filepath.Join(t.TempDir(), "u"), filepath.Join(t.TempDir(), "r")
	if _, code := program(t, "batch", night, "--out", undisturbed); code != 0 {
		t.Fatalf("batch ended with %d", code)
	}
	cmd, pipe := startHeld(t, "[1/", "batch", night, "--out", results, "--workers", "1")
	if err := cmd.Process.Signal(os.Interrupt); err != nil {
		t.Fatal(err)
	}
	said, err := io.ReadAll(pipe)
	if err != nil {
		t.Fatal(err)
	}
	if code := exitCode(cmd.Wait()); code != exitInterrupted {
		t.Fatalf("exit code %d, want %d; it said\n%s", code, exitInterrupted, said)
	}
	if !strings.Contains(string(said), "run the same command again") {
		t.Errorf("it said\n%s", said)
	}
	if n := len(lines(t, tableOf(t, results))) - 1; n < 1 || n > 4 {
		t.Errorf("%d rows in the table after the interrupt", n)
	}
	if _, code := program(t, "batch", night, "--out", results); code != 0 {
		t.Fatalf("afterwards batch ended with %d", code)
	}
	if got, want := tableOf(t, results), tableOf(t, undisturbed); got != want {
		t.Errorf("the table is\n%s\nwant\n%s", got, want)
	}
}

// A second batch on the same results stops at once and names the process that writes.
func TestSecondBatchStops(t *testing.T) {
	night, results := smallNight(t, 1), filepath.Join(t.TempDir(), "r")
	first, _ := startHeld(t, "reading", "batch", night, "--out", results)
	second := exec.Command("fallshadow", "batch", night, "--out", results)
	said, err := second.CombinedOutput()
	if code := exitCode(err); code != exitError || !strings.Contains(string(said), "process "+strconv.Itoa(first.Process.Pid)+" is writing") {
		t.Errorf("exit code %d, it said\n%s", code, said)
	}
}
