package main

import (
	"errors"
	"os"
	"os/exec"
	"strconv"
	"testing"

	"github.com/rogpeppe/go-internal/testscript"
)

// TestMain makes this test binary the program wherever a test runs "fallshadow" or "held".
func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){"fallshadow": main, "held": held})
}

func TestScripts(t *testing.T) {
	testscript.Run(t, testscript.Params{
		Dir:                 "testdata/script",
		RequireExplicitExec: true,
		RequireUniqueNames:  true,
		Cmds:                map[string]func(*testscript.TestScript, bool, []string){"exits": exits},
	})
}

// exits runs a program and checks its exit code: exits 3 fallshadow batch night.
func exits(ts *testscript.TestScript, _ bool, args []string) {
	want, err := strconv.Atoi(args[0])
	ts.Check(err)
	if got := exitCode(ts.Exec(args[1], args[2:]...)); got != want {
		ts.Fatalf("exit code %d, want %d", got, want)
	}
}

// exitCode returns the code of a program that ended with err, -1 where it did not end by
// itself.
func exitCode(err error) int {
	var exit *exec.ExitError
	switch {
	case err == nil:
		return 0
	case errors.As(err, &exit):
		return exit.ExitCode()
	}
	return -1
}

// program runs the program to its end and returns what it printed and its exit code.
func program(t *testing.T, args ...string) (stdout string, code int) {
	t.Helper()
	cmd := exec.Command("fallshadow", args...)
	cmd.Stderr = os.Stderr
	if !testing.Verbose() {
		cmd.Stderr = nil
	}
	out, err := cmd.Output()
	return string(out), exitCode(err)
}
