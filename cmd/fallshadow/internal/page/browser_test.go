//go:build browser

package page_test

import (
	"bytes"
	"context"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/chromedp/cdproto/input"
	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/page"
	"fallshadow/cmd/fallshadow/internal/watch"
)

// The page in a real browser. FALLSHADOW_SCREENS names a folder for screenshots.

const demoNight = "../../../../testdata/night"

// browser starts a Chromium of its own; a tab is made of what it returns.
func browser(t testing.TB) context.Context { return tabFor(t, 6*time.Minute) }

// longTab is a tab for a long test.
func longTab(t testing.TB) context.Context { return tabFor(t, time.Hour) }

func tabFor(t testing.TB, limit time.Duration) context.Context {
	t.Helper()
	options := append(slices.Clone(chromedp.DefaultExecAllocatorOptions[:]),
		chromedp.WSURLReadTimeout(limit), chromedp.NoSandbox, chromedp.DisableGPU, chromedp.NoFirstRun, chromedp.UserDataDir(t.TempDir()),
		chromedp.Flag("disable-quic", true), chromedp.Flag("disable-background-networking", true),
		chromedp.Flag("disable-component-update", true), chromedp.Flag("disable-sync", true),
		chromedp.Flag("enable-precise-memory-info", true), chromedp.Flag("js-flags", "--expose-gc"))
	all, cancel := chromedp.NewExecAllocator(context.Background(), options...)
	t.Cleanup(cancel)
	tab, cancel := chromedp.NewContext(all)
	t.Cleanup(cancel)
	tab, cancel = context.WithTimeout(tab, limit)
	t.Cleanup(cancel)
	return tab
}

// do takes steps in the tab.
func do(t testing.TB, tab context.Context, steps ...chromedp.Action[chromedp.Void]) {
	t.Helper()
	if err := chromedp.Do(tab, steps...); err != nil {
		t.Fatal(err)
	}
}

// eval returns the value of a script.
func eval[T any](t testing.TB, tab context.Context, script string) (v T) {
	t.Helper()
	v, err := chromedp.Run(tab, chromedp.Evaluate[T](script))
	if err != nil {
		t.Fatalf("%s: %v", script, err)
	}
	return v
}

// patience is how long a page may take for what is looked for.
const patience = time.Minute

// until waits until a script is true.
func until(t testing.TB, tab context.Context, what, script string) {
	t.Helper()
	for end := time.Now().Add(patience); time.Now().Before(end); time.Sleep(50 * time.Millisecond) {
		if eval[bool](t, tab, "!!("+script+")") {
			return
		}
	}
	screenshot(t, tab, "failed")
	t.Fatalf("waited in vain for: %s; the page says %q", what, eval[string](t, tab, "document.body.innerText.slice(0, 600)"))
}

// trendBox is where points of the trend are, in CSS px: left, top, width and height.
const trendBox = `(() => { const b = document.querySelector('#trend-plot .u-over').getBoundingClientRect(); return [b.x, b.y, b.width, b.height]; })()`

// inTrend returns the place at a part of the trend's width, half-way up.
func inTrend(t *testing.T, tab context.Context, part float64) (x, y float64) {
	t.Helper()
	box := eval[[]float64](t, tab, trendBox)
	return box[0] + part*box[2], box[1] + box[3]/2
}

// hover moves the mouse to and fro at a part of the trend's width, which may be drawn anew
// meanwhile, until it reads what a script tests as r; it returns where the mouse is.
func hover(t *testing.T, tab context.Context, part float64, what, script string) (x, y float64) {
	t.Helper()
	for end, k := time.Now().Add(patience), 0.0; time.Now().Before(end); k = 1 - k {
		x, y = inTrend(t, tab, part)
		y += k
		do(t, tab, chromedp.MouseEvent(input.DispatchMouseEventTypeMouseMoved, x, y))
		if eval[bool](t, tab, `(() => { const r = document.querySelector('#trend-read').textContent; return !!(`+script+`); })()`) {
			return x, y
		}
		time.Sleep(50 * time.Millisecond)
	}
	t.Fatalf("the trend does not read %s but %q", what, eval[string](t, tab, `document.querySelector('#trend-read').textContent`))
	return 0, 0
}

// screenshot keeps what the window shows, if anybody wants it.
func screenshot(t testing.TB, tab context.Context, name string) {
	t.Helper()
	dir := os.Getenv("FALLSHADOW_SCREENS")
	if dir == "" {
		return
	}
	do(t, tab, chromedp.Sleep(300*time.Millisecond))
	png, err := chromedp.Run(tab, chromedp.CaptureScreenshot())
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(dir, name+".png"), png, 0o644); err != nil {
		t.Fatal(err)
	}
}

// watched is a night that is watched and shown.
type watched struct {
	url   string
	page  *page.Page
	watch *watch.Watcher
	stop  func()
}

