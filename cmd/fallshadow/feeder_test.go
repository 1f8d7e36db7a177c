package main

import (
	"bytes"
	"context"
	"encoding/binary"
	"fmt"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/imageio"
)

const feederScenario = `name = "feed"
about = "small frames for a fast feeder"
seed = 5
shots = 12
[gas]
law = "ideal"
[path]
atoms = [140000, 60000]
t_reduced = [1.2, 0.4]
[flight]
ms = [24]
[picture]
width_px = 72
height_px = 64
x_px = 35
y_px = 31
jitter_px = 1
[camera]
offset_counts = 104
[probe]
intensity_isat = 0.35
x_px = 35
y_px = 31
waist_px = 300
power_noise = 0.02
`

const feederSettings = `[atom]
species = "87Rb"
[trap]
axis1_hz = 60.0
axis2_hz = 120.0
sight_hz = 120.0
[camera]
pixel_um = 12.9
magnification = 1.0
electrons_per_count = 1.0
read_noise_electrons = 6.0
[probe]
alpha = 2.0
counts_per_isat = 9000.0
[flight]
from = "TOF"
`

// fed is how many shots a feeder writes: FALLSHADOW_FEED, or 30.
func fed(t *testing.T) int {
	t.Helper()
	text := os.Getenv("FALLSHADOW_FEED")
	if text == "" {
		return 30
	}
	n, err := strconv.Atoi(text)
	if err != nil || n < 1 {
		t.Fatalf("FALLSHADOW_FEED=%q is no number of shots", text)
	}
	return n
}

