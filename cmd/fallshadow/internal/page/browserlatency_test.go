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

// The time from the last byte of a 1024x1024 cube to its numbers, and its picture, in the
// document of a browser. It is told, not judged: machines differ.
func TestBrowserLatency(t *testing.T) {
	if testing.Short() {
		t.Skip("it draws large frames")
	}
	dir, shots := largeShots(t)
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	eval[bool](t, tab, `window.came = {}, new MutationObserver(() => {
		for (const [what, shot] of Object.entries(document.body.dataset)) window.came[what + shot] ??= Date.now();
	}).observe(document.body, { attributes: true }), true`)
	var numbers, pictures []int
	const young, old = 20, 20
	for i := range young + old {
		name := fmt.Sprintf("large_%04d", i)
		last := slowly(t, filepath.Join(dir, name+".fits"), another(shots, i))
		shown(t, tab, name)
		if i < young {
			continue
		}
		since := func(what string) int {
			return int(eval[float64](t, tab, fmt.Sprintf(`window.came[%q]`, what+name)) - float64(last.UnixMilli()))
		}
		numbers, pictures = append(numbers, since("shown")), append(pictures, since("seen"))
		time.Sleep(300 * time.Millisecond)
	}
	slices.Sort(numbers)
	slices.Sort(pictures)
	t.Logf("numbers after %d ms in the median, %d ms in 95 of 100; pictures after %d ms", numbers[old/2], numbers[old*95/100], pictures[old/2])
	t.Logf("numbers: %v", numbers)
}