// watchNight watches a night and shows it at an address.
func watchNight(t testing.TB, dir, address string) *watched {
	t.Helper()
	p := page.New(filepath.Base(dir))
	w, err := watch.New(watch.Options{Dir: dir, Out: filepath.Join(filepath.Dir(dir), "results"), Poll: 500 * time.Millisecond}, p)
	if err != nil {
		t.Fatal(err)
	}
	p.Show(w)
	l, url, err := p.Listen(address, "")
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	ended := make(chan error, 2)
	go func() { ended <- w.Run(ctx) }()
	go func() { ended <- p.Serve(ctx, l) }()
	stop := sync.OnceFunc(func() {
		cancel()
		for range 2 {
			if err := <-ended; err != nil {
				t.Errorf("watch and page: %v", err)
			}
		}
	})
	t.Cleanup(stop)
	return &watched{url, p, w, stop}
}

// newNight makes a night with the settings of the demo and some of its shots under their
// own names.
func newNight(t *testing.T, shots ...int) string {
	t.Helper()
	dir := filepath.Join(t.TempDir(), "night")
	addFile(t, filepath.Join(demoNight, "fallshadow.toml"), filepath.Join(dir, "fallshadow.toml"))
	for _, n := range shots {
		addShot(t, dir, n, fmt.Sprintf("ramp_%04d", n))
	}
	return dir
}

func addShot(t *testing.T, dir string, n int, name string) {
	t.Helper()
	addFile(t, filepath.Join(demoNight, fmt.Sprintf("ramp_%04d.fits", n)), filepath.Join(dir, name+".fits"))
}

func addFile(t *testing.T, from, to string) {
	t.Helper()
	data, err := os.ReadFile(from)
	if err != nil {
		t.Fatal(err)
	}
	saveFile(t, to, data)
}

// saveFile puts a file in its place whole, however long this machine pauses.
func saveFile(t *testing.T, to string, data []byte) {
	t.Helper()
	whole := filepath.Join(t.TempDir(), "whole")
	err := os.WriteFile(whole, data, 0o644)
	if err == nil {
		err = os.MkdirAll(filepath.Dir(to), 0o755)
	}
	if err == nil {
		err = os.Rename(whole, to)
	}
	if err != nil {
		t.Fatal(err)
	}
}

const (
	shownIs  = `document.body.dataset.shown === %q && document.querySelector('#shot').textContent === %q`
	seenIs   = `document.body.dataset.seen === %q && document.querySelector('#density image')?.dataset.shot === %q`
	countIs  = `document.querySelector('#count').textContent === '%d'`
	isLive   = `document.querySelector('#status').className === ''`
	fontSize = `parseFloat(getComputedStyle(document.querySelector('.card[data-name=atoms] .value')).fontSize)`
)

func shown(t testing.TB, tab context.Context, shot string) {
	t.Helper()
	until(t, tab, "numbers of "+shot, fmt.Sprintf(shownIs, shot, shot))
	until(t, tab, "picture of "+shot, fmt.Sprintf(seenIs, shot, shot))
}

// The page loads, a shot that arrives is shown without a reload, arrow keys go through the
// older ones and End follows again.
func TestBrowserFollowsShots(t *testing.T) {
	dir := newNight(t, 1, 2, 3)
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	until(t, tab, "three shots", fmt.Sprintf(countIs, 3))
	shown(t, tab, "ramp_0003")
	eval[bool](t, tab, `window.sameLoad = true`)
	addShot(t, dir, 6, "ramp_0006")
	shown(t, tab, "ramp_0006")
	if !eval[bool](t, tab, `window.sameLoad === true`) {
		t.Error("the page was loaded again")
	}
	if got := eval[string](t, tab, `document.querySelector('.card[data-name=fraction] .value').textContent`); !strings.HasPrefix(got, "0.7") && !strings.HasPrefix(got, "0.69") {
		t.Errorf("the fraction reads %q", got)
	}
	for _, part := range []string{"thermal", "condensate"} {
		if n := eval[int](t, tab, `document.querySelectorAll('#density path.`+part+`').length`); n != 1 {
			t.Errorf("%d outlines of the %s", n, part)
		}
	}
	screenshot(t, tab, "desk-light")
	do(t, tab, chromedp.KeyEvent(kb.ArrowLeft))
	shown(t, tab, "ramp_0003")
	addShot(t, dir, 7, "ramp_0007")
	until(t, tab, "the fifth shot in the list", fmt.Sprintf(countIs, 5))
	time.Sleep(300 * time.Millisecond)
	shown(t, tab, "ramp_0003") // a person who looks at an older shot is left alone
	do(t, tab, chromedp.KeyEvent(kb.ArrowRight))
	shown(t, tab, "ramp_0006")
	do(t, tab, chromedp.KeyEvent(kb.End))
	shown(t, tab, "ramp_0007")
	addShot(t, dir, 8, "ramp_0008")
	shown(t, tab, "ramp_0008")
	do(t, tab, chromedp.Navigate(n.url))
	shown(t, tab, "ramp_0008")
	until(t, tab, "the connection", isLive)
	late, err := n.watch.Row(context.Background(), "ramp_0001")
	if err != nil {
		t.Fatal(err)
	}
	n.page.Row(late)
	time.Sleep(300 * time.Millisecond)
	shown(t, tab, "ramp_0008") // word of a shot that came earlier changes nothing
}

