//go:build browser

package page_test

import (
	"fmt"
	"path/filepath"
	"slices"
	"testing"
	"time"

	"github.com/chromedp/chromedp"
)

// BenchmarkBrowserLatency is the time from the last byte of a 1024x1024 cube to its numbers,
// and its picture, in the document of a browser; an iteration is a shot.
func BenchmarkBrowserLatency(b *testing.B) {
	dir, shots := largeShots(b)
	n := watchNight(b, dir, "127.0.0.1:0")
	tab := longTab(b)
	do(b, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	eval[bool](b, tab, `window.came = {}, new MutationObserver(() => {
		for (const [what, shot] of Object.entries(document.body.dataset)) window.came[what + shot] ??= Date.now();
	}).observe(document.body, { attributes: true }), true`)
	var numbers, pictures []float64
	measure := func(i int) {
		name := fmt.Sprintf("large_%04d", i)
		last := slowly(b, filepath.Join(dir, name+".fits"), another(shots, i))
		shown(b, tab, name)
		since := func(what string) float64 {
			return eval[float64](b, tab, fmt.Sprintf(`window.came[%q]`, what+name)) - float64(last.UnixMilli())
		}
		numbers, pictures = append(numbers, since("shown")), append(pictures, since("seen"))
		time.Sleep(300 * time.Millisecond) // no machine takes shots faster than that
	}
	const young = 20 // shots until the night has its lights
	for i := range young {
		measure(i)
	}
	numbers, pictures = nil, nil
	b.ResetTimer()
	for i := range b.N {
		measure(young + i)
	}
	b.StopTimer()
	slices.Sort(numbers)
	slices.Sort(pictures)
	b.Logf("numbers, ms: %v", numbers)
	b.ReportMetric(numbers[len(numbers)/2], "ms-median")
	b.ReportMetric(numbers[len(numbers)*95/100], "ms-95%")
	b.ReportMetric(pictures[len(pictures)/2], "ms-picture")
}
