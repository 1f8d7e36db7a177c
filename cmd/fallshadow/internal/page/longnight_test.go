//go:build browser

package page_test

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/chromedp/chromedp"
)

// A long night in fast motion, with a page open: FALLSHADOW_LONG_NIGHT is how many shots.
// After the first fifth memory stays within a tenth and the number of open files as it is.
func TestBrowserLongNight(t *testing.T) {
	shots, err := strconv.Atoi(os.Getenv("FALLSHADOW_LONG_NIGHT"))
	if err != nil {
		t.Skip("FALLSHADOW_LONG_NIGHT is not set")
	}
	program := filepath.Join(t.TempDir(), "fallshadow")
	if out, err := exec.Command("go", "build", "-o", program, "fallshadow/cmd/fallshadow").CombinedOutput(); err != nil {
		t.Fatalf("%v: %s", err, out)
	}
	dir := newNight(t)
	cmd := exec.Command(program, "watch", dir, "--out", filepath.Join(t.TempDir(), "r"), "--page", "127.0.0.1:0")
	var said lastWords
	cmd.Stderr = &said
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	ended := make(chan error, 1)
	go func() { ended <- cmd.Wait() }()
	defer func() {
		cmd.Process.Kill()
		if err := <-ended; t.Failed() {
			t.Logf("it ended with %v and said %q", err, said.String())
		}
	}()
	url := ""
	for url == "" {
		time.Sleep(10 * time.Millisecond)
		if _, rest, ok := strings.Cut(said.String(), "page: "); ok && strings.Contains(rest, "\n") {
			url = strings.TrimSpace(rest)
		}
	}
	tab := longTab(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(url))
	var base [][]byte
	for n := 1; n <= 9; n++ {
		data, err := os.ReadFile(filepath.Join(demoNight, fmt.Sprintf("ramp_%04d.fits", n)))
		if err != nil {
			t.Fatal(err)
		}
		base = append(base, data)
	}
	var memory, files, heap []float64
	for n := range shots {
		data := bytes.Clone(base[n%len(base)])
		for k := range 4 {
			p := data[len(data)-2880-2*k:]
			binary.BigEndian.PutUint16(p, binary.BigEndian.Uint16(p)^uint16(n>>(3*k)&7))
		}
		if err := os.WriteFile(filepath.Join(dir, fmt.Sprintf("long_%05d.fits", n)), data, 0o644); err != nil {
			t.Fatal(err)
		}
		if n%20 == 19 { // what comes faster than it is fitted is another test's
			until(t, tab, "the shots so far", fmt.Sprintf(countIs, n+1))
		}
		if (n+1)%max(1, shots/10) == 0 {
			memory = append(memory, usual(t, cmd.Process.Pid))
			files = append(files, openFiles(t, cmd.Process.Pid))
			heap = append(heap, eval[float64](t, tab, `(window.gc?.(), performance.memory.usedJSHeapSize)`)/1e6)
			t.Logf("%d shots: %.0f MB, %.0f open files, page %.1f MB", n+1, memory[len(memory)-1], files[len(files)-1], heap[len(heap)-1])
		}
	}
	screenshot(t, tab, "long-night")
	settled := len(memory) / 5
	for i := settled; i < len(memory); i++ {
		if !(memory[i] <= 1.1*memory[settled]) {
			t.Errorf("memory grew from %.0f to %.0f MB", memory[settled], memory[i])
		}
		if files[i] > files[settled]+2 {
			t.Errorf("open files grew from %.0f to %.0f", files[settled], files[i])
		}
		if !(heap[i] <= 30) {
			t.Errorf("the page holds %.0f MB", heap[i])
		}
	}
}

// lastWords is what a program said.
type lastWords struct {
	mu sync.Mutex
	b  bytes.Buffer
}

func (l *lastWords) Write(p []byte) (int, error) {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.Write(p)
}

func (l *lastWords) String() string {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.String()
}

// usual is the median of the memory over a few seconds, in which the collector of garbage
// lets it rise and fall.
func usual(t *testing.T, pid int) float64 {
	t.Helper()
	var list []float64
	for range 21 {
		time.Sleep(150 * time.Millisecond)
		list = append(list, resident(t, pid))
	}
	slices.Sort(list)
	return list[len(list)/2]
}

// resident is the memory of a process, MB (proc_pid_status(5)).
func resident(t *testing.T, pid int) float64 {
	t.Helper()
	text, err := os.ReadFile(fmt.Sprintf("/proc/%d/status", pid))
	if err != nil {
		t.Skip("this system does not tell: ", err)
	}
	for line := range strings.Lines(string(text)) {
		if f := strings.Fields(line); len(f) > 1 && f[0] == "VmRSS:" {
			kb, _ := strconv.ParseFloat(f[1], 64)
			return kb / 1e3
		}
	}
	t.Fatal("no VmRSS")
	return 0
}

func openFiles(t *testing.T, pid int) float64 {
	t.Helper()
	list, err := os.ReadDir(fmt.Sprintf("/proc/%d/fd", pid))
	if err != nil {
		t.Fatal(err)
	}
	return float64(len(list))
}