// The screens that were looked at: a desk in light and dark, a phone, a tablet, and the
// large numbers for those who stand two metres away. A name may be long.
func TestBrowserScreens(t *testing.T) {
	dir := newNight(t)
	addShot(t, dir, 1, "ramp_0000_"+strings.Repeat("long", 20))
	for n := 1; n <= 9; n++ {
		addShot(t, dir, n, fmt.Sprintf("ramp_%04d", n))
	}
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	for _, s := range []struct {
		name          string
		width, height int64
		theme, shot   string
		large         float64 // least size of the numbers that matter
	}{
		{"desk-light", 1440, 900, "light", "ramp_0005", 28}, {"desk-dark", 1440, 900, "dark", "ramp_0009", 28},
		{"phone-dark", 390, 844, "dark", "ramp_0006", 28}, {"phone-light", 390, 844, "light", "ramp_0002", 28},
		{"tablet-dark", 820, 1180, "dark", "ramp_0004", 28},
		{"far-dark", 1440, 900, "dark", "ramp_0009", 80}, {"far-light", 1440, 900, "light", "ramp_0002", 80},
		{"far-phone", 390, 844, "light", "ramp_0008", 55},
	} {
		do(t, tab, chromedp.EmulateViewport(s.width, s.height), chromedp.Navigate(n.url))
		until(t, tab, "ten shots", fmt.Sprintf(countIs, 10))
		if far := eval[bool](t, tab, `document.body.classList.contains('far')`); far != (s.large > 50) {
			do(t, tab, chromedp.KeyEvent("l"))
		}
		eval[bool](t, tab, fmt.Sprintf(`localStorage.setItem('theme', %q); document.documentElement.dataset.theme === %q || document.querySelector('#theme').click(); true`, s.theme, s.theme))
		for shown := "ramp_0009"; shown > s.shot; shown = fmt.Sprintf("ramp_%04d", int(shown[8]-'0')-1) {
			do(t, tab, chromedp.KeyEvent(kb.ArrowLeft))
		}
		shown(t, tab, s.shot)
		screenshot(t, tab, s.name)
		readable(t, tab, s.name)
		if wide := eval[bool](t, tab, `document.documentElement.scrollWidth > innerWidth`); wide {
			t.Errorf("%s: the page is wider than the window", s.name)
		}
		if size := eval[float64](t, tab, fontSize); !(size >= s.large) {
			t.Errorf("%s: the atom number is %g px high, want %g", s.name, size, s.large)
		}
	}
	testFaint(t, tab)
}

// shotName is hostile to whoever takes it for markup, a path or a parameter.
const shotName = `ramp_0010 <img src=x onerror=window.hacked=1>&"'%2e%2e`

// Names from files are shown as text and are no way out.
func TestBrowserHostileNames(t *testing.T) {
	dir := newNight(t, 1)
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	addShot(t, dir, 5, shotName)
	shown(t, tab, shotName)
	until(t, tab, "it in the list", `document.querySelector('.item .name').textContent.startsWith('ramp_0010 <img')`)
	do(t, tab, chromedp.Click("#mark"), chromedp.SendKeys("#bad-word", `<script>window.hacked=2</script>`), chromedp.KeyEvent(kb.Enter))
	until(t, tab, "the word", `document.querySelector('#verdict').textContent === 'marked bad: <script>window.hacked=2</script>'`)
	if eval[bool](t, tab, `window.hacked !== undefined || document.querySelectorAll('img, body script').length > 0`) {
		t.Error("a name became markup")
	}
	screenshot(t, tab, "hostile")
}

// Long names are shortened in the list where that keeps them apart.
func TestBrowserLongNames(t *testing.T) {
	dir := newNight(t)
	tab := browser(t)
	for n := 1; n <= 3; n++ {
		addShot(t, dir, n, fmt.Sprintf("run %d tof=22000us cooled", n))
	}
	n := watchNight(t, dir, "127.0.0.1:0")
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	until(t, tab, "three shots", fmt.Sprintf(countIs, 3))
	const names = `[...document.querySelectorAll('.item')].map((i) => [...i.querySelectorAll('.name span')].map((s) => s.className + ':' + s.textContent).join('|')).sort().join()`
	if got, want := eval[string](t, tab, names), "head:run 1 tof=22000us cooled,head:run 2 tof=22000us cooled,head:run 3 tof=22000us cooled"; got != want {
		t.Errorf("the list has %q, want %q", got, want)
	}
	for k := 4; k <= 7; k++ {
		addShot(t, dir, k, fmt.Sprintf("run 1 tof=22000us cooled %d", k))
	}
	until(t, tab, "seven shots", fmt.Sprintf(countIs, 7))
	until(t, tab, "ends that differ", names+`.includes('head:run 1 tof=2200|tail:0us cooled 7')`)
}

// A shot is marked bad with a word, which can be taken back.
func TestBrowserVerdict(t *testing.T) {
	ctx := context.Background()
	dir := newNight(t, 4, 5)
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	shown(t, tab, "ramp_0005")
	do(t, tab, chromedp.Click("#mark"), chromedp.SendKeys("#bad-word", "laser unlocked"))
	addShot(t, dir, 6, "ramp_0006")
	shown(t, tab, "ramp_0006") // the word is still against the shot that was asked about
	do(t, tab, chromedp.KeyEvent(kb.Enter))
	until(t, tab, "a bad shot", `document.querySelector('.item.bad')?.textContent.includes('ramp_0005')`)
	do(t, tab, chromedp.KeyEvent(kb.ArrowLeft))
	until(t, tab, "the word", `document.querySelector('#verdict').textContent.includes('laser unlocked')`)
	screenshot(t, tab, "bad")
	if r, err := n.watch.Row(ctx, "ramp_0005"); err != nil || r.Bad != "laser unlocked" {
		t.Errorf("stored: %+v, %v", r, err)
	}
	do(t, tab, chromedp.KeyEvent("b"), chromedp.Click("#bad-back"))
	until(t, tab, "it taken back", `document.querySelector('#verdict').hidden && !document.querySelector('.item.bad')`)
	if r, err := n.watch.Row(ctx, "ramp_0005"); err != nil || r.Bad != "" {
		t.Errorf("stored: %+v, %v", r, err)
	}
}

