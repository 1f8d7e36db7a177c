package page_test

import (
	"bufio"
	"bytes"
	"context"
	"encoding/binary"
	"fmt"
	"math/rand/v2"
	"net/http"
	"os"
	"path/filepath"
	"runtime"
	"slices"
	"strings"
	"testing"
	"time"

	"fallshadow/cmd/fallshadow/internal/page"
	"fallshadow/cmd/fallshadow/internal/simulate"
	"fallshadow/cmd/fallshadow/internal/watch"
)

// largeScenario makes cubes of 1024x1024 pixels at the settings of a preset.
const largeScenario = `name = "large"
about = "1024x1024 cubes"
seed = 7
shots = 8
[gas]
law = "ideal"
[path]
atoms = [140000, 60000]
atoms_jitter = 0.05
t_reduced = [1.2, 0.4]
[flight]
ms = [24]
[picture]
width_px = 1024
height_px = 1024
x_px = 500
y_px = 520
jitter_px = 2
[camera]
offset_counts = 104
pattern_counts = 1
[probe]
intensity_isat = 0.35
x_px = 500
y_px = 535
waist_px = 1200
power_noise = 0.02
slope_noise_per_px = 2e-5
[fringes]
count = 3
contrast = 0.02
period_px = [12.0, 60.0]
wander_rad = 1.0
jitter_rad = 0.05
`

// largeShots draws a few cubes; the folder holds the settings that read them.
func largeShots(tb testing.TB) (dir string, shots [][]byte) {
	tb.Helper()
	_, lab, err := simulate.Preset("rubidium")
	if err != nil {
		tb.Fatal(err)
	}
	scenario, err := simulate.Parse([]byte(largeScenario), "large")
	if err != nil {
		tb.Fatal(err)
	}
	n, err := simulate.New(scenario, lab, "rubidium")
	if err != nil {
		tb.Fatal(err)
	}
	drawn := filepath.Join(tb.TempDir(), "drawn")
	if err := n.Write(context.Background(), drawn, runtime.NumCPU(), nil); err != nil {
		tb.Fatal(err)
	}
	files, err := filepath.Glob(filepath.Join(drawn, "*.fits"))
	if err != nil {
		tb.Fatal(err)
	}
	for _, f := range files {
		data, err := os.ReadFile(f)
		if err != nil {
			tb.Fatal(err)
		}
		shots = append(shots, data)
	}
	dir = filepath.Join(tb.TempDir(), "night")
	if err := os.MkdirAll(dir, 0o755); err != nil {
		tb.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(dir, "fallshadow.toml"), lab, 0o644); err != nil {
		tb.Fatal(err)
	}
	return dir, shots
}

// another is a shot with pixels of its own.
func another(shots [][]byte, n int) []byte {
	data := bytes.Clone(shots[n%len(shots)])
	for k := range 4 {
		p := data[len(data)-2880-200*k:]
		binary.BigEndian.PutUint16(p, binary.BigEndian.Uint16(p)^uint16(n>>(3*k)&7))
	}
	return data
}

// slowly writes a file in pieces, as a camera program does, and returns when the last byte
// was on its way to the disk.
func slowly(tb testing.TB, file string, data []byte) time.Time {
	tb.Helper()
	out, err := os.Create(file)
	if err != nil {
		tb.Fatal(err)
	}
	defer out.Close()
	for at := 0; at < len(data); at += 1 << 20 {
		if _, err := out.Write(data[at:min(at+1<<20, len(data))]); err != nil {
			tb.Fatal(err)
		}
	}
	return time.Now()
}

// eventsOf sends what an event stream brings.
func eventsOf(tb testing.TB, url string) <-chan string {
	tb.Helper()
	response, err := http.Get(url + "events")
	if err != nil {
		tb.Fatal(err)
	}
	tb.Cleanup(func() { response.Body.Close() })
	found := make(chan string, 100)
	go func() {
		lines := bufio.NewScanner(response.Body)
		lines.Buffer(nil, 1<<20)
		kind := ""
		for lines.Scan() {
			if k, ok := strings.CutPrefix(lines.Text(), "event: "); ok {
				kind = k
			}
			if data, ok := strings.CutPrefix(lines.Text(), "data: "); ok {
				found <- kind + " " + data
			}
		}
	}()
	return found
}

// BenchmarkLatency is the time from the last byte of a 1024x1024 cube to its numbers, and
// its picture, at the browser's end of the stream; an iteration is a shot.
func BenchmarkLatency(b *testing.B) {
	for name, events := range map[string]bool{"events": true, "polling": false} {
		b.Run(name, func(b *testing.B) { benchmarkLatency(b, events) })
	}
}

func benchmarkLatency(b *testing.B, events bool) {
	const poll = 2 * time.Second
	random := rand.New(rand.NewPCG(1, 2))
	dir, shots := largeShots(b)
	p := page.New("night")
	w, err := watch.New(watch.Options{Dir: dir, Out: filepath.Join(b.TempDir(), "r"), NoEvents: !events, Poll: poll}, p)
	if err != nil {
		b.Fatal(err)
	}
	p.Show(w)
	l, url, err := p.Listen("127.0.0.1:0", "")
	if err != nil {
		b.Fatal(err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	ended := make(chan error, 2)
	go func() { ended <- w.Run(ctx) }()
	go func() { ended <- p.Serve(ctx, l) }()
	defer func() { cancel(); <-ended; <-ended }()
	found := eventsOf(b, url)
	until := func(start string) time.Time {
		for {
			select {
			case e := <-found:
				if strings.HasPrefix(e, start) {
					return time.Now()
				}
			case <-time.After(30 * time.Second):
				b.Fatal("no " + start)
			}
		}
	}
	var numbers, pictures []time.Duration
	measure := func(n int) {
		last := slowly(b, filepath.Join(dir, fmt.Sprintf("large_%04d.fits", n)), another(shots, n))
		numbers = append(numbers, until("row").Sub(last))
		pictures = append(pictures, until("picture").Sub(last))
		rest := 300 * time.Millisecond // no machine takes shots faster than that
		if !events {
			rest += time.Duration(random.Int64N(int64(poll))) // else all would come at the same time after a poll
		}
		time.Sleep(rest)
	}
	const young = 20 // shots until the night has its lights
	for n := range young {
		measure(n)
	}
	b.Logf("the first: %v", rounded(numbers))
	numbers, pictures = nil, nil
	b.ResetTimer()
	for n := range b.N {
		measure(young + n)
	}
	b.StopTimer()
	slices.Sort(numbers)
	slices.Sort(pictures)
	b.Logf("numbers: %v", rounded(numbers))
	ms := func(d []time.Duration, part float64) float64 {
		return float64(d[int(part*float64(len(d)-1)+0.5)].Microseconds()) / 1e3
	}
	b.ReportMetric(ms(numbers, 0.5), "ms-median")
	b.ReportMetric(ms(numbers, 0.95), "ms-95%")
	b.ReportMetric(ms(pictures, 0.5), "ms-picture")
}

func rounded(list []time.Duration) (out []time.Duration) {
	for _, d := range list {
		out = append(out, d.Round(time.Millisecond))
	}
	return out
}