// smallShots simulates a dozen small cubes, with the settings that read them.
func smallShots(t *testing.T) (shots [][]byte, settings string) {
	t.Helper()
	dir := t.TempDir()
	scenario, lab, night := filepath.Join(dir, "s.toml"), filepath.Join(dir, "lab.toml"), filepath.Join(dir, "night")
	for file, text := range map[string]string{scenario: feederScenario, lab: feederSettings} {
		if err := os.WriteFile(file, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	if _, code := program(t, "simulate", night, "--scenario", scenario, "--settings", lab); code != 0 {
		t.Fatalf("simulate ended with %d", code)
	}
	files, err := filepath.Glob(filepath.Join(night, "*.fits"))
	if err != nil || len(files) != 12 {
		t.Fatalf("%v, %v", files, err)
	}
	for _, f := range files {
		data, err := os.ReadFile(f)
		if err != nil {
			t.Fatal(err)
		}
		shots = append(shots, data)
	}
	return shots, lab
}

// variant is a shot of its own: a few counts in a corner tell it from all others.
func variant(shots [][]byte, n int) []byte {
	data := bytes.Clone(shots[n%len(shots)])
	at := len(data) - 2880*((72*64*2*3+2879)/2880) // where the pixels begin
	for k := range 4 {
		p := data[at+2*k:]
		binary.BigEndian.PutUint16(p, binary.BigEndian.Uint16(p)+uint16(n>>(4*k)&15))
	}
	return data
}

// feeder writes shots as camera programs and people do.
type feeder struct {
	dir    string
	shots  [][]byte
	random *rand.Rand
}

// write puts shot n into the folder under a name, by one of several ways.
func (f *feeder) write(n int, name string) error {
	file, data := filepath.Join(f.dir, name+".fits"), variant(f.shots, n)
	switch way := f.random.IntN(6); way {
	case 0:
		return os.WriteFile(file, data, 0o644)
	case 1, 2: // in pieces, made in its final size or not
		return f.pieces(file, data, way == 2)
	case 3: // under a name that is not to be read
		if err := f.pieces(file+".part", data, false); err != nil {
			return err
		}
		return os.Rename(file+".part", file)
	case 4: // under a name that may be read, and renamed at once
		other := filepath.Join(f.dir, fmt.Sprintf("incoming_%d.fits", n))
		if err := os.WriteFile(other, data, 0o644); err != nil {
			return err
		}
		return os.Rename(other, file)
	}
	// renamed by a person once it was seen
	other := filepath.Join(f.dir, fmt.Sprintf("wrong_%d.fits", n))
	if err := f.pieces(other, data, false); err != nil {
		return err
	}
	time.Sleep(time.Duration(f.random.IntN(600)) * time.Millisecond)
	return os.Rename(other, file)
}

func (f *feeder) pieces(file string, data []byte, whole bool) error {
	out, err := os.Create(file)
	if err != nil {
		return err
	}
	defer out.Close()
	if whole {
		if err := out.Truncate(int64(len(data))); err != nil {
			return err
		}
	}
	for at := 0; at < len(data); {
		n := min(len(data)-at, 1+f.random.IntN(9000))
		if _, err := out.WriteAt(data[at:at+n], int64(at)); err != nil {
			return err
		}
		at += n
		time.Sleep(time.Duration(f.random.IntN(12)) * time.Millisecond)
	}
	return nil
}

// startWatch starts the program beside the feeder.
func startWatch(t *testing.T, dir, out, settings string) *exec.Cmd {
	t.Helper()
	cmd := exec.Command("fallshadow", "watch", dir, "--out", out, "--settings", settings, "--no-page", "--poll", "500ms")
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	return cmd
}

func ledgerRows(out string) []ledger.Row {
	l, err := ledger.OpenReader(context.Background(), out)
	if err != nil {
		return nil
	}
	defer l.Close()
	rows, err := l.Rows(context.Background())
	if err != nil {
		return nil
	}
	return rows
}

// Shots that are written slowly, in pieces, out of order, with renames, while the watch is
// killed again and again: each stands in the ledger once, with its own pixels.
func TestWatchLosesNothing(t *testing.T) {
	n := fed(t)
	shots, settings := smallShots(t)
	dir, out := filepath.Join(t.TempDir(), "night"), filepath.Join(t.TempDir(), "r")
	if err := os.MkdirAll(dir, 0o755); err != nil {
		t.Fatal(err)
	}
	seed := uint64(time.Now().UnixNano())
	t.Logf("seed %d", seed)
	order := make([]int, n)
	for i := range order {
		order[i] = i
	}
	random := rand.New(rand.NewPCG(seed, 0))
	for i := range order { // out of order, but not by far
		j := min(n-1, i+random.IntN(8))
		order[i], order[j] = order[j], order[i]
	}
	var writers sync.WaitGroup
	next := make(chan int)
	for k := range 3 {
		f := &feeder{dir, shots, rand.New(rand.NewPCG(seed, uint64(k+1)))}
		writers.Go(func() {
			for i := range next {
				if err := f.write(i, fmt.Sprintf("feed_%05d", i)); err != nil {
					t.Error(err)
				}
			}
		})
	}
	cmd := startWatch(t, dir, out, settings)
	kill := func() {
		cmd.Process.Kill()
		cmd.Wait()
	}
	defer func() { kill() }()
	deaths := 0
	for i, shot := range order {
		next <- shot
		if i%max(5, n/20) == max(5, n/20)-1 {
			kill()
			deaths++
			cmd = startWatch(t, dir, out, settings)
		}
	}
	close(next)
	writers.Wait()
	var rows []ledger.Row
	for end := time.Now().Add(4*time.Minute + time.Duration(n)*time.Second); time.Now().Before(end); time.Sleep(500 * time.Millisecond) {
		rows = ledgerRows(out)
		if len(rows) == n && allRight(t, rows, shots, false) {
			break
		}
	}
	t.Logf("%d rows after %d kills", len(rows), deaths)
	if len(rows) != n {
		var others []string
		for _, r := range rows {
			if !strings.HasPrefix(r.Shot, "feed_") {
				others = append(others, r.Shot)
			}
		}
		t.Fatalf("%d rows of %d shots, of other names: %v", len(rows), n, others)
	}
	allRight(t, rows, shots, true)
}

// allRight reports whether every row is that of its shot.
func allRight(t *testing.T, rows []ledger.Row, shots [][]byte, say bool) bool {
	t.Helper()
	right := true
	wrong := func(format string, args ...any) {
		if right = false; say {
			t.Errorf(format, args...)
		}
	}
	var names []string
	for i, r := range rows {
		names = append(names, r.Shot)
		if want := fmt.Sprintf("feed_%05d", i); r.Shot != want {
			wrong("row %d is of %s, want %s", i, r.Shot, want)
			continue
		}
		if r.Content != digestOf(t, variant(shots, i)) {
			wrong("%s has other pixels", r.Shot)
		}
		if r.Reason != "" {
			wrong("%s failed: %s", r.Shot, r.Reason)
		}
		if !r.Provisional || r.Number("atoms") < 1e4 {
			wrong("%s: provisional %v, N %g", r.Shot, r.Provisional, r.Number("atoms"))
		}
	}
	slices.Sort(names)
	if len(slices.Compact(names)) != len(rows) {
		wrong("a shot stands twice")
	}
	return right
}

var digests sync.Map

// digestOf is the content of a file of a shot.
func digestOf(t *testing.T, data []byte) ledger.Digest {
	t.Helper()
	key := string(data[len(data)-2880*10:])
	if d, ok := digests.Load(key); ok {
		return d.(ledger.Digest)
	}
	dir := t.TempDir()
	if err := os.WriteFile(filepath.Join(dir, "x.fits"), data, 0o644); err != nil {
		t.Fatal(err)
	}
	raw, err := imageio.Read(context.Background(), dir, imageio.Shot{Name: "x", Files: []imageio.ShotFile{{Path: "x.fits", Role: imageio.Unused}}}, imageio.Layout{})
	if err != nil {
		t.Fatal(err)
	}
	digests.Store(key, ledger.Digest(raw.Digest))
	return raw.Digest
}