// A shot that cannot be fitted shows its frame and one that cannot be read nothing, and
// never what belongs to the shot before.
func TestBrowserFailedShots(t *testing.T) {
	dir := newNight(t, 5)
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	shown(t, tab, "ramp_0005")
	const seen = `['#density image', '#residual image', '#cut1 canvas', '#density-scale:not([hidden])', '#residual-scale:not([hidden])', '#outlines:not([hidden])'].map((s) => +(document.querySelector(s) !== null)).join("") === %q`
	until(t, tab, "all of a good shot", fmt.Sprintf(seen, "111111"))
	data, err := os.ReadFile(filepath.Join(demoNight, "ramp_0006.fits"))
	if err != nil {
		t.Fatal(err)
	}
	head := 2880 * (1 + bytes.Index(data, []byte("END"+strings.Repeat(" ", 77)))/2880)
	clear(data[head:])
	for _, f := range []struct {
		name string
		data []byte
		seen string
	}{
		{"ramp_0006", data, "100100"},
		{"ramp_0007", []byte("no frames"), "000000"},
	} {
		if err := os.WriteFile(filepath.Join(dir, f.name+".fits"), f.data, 0o644); err != nil {
			t.Fatal(err)
		}
		until(t, tab, "why "+f.name+" failed", fmt.Sprintf(`document.body.dataset.shown === %q && document.querySelector('#flags .failed')`, f.name))
		until(t, tab, "what there is of it", fmt.Sprintf(seen, f.seen))
		screenshot(t, tab, "failed-"+f.name)
	}
	eval[bool](t, tab, `window.fault = '', addEventListener('error', (e) => { window.fault = e.message; }), true`)
	do(t, tab, chromedp.KeyEvent(kb.ArrowLeft))
	until(t, tab, "the frame", fmt.Sprintf(seen, "100100"))
	do(t, tab, chromedp.KeyEvent("r"), chromedp.KeyEvent(kb.ArrowRight))
	until(t, tab, "nothing to draw on", fmt.Sprintf(seen, "000000"))
	do(t, tab, chromedp.Click("#density"), chromedp.Click("#drawing-whole"), chromedp.KeyEvent(kb.Enter))
	if fault := eval[string](t, tab, `window.fault`); fault != "" {
		t.Errorf("drawing on nothing: %s", fault)
	}
}

// A region is drawn with the mouse on the whole frame and holds from the next shot on.
func TestBrowserRegion(t *testing.T) {
	dir := newNight(t, 4, 5)
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	shown(t, tab, "ramp_0005")
	do(t, tab, chromedp.KeyEvent("r"))
	until(t, tab, "the whole frame", `document.querySelector('#density image').getAttribute('href').startsWith('/picture/frame')`)
	at := func(x, y float64) (float64, float64) {
		p := eval[[]float64](t, tab, fmt.Sprintf(`(() => { const p = new DOMPoint(%g, %g).matrixTransform(document.querySelector('#density').getScreenCTM()); return [p.x, p.y]; })()`, x, y))
		return p[0], p[1]
	}
	x0, y0 := at(30, 20)
	x1, y1 := at(130, 125)
	do(t, tab, chromedp.DragAndDropXY(x0, y0, x1, y1, 5))
	until(t, tab, "the rectangle", `document.querySelector('#density rect.drag')`)
	screenshot(t, tab, "region")
	do(t, tab, chromedp.KeyEvent(kb.Enter))
	until(t, tab, "word that it waits", `document.querySelector('#region-now').textContent.includes('waits for the next shot')`)
	_, next := n.watch.Region()
	if next == nil || abs(next.Min.X-30) > 1 || abs(next.Min.Y-20) > 1 || abs(next.Max.X-130) > 1 || abs(next.Max.Y-125) > 1 {
		t.Fatalf("the region is %v", next)
	}
	until(t, tab, "the tool put away", `document.querySelector('#drawing').hidden`)
	do(t, tab, chromedp.KeyEvent("r"), chromedp.Click("#drawing-undo"))
	until(t, tab, "it taken back", `document.querySelector('#region-now').textContent === ''`)
	if _, next := n.watch.Region(); next != nil {
		t.Errorf("%v still waits", next)
	}
	if err := n.watch.Draw(*next); err != nil {
		t.Fatal(err)
	}
	addShot(t, dir, 6, "ramp_0006")
	shown(t, tab, "ramp_0006")
	do(t, tab, chromedp.Click("#tab-fitted"))
	want := fmt.Sprintf("0 0 %d %d", next.Dx(), next.Dy())
	until(t, tab, "word that it holds", `document.querySelector('#region-now').textContent === 'region drawn by hand'`)
	until(t, tab, "the region in the picture", fmt.Sprintf(`document.querySelector('#density').getAttribute('viewBox') === %q`, want))
}

