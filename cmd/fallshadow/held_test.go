package main

import (
	"bufio"
	"bytes"
	"io"
	"os"
	"os/exec"
	"os/signal"
	"strings"
	"testing"
	"time"
)

// holdAt names what held waits at.
const holdAt = "FALLSHADOW_TEST_HOLD_AT"

// held is the program on a terminal that holds it up: once it has written a line that begins
// with the text in holdAt it goes on when it is interrupted, or when its input ends.
func held() {
	h := &hold{at: []byte(os.Getenv(holdAt)), interrupt: make(chan os.Signal, 1)}
	signal.Notify(h.interrupt, os.Interrupt)
	os.Exit(run(os.Args[1:], terminal{out: os.Stdout, err: h}))
}

type hold struct {
	at        []byte
	interrupt chan os.Signal
}

func (h *hold) Write(p []byte) (int, error) {
	n, err := os.Stderr.Write(p)
	if !bytes.HasPrefix(p, h.at) {
		return n, err
	}
	end := make(chan struct{})
	go func() {
		io.Copy(io.Discard, os.Stdin)
		close(end)
	}()
	select {
	case <-h.interrupt:
		time.Sleep(200 * time.Millisecond) // the program, which has nothing else to do, hears of it too
	case <-end:
	}
	return n, err
}

// startHeld starts the program and returns when it is held up at a line, with what it says
// from there on.
func startHeld(t *testing.T, at string, args ...string) (*exec.Cmd, *bufio.Reader) {
	t.Helper()
	cmd := exec.Command("held", args...)
	cmd.Env = append(os.Environ(), holdAt+"="+at)
	if _, err := cmd.StdinPipe(); err != nil {
		t.Fatal(err)
	}
	pipe, err := cmd.StderrPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		cmd.Process.Kill()
		cmd.Wait()
	})
	said := bufio.NewReader(pipe)
	for {
		line, err := said.ReadString('\n')
		if err != nil {
			t.Fatalf("it said no line that begins with %q: %v", at, err)
		}
		if strings.HasPrefix(line, at) {
			return cmd, said
		}
	}
}
