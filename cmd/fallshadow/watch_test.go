package main

import (
	"bufio"
	"bytes"
	"encoding/json"
	"io"
	"net"
	"net/http"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/page"
	"fallshadow/cmd/fallshadow/internal/report"
)

// A watch prints a line of JSON a shot, serves its page, keeps other writers away, and
// ends with an interrupt in an orderly way; a batch then makes its rows final.
func TestWatchCommand(t *testing.T) {
	if runtime.GOOS == "windows" {
		t.Skip("this system sends no interrupts")
	}
	night, results := smallNight(t, 2), filepath.Join(t.TempDir(), "r")
	cmd := exec.Command("fallshadow", "watch", night, "--out", results, "--json", "--page", "127.0.0.1:0")
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	errs, err := cmd.StderrPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	defer cmd.Process.Kill()
	said := bufio.NewReader(errs)
	first, err := said.ReadString('\n')
	if err != nil {
		t.Fatal(err)
	}
	url, ok := strings.CutPrefix(strings.TrimSpace(first), "page: ")
	if !ok {
		t.Fatalf("it said %q", first)
	}
	seen := map[string]bool{}
	lines := bufio.NewScanner(out)
	lines.Buffer(nil, 1<<20)
	for range 2 {
		lines.Scan()
		var row struct {
			Shot  string
			Flags []string
			Atoms float64
		}
		if err := json.Unmarshal(lines.Bytes(), &row); err != nil || row.Atoms < 1e4 || len(row.Flags) == 0 {
			t.Fatalf("line %q: %v", lines.Text(), err)
		}
		seen[row.Shot] = true
	}
	if !seen["ramp_0001"] || !seen["ramp_0002"] {
		t.Errorf("shots %v", seen)
	}
	response, err := http.Get(url + "api/night")
	if err != nil {
		t.Fatal(err)
	}
	body, err := io.ReadAll(response.Body)
	response.Body.Close()
	if err != nil || !strings.Contains(string(body), `"ramp_0002"`) {
		t.Errorf("%s, %v", body, err)
	}
	if _, code := program(t, "batch", night, "--out", results); code != exitError {
		t.Errorf("a batch beside the watch ended with %d", code)
	}
	for _, address := range []string{"127.0.0.1:0", strings.TrimSuffix(strings.TrimPrefix(url, "http://"), "/")} {
		second, _ := exec.Command("fallshadow", "watch", night, "--out", results, "--page", address).CombinedOutput()
		if !strings.Contains(string(second), "is writing the ledger") || strings.Contains(string(second), "page") {
			t.Errorf("a second watch at %s said %q", address, second)
		}
	}
	if err := cmd.Process.Signal(os.Interrupt); err != nil {
		t.Fatal(err)
	}
	if rest, err := io.ReadAll(said); err != nil || len(rest) > 0 {
		t.Errorf("it said %q, %v", rest, err)
	}
	if err := cmd.Wait(); err != nil {
		t.Errorf("it ended with %v", err)
	}
	if table := tableOf(t, results); strings.Count(table, report.FlagProvisional) != 2 {
		t.Errorf("the table is\n%s", table)
	}
	if _, code := program(t, "batch", night, "--out", results); code != exitOK {
		t.Errorf("the batch afterwards ended with %d", code)
	}
	if table := tableOf(t, results); strings.Contains(table, report.FlagProvisional) {
		t.Errorf("the table is\n%s", table)
	}
}

// Where the page's port is in use it is said what to do: one that somebody named is refused,
// ours gives way to a free one.
func TestPortInUse(t *testing.T) {
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer l.Close()
	out, err := exec.Command("fallshadow", "watch", smallNight(t, 1), "--out", filepath.Join(t.TempDir(), "r"), "--page", l.Addr().String()).CombinedOutput()
	if exitCode(err) != exitError || !strings.HasSuffix(string(out), ": choose another address with --page HOST:PORT\n") || strings.Contains(string(out), "page: ") {
		t.Errorf("it ended with %v and said %q", err, out)
	}
	if ours, err := net.Listen("tcp", ownAddress); err == nil { // else somebody has it already
		defer ours.Close()
	}
	var said bytes.Buffer
	free, err := (&watchCmd{}).listen(terminal{err: &said}, page.New("night"))
	if err != nil {
		t.Fatal(err)
	}
	defer free.Close()
	if got := said.String(); !strings.HasPrefix(got, "page: http://"+free.Addr().String()) || !strings.Contains(got, ownAddress+" is in use") || !strings.Contains(got, "--page HOST:PORT") {
		t.Errorf("said %q", got)
	}
}

// What cannot be watched is said, with the right exit code.
func TestWatchCommandRefuses(t *testing.T) {
	night := smallNight(t, 1)
	file := filepath.Join(night, "truth.csv")
	wrong := filepath.Join(t.TempDir(), "wrong.toml")
	if err := os.WriteFile(wrong, []byte("[trap]\naxis1_hz = 1"), 0o644); err != nil {
		t.Fatal(err)
	}
	for _, test := range []struct {
		code int
		args []string
	}{
		{exitError, []string{"watch", file, "--no-page"}},
		{exitUsage, []string{"watch", night, "--no-page", "--settings", wrong}},
		{exitError, []string{"watch", night, "--no-page", "--settings", "nowhere.toml"}},
		{exitError, []string{"watch", night, "--page", "nonsense"}},
		{exitUsage, []string{"watch"}},
	} {
		if _, code := program(t, append(test.args, "--out", filepath.Join(t.TempDir(), "r"))...); code != test.code {
			t.Errorf("%v ended with %d, want %d", test.args, code, test.code)
		}
	}
}