// On a phone the button brings the picture and what is to be pressed next into sight.
func TestBrowserRegionOnPhone(t *testing.T) {
	dir := newNight(t, 4, 5)
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(390, 844), chromedp.Navigate(n.url))
	shown(t, tab, "ramp_0005")
	do(t, tab, chromedp.Click("#draw"))
	until(t, tab, "the whole frame", `document.querySelector('#density image').getAttribute('href').startsWith('/picture/frame')`)
	inSight := func(id string) {
		t.Helper()
		until(t, tab, id+" in sight", fmt.Sprintf(`(() => {
			const b = document.querySelector(%q).getBoundingClientRect(), top = document.querySelector('header').getBoundingClientRect().bottom;
			return b.height > 20 && b.top >= top && b.bottom <= innerHeight && document.elementFromPoint(b.x + b.width / 2, b.y + b.height / 2).closest(%q);
		})()`, id, id))
	}
	for _, id := range []string{"#density", "#drawing-take", "#drawing-cancel"} {
		inSight(id)
	}
	box := eval[[]float64](t, tab, `(() => { const b = document.querySelector('#density').getBoundingClientRect(); return [b.x, b.y, b.width, b.height]; })()`)
	do(t, tab, chromedp.DragAndDropXY(box[0]+0.2*box[2], box[1]+0.2*box[3], box[0]+0.8*box[2], box[1]+0.8*box[3], 5))
	until(t, tab, "the rectangle", `document.querySelector('#density rect.drag')`)
	inSight("#drawing-take")
	screenshot(t, tab, "phone-region")
	readable(t, tab, "phone-region")
	do(t, tab, chromedp.Click("#drawing-take"))
	until(t, tab, "word that it waits", `document.querySelector('#region-now').textContent.includes('waits for the next shot')`)
	r, err := n.watch.Row(context.Background(), "ramp_0005")
	if err != nil {
		t.Fatal(err)
	}
	n.watch.Undraw()
	until(t, tab, "it taken back", `document.querySelector('#region-now').textContent === ''`)
	if d := n.watch.Drawn(r); d != "" {
		t.Errorf("the region is %q", d)
	}
}

// The picture of a shot that was passed by, when it comes late, does not keep away that of the
// shot shown.
func TestBrowserLateAnswer(t *testing.T) {
	n := watchNight(t, newNight(t, 1, 2, 3), "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	until(t, tab, "three shots", fmt.Sprintf(countIs, 3))
	shown(t, tab, "ramp_0003")
	eval[bool](t, tab, `(() => {
		const later = (ms) => new Promise((done) => setTimeout(done, ms)), ask = window.fetch, decode = HTMLImageElement.prototype.decode;
		window.fetch = async (what, ...rest) => {
			if (/view.*ramp_0002/.test(what.url ?? what)) await later(400).then(() => { window.late = true; });
			return ask(what, ...rest);
		};
		HTMLImageElement.prototype.decode = async function () { await later(900); return decode.call(this); };
		return true;
	})()`)
	do(t, tab, chromedp.KeyEvent(kb.ArrowLeft), chromedp.KeyEvent(kb.ArrowLeft))
	shown(t, tab, "ramp_0001")
	if !eval[bool](t, tab, `window.late === true`) {
		t.Error("no answer was late")
	}
}

// ringSpan is how far to the left and to the right of its middle the ring about the newest
// point of the trend is drawn, in CSS px.
const ringSpan = `(() => {
	const canvas = document.querySelector('#trend-plot canvas'), over = document.querySelector('#trend-plot .u-over').getBoundingClientRect();
	const box = canvas.getBoundingClientRect(), scale = canvas.width / box.width;
	const probe = document.body.appendChild(document.createElement('p'));
	probe.style.color = 'var(--ink)';
	const want = getComputedStyle(probe).color.match(/\d+/g).map(Number);
	probe.remove();
	const from = Math.round((over.x - box.x) * scale), middle = from + over.width * scale * (0.02 + 0.96 * 1);
	const { data, width, height } = canvas.getContext('2d').getImageData(from, 0, canvas.width - from, (over.bottom - box.y) * scale);
	const xs = [];
	for (let o = 0; o < width * height; o++)
		if ([0, 1, 2].every((k) => Math.abs(data[4 * o + k] - want[k]) < 60) && data[4 * o + 3] > 150) xs.push(from + o % width);
	return [(middle - Math.min(...xs)) / scale, (Math.max(...xs) + 1 - middle) / scale];
})()`

// The ring about the newest point is whole on a narrow screen.
func TestBrowserRing(t *testing.T) {
	n := watchNight(t, newNight(t, 1, 2, 3), "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(390, 844), chromedp.Navigate(n.url))
	shown(t, tab, "ramp_0003")
	until(t, tab, "the trend", `document.querySelector('#trend-plot .u-over')`)
	eval[bool](t, tab, `document.querySelector('#trend').scrollIntoView(); true`)
	until(t, tab, "a whole ring", `(([left, right]) => left > 8 && right > 8 && Math.abs(left - right) < 1.5)(`+ringSpan+`)`)
	screenshot(t, tab, "phone-trend")
}

func abs(i int) int { return max(i, -i) }

// After the program was stopped and started the page finds back by itself and shows what
// it missed.
func TestBrowserReconnects(t *testing.T) {
	dir := newNight(t, 1, 2)
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	shown(t, tab, "ramp_0002")
	eval[bool](t, tab, `window.sameLoad = true`)
	n.stop()
	until(t, tab, "word of the loss", `document.querySelector('#status').className === 'lost'`)
	screenshot(t, tab, "lost")
	addShot(t, dir, 3, "ramp_0003")
	address := strings.TrimSuffix(strings.TrimPrefix(n.url, "http://"), "/")
	watchNight(t, dir, address)
	until(t, tab, "the connection", isLive)
	shown(t, tab, "ramp_0003")
	addShot(t, dir, 4, "ramp_0004")
	shown(t, tab, "ramp_0004")
	until(t, tab, "all shots", fmt.Sprintf(countIs, 4))
	if !eval[bool](t, tab, `window.sameLoad === true`) {
		t.Error("the page was loaded again")
	}
}

// The trend reads a value under the mouse, zooms by dragging and takes a person to a shot.
func TestBrowserTrend(t *testing.T) {
	n := watchNight(t, newNight(t, 1, 2, 3, 4, 5, 6, 7), "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	until(t, tab, "seven shots", fmt.Sprintf(countIs, 7))
	choose := func(id, value string) {
		t.Helper()
		until(t, tab, value+" on offer", fmt.Sprintf(`[...document.querySelector(%q).options].some((o) => o.value === %q)`, id, value))
		eval[bool](t, tab, fmt.Sprintf(`(() => { const s = document.querySelector(%q); s.value = %q; s.dispatchEvent(new Event('change')); return true; })()`, id, value))
	}
	choose("#trend-y", "fraction")
	choose("#trend-x", "RAMPEND")
	until(t, tab, "the trend", `document.querySelector('#trend-plot .u-over')`)
	x, y := hover(t, tab, 0.18, "a value", `/^ramp_0006: 0\.(69|7).* at RAMPEND 260/.test(r)`)
	do(t, tab, chromedp.MouseClickXY(x, y))
	shown(t, tab, "ramp_0006")
	x, y = hover(t, tab, 0.82, "a limit", `/^ramp_0002: < 0\.00.* at RAMPEND 300/.test(r)`)
	screenshot(t, tab, "trend-limits")
	do(t, tab, chromedp.MouseClickXY(x, y))
	shown(t, tab, "ramp_0002")
	until(t, tab, "the limit among all numbers", `[...document.querySelectorAll('#all tr')].some((r) => /^fraction< 0\.00/.test(r.textContent))`)
	do(t, tab, chromedp.KeyEvent(kb.End), chromedp.KeyEvent(kb.ArrowLeft))
	shown(t, tab, "ramp_0006")
	x0, y0 := inTrend(t, tab, 0.4)
	x1, y1 := inTrend(t, tab, 0.9)
	do(t, tab, chromedp.DragAndDropXY(x0, y0, x1, y1, 5))
	until(t, tab, "the zoom", `!document.querySelector('#trend-all').hidden`)
	screenshot(t, tab, "trend")
	do(t, tab, chromedp.Click("#trend-all"))
	until(t, tab, "all of it", `document.querySelector('#trend-all').hidden`)
	shown(t, tab, "ramp_0006") // dragging was no click
}

// Who looks before there are settings is shown what they say once they are there.
func TestBrowserBeforeSettings(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "night")
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	until(t, tab, "the connection", isLive)
	until(t, tab, "no scan variables", `document.querySelector('#trend-x').options.length === 1`)
	addFile(t, filepath.Join(demoNight, "fallshadow.toml"), filepath.Join(dir, "fallshadow.toml"))
	until(t, tab, "scan variables", `[...document.querySelector('#trend-x').options].some((o) => o.value === 'RAMPEND')`)
	until(t, tab, "settings", `document.querySelector('#settings-text').textContent.includes('[trap]')`)
}

// A shot that comes while the night is being read again stays.
func TestBrowserShotWhileReading(t *testing.T) {
	dir := newNight(t, 1, 2, 3)
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	shown(t, tab, "ramp_0003")
	until(t, tab, "the connection", isLive)
	eval[bool](t, tab, `(() => {
		const ask = window.fetch;
		window.held = { night: 0, column: 0 }, window.free = {}, window.passed = {};
		window.fetch = async (what, ...rest) => {
			const answer = await ask(what, ...rest), kind = /api.(night|column)/.exec(what)?.[1];
			if (kind) for (window.held[kind]++; !window.free[kind];) await new Promise((done) => setTimeout(done, 20));
			if (kind) window.passed[kind] = true;
			return answer;
		};
		return true;
	})()`)
	for i, kind := range []string{"night", "column"} {
		name := fmt.Sprintf("ramp_%04d", i+4)
		if i == 0 {
			n.page.Changed()
		}
		until(t, tab, "the answer", fmt.Sprintf(`window.held[%q] > 0`, kind))
		addShot(t, dir, i+4, name)
		until(t, tab, name, fmt.Sprintf(countIs, i+4))
		eval[bool](t, tab, fmt.Sprintf(`window.free[%q] = true`, kind))
		until(t, tab, "the answer read", fmt.Sprintf(`window.passed[%q]`, kind))
	}
	until(t, tab, "all shots", fmt.Sprintf(countIs, 5))
	for i := range 5 {
		name := fmt.Sprintf("ramp_%04d", i+1)
		hover(t, tab, 0.02+0.96*float64(i)/4, name, fmt.Sprintf(`r.startsWith(%q)`, name+": "))
	}
}

// Two series in one night: shots stand, follow one another and are drawn as they came, not
// by name, and so after a restart.
func TestBrowserTwoSeries(t *testing.T) {
	dir := newNight(t)
	start := time.Now().Add(-time.Hour)
	shots := []string{"mot_0001", "bec_0001", "mot_0002", "bec_0002", "bec_0003"}
	for i, name := range shots[:4] {
		addShot(t, dir, i+3, name)
		at := start.Add(time.Duration(i) * 20 * time.Second)
		if err := os.Chtimes(filepath.Join(dir, name+".fits"), at, at); err != nil {
			t.Fatal(err)
		}
	}
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	until(t, tab, "four shots", fmt.Sprintf(countIs, 4))
	shown(t, tab, "bec_0002")
	inOrder := func(n int) {
		t.Helper()
		until(t, tab, "the list in order", fmt.Sprintf(`[...document.querySelectorAll('.item .name')].map((e) => e.textContent).reverse().join() === %q`, strings.Join(shots[:n], ",")))
		for i, name := range shots[:n] {
			hover(t, tab, 0.02+0.96*float64(i)/float64(n-1), name, fmt.Sprintf(`r.startsWith(%q)`, name+":"))
		}
	}
	inOrder(4)
	addShot(t, dir, 7, "bec_0003")
	shown(t, tab, "bec_0003")
	inOrder(5)
	for i := 3; i >= 0; i-- {
		do(t, tab, chromedp.KeyEvent(kb.ArrowLeft))
		shown(t, tab, shots[i])
	}
	do(t, tab, chromedp.KeyEvent(kb.End))
	shown(t, tab, "bec_0003")
	n.stop()
	until(t, tab, "word of the loss", `document.querySelector('#status').className === 'lost'`)
	watchNight(t, dir, strings.TrimSuffix(strings.TrimPrefix(n.url, "http://"), "/"))
	until(t, tab, "the connection", isLive)
	shown(t, tab, "bec_0003")
	inOrder(5)
	screenshot(t, tab, "two-series")
}

// Settings that change are said on the page, in the words of the terminal, and what was
// fitted before is shown as stale.
func TestBrowserSettingsChange(t *testing.T) {
	dir := newNight(t, 1, 2, 3)
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	until(t, tab, "three shots", fmt.Sprintf(countIs, 3))
	until(t, tab, "the connection", isLive)
	file := filepath.Join(dir, "fallshadow.toml")
	text, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	save := func(old, new string) {
		t.Helper()
		if !bytes.Contains(text, []byte(old)) {
			t.Fatalf("there is no %q in the settings", old)
		}
		saveFile(t, file, bytes.Replace(text, []byte(old), []byte(new), 1))
	}
	notes := func(part string) {
		t.Helper()
		until(t, tab, part, fmt.Sprintf(`document.querySelector('#notes').checkVisibility() && document.querySelector('#notes').textContent.includes(%q)`, part))
		until(t, tab, "what the watch says", fmt.Sprintf(`document.querySelector('#notes').textContent === %q`, strings.Join(n.watch.Notes(), "\n")))
	}
	save("alpha = { value = 1.5,", "alhpa = { value = 1.5,")
	notes("the settings were changed and are wrong, the old ones hold")
	save("alpha = { value = 1.5,", "alpha = { value = 3,")
	const said = "the settings are right again: probe.alpha 1.5 ± 0.04 -> 3.0 ± 0.04; they hold from the next shot on, the first after ramp_0003"
	notes(said)
	until(t, tab, "stale shots", `document.querySelectorAll('.item').length === 3 && [...document.querySelectorAll('.item .dot')].every((d) => d.textContent === '◆')`)
	addShot(t, dir, 4, "ramp_0004")
	shown(t, tab, "ramp_0004")
	until(t, tab, "both in the legend", `document.querySelector('#trend-stale').checkVisibility()`)
	do(t, tab, chromedp.Navigate(n.url))
	shown(t, tab, "ramp_0004")
	notes(said)
	screenshot(t, tab, "settings-changed")
	readable(t, tab, "settings-changed")
}

// markShape looks at the pixels of one colour around the point of the trend at a place from
// left to right: how much of their box they fill, how far down they are widest, 0 to 1, and
// whether the middle of the box is one of them.
const markShape = `(() => {
	const canvas = document.querySelector('#trend-plot canvas'), over = document.querySelector('#trend-plot .u-over').getBoundingClientRect();
	const box = canvas.getBoundingClientRect(), scale = canvas.width / box.width;
	const middle = Math.round((over.x - box.x + over.width * (0.02 + 0.96 * %g)) * scale), half = Math.round(9 * scale);
	const probe = document.body.appendChild(document.createElement('p'));
	probe.style.color = 'var(%s)';
	const want = getComputedStyle(probe).color.match(/\d+/g).map(Number);
	probe.remove();
	const { data, width, height } = canvas.getContext('2d').getImageData(middle - half, (over.y - box.y) * scale, 2 * half + 1, over.height * scale);
	const is = (x, y) => [0, 1, 2].every((k) => Math.abs(data[4 * (y * width + x) + k] - want[k]) < 40) && data[4 * (y * width + x) + 3] > 200;
	const rows = [];
	for (let y = 0; y < height; y++) {
		const xs = [...Array(width).keys()].filter((x) => is(x, y));
		if (xs.length > 1) rows.push({ y, n: xs.length, from: xs[0], to: xs[xs.length - 1] });
	}
	const wide = rows.filter((r) => r.to - r.from > 1);
	if (wide.length < 4) return [0, 0, 0];
	const top = wide[0].y, bottom = wide[wide.length - 1].y, spans = wide.map((r) => r.to - r.from + 1), most = Math.max(...spans);
	const widest = wide.filter((r) => r.to - r.from + 1 === most).map((r) => r.y);
	return [wide.reduce((n, r) => n + r.n, 0) / (most * (bottom - top + 1)), (widest.reduce((a, b) => a + b) / widest.length - top) / (bottom - top), +is(half, Math.round((top + bottom) / 2))];
})()`

// What is to be said against a shot is told by the shape of its point, and by a legend that
// is there when it is needed.
func TestBrowserMarks(t *testing.T) {
	n := watchNight(t, newNight(t, 1, 2, 3, 4), "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	until(t, tab, "four shots", fmt.Sprintf(countIs, 4))
	shown(t, tab, "ramp_0004")
	until(t, tab, "the connection", isLive)
	tell := func(shot int, change func(*ledger.Row)) {
		r, err := n.watch.Row(context.Background(), fmt.Sprintf("ramp_%04d", shot))
		if err != nil {
			t.Fatal(err)
		}
		r.Flags = nil
		change(r)
		n.page.Row(r)
	}
	legend := func(want string) {
		t.Helper()
		until(t, tab, "the legend "+want, fmt.Sprintf(`[...document.querySelectorAll('#trend-legend > span')].filter((s) => s.checkVisibility()).map((s) => s.textContent.trim()).join() === %q`, want))
	}
	for i := range 4 {
		tell(i+1, func(*ledger.Row) {})
	}
	legend("")
	tell(2, func(r *ledger.Row) { r.Flags = []string{"dense"} })
	legend("good,flagged")
	tell(3, func(r *ledger.Row) { r.Stale, r.Flags = true, []string{"dense"} })
	tell(4, func(r *ledger.Row) { r.Bad, r.Stale = "lamp on", true })
	legend("good,flagged,stale,marked bad")
	do(t, tab, chromedp.KeyEvent(kb.ArrowLeft), chromedp.KeyEvent(kb.ArrowLeft), chromedp.KeyEvent(kb.ArrowLeft))
	until(t, tab, "the first", fmt.Sprintf(shownIs, "ramp_0001", "ramp_0001"))
	for _, theme := range []string{"light", "dark"} {
		eval[bool](t, tab, fmt.Sprintf(`document.documentElement.dataset.theme === %q || document.querySelector('#theme').click(); true`, theme))
		for i, m := range []struct {
			colour               string
			least, most, in, out float64
			middle               float64
		}{
			{"--data", 0.75, 1, 0.35, 0.65, 1},
			{"--warn", 0.4, 0.75, 0.8, 1, 1},
			{"--muted", 0.4, 0.72, 0.35, 0.65, 1},
			{"--muted", 0.1, 0.6, 0.3, 0.7, 0},
		} {
			until(t, tab, fmt.Sprintf("the mark of shot %d, %s", i+1, theme), fmt.Sprintf(
				`(([fills, widest, middle]) => fills >= %g && fills <= %g && widest >= %g && widest <= %g && middle === %g)(`+markShape+`)`,
				m.least, m.most, m.in, m.out, m.middle, float64(i)/3, m.colour))
		}
		screenshot(t, tab, "marks-"+theme)
		readable(t, tab, "marks-"+theme)
	}
}

// The first picture that means something is there within a second of asking for the page.
func TestBrowserFirstPicture(t *testing.T) {
	n := watchNight(t, newNight(t, 1, 2, 3), "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	shown(t, tab, "ramp_0003")
	var times []float64
	for range 5 {
		do(t, tab, chromedp.Navigate(n.url))
		shown(t, tab, "ramp_0003")
		times = append(times, eval[float64](t, tab, `(performance.getEntriesByType('resource').find((r) => r.name.includes('/picture/'))?.responseEnd ?? 1e9)`))
	}
	slices.Sort(times)
	sent := eval[float64](t, tab, `[...performance.getEntriesByType('resource'), ...performance.getEntriesByType('navigation')].filter((r) => !r.name.includes('/picture/')).reduce((n, r) => n + r.transferSize, 0)`)
	t.Logf("picture after %.0f ms (median of 5), %.0f ms at most; %.0f kB before pictures", times[2], times[4], sent/1e3)
	if sent > 300e3 {
		t.Errorf("%.0f bytes before pictures", sent)
	}
}
