//go:build browser

package page_test

import (
	"context"
	"fmt"
	"io"
	"net"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"

	"fallshadow/cmd/fallshadow/internal/ledger"
)

// What comes in the wrong order, late or not at all.

// holding lets scripts hold back the answers to requests that a pattern fits: window.hold is the
// pattern, window.held counts those that are held, and letGo lets them go.
const holding = `(() => {
	const ask = window.fetch, nap = () => new Promise((done) => setTimeout(done, 20));
	window.held = 0;
	window.fetch = async (what, ...rest) => {
		const answer = await ask(what, ...rest), hold = window.hold;
		if (!hold?.test(what)) return answer;
		for (window.held++; window.hold === hold;) await nap();
		return answer;
	};
	return true;
})()`

const letGo = `window.hold = null, window.held = 0, true`

// liveNight returns a night of some shots that is shown and live in a tab.
func liveNight(t *testing.T, shots ...int) (dir string, n *watched, tab context.Context) {
	t.Helper()
	dir = newNight(t, shots...)
	n = watchNight(t, dir, "127.0.0.1:0")
	tab = browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	shown(t, tab, fmt.Sprintf("ramp_%04d", shots[len(shots)-1]))
	until(t, tab, "the connection", isLive)
	until(t, tab, "all shots", fmt.Sprintf(countIs, len(shots)))
	return dir, n, tab
}

// rowOf returns the row of a shot.
func rowOf(t *testing.T, n *watched, shot string) *ledger.Row {
	t.Helper()
	r, err := n.watch.Row(context.Background(), shot)
	if err != nil || r == nil {
		t.Fatalf("%s: %v, %v", shot, r, err)
	}
	return r
}

// Notes and numbers that come while the night is being read are newer than the answer.
func TestBrowserNewerThanAnswer(t *testing.T) {
	_, n, tab := liveNight(t, 1, 2, 3)
	eval[bool](t, tab, holding)
	eval[bool](t, tab, `window.hold = /api.night/, true`)
	n.page.Changed()
	until(t, tab, "the answer", `window.held === 1`)
	n.page.Notes([]string{"the cat sits on the lens"})
	r := rowOf(t, n, "ramp_0003")
	r.Bad = "lamp on"
	n.page.Row(r)
	const note, word = `document.querySelector('#notes').textContent.includes('cat')`, `document.querySelector('#verdict').textContent.includes('lamp')`
	until(t, tab, "note and word", note+" && "+word)
	eval[bool](t, tab, `window.selects = 0, new MutationObserver(() => window.selects++).observe(document.querySelector('#trend-x'), { childList: true }), true`)
	eval[bool](t, tab, letGo)
	until(t, tab, "the answer read", `window.selects > 0`)
	time.Sleep(300 * time.Millisecond)
	if !eval[bool](t, tab, note) {
		t.Error("the older answer took the note away")
	}
	if !eval[bool](t, tab, word) {
		t.Error("the older answer took the word away")
	}
}

// An older answer on a shot does not take the place of a newer row of it.
func TestBrowserOlderRow(t *testing.T) {
	_, n, tab := liveNight(t, 1, 2, 3)
	eval[bool](t, tab, holding)
	eval[bool](t, tab, `window.hold = /api.row/, true`)
	do(t, tab, chromedp.KeyEvent(kb.ArrowLeft))
	until(t, tab, "the answer", `window.held === 1`)
	r := rowOf(t, n, "ramp_0002")
	r.Bad = "lamp on"
	n.page.Row(r)
	const word = `document.querySelector('#verdict').textContent.includes('lamp')`
	until(t, tab, "the word", word)
	eval[bool](t, tab, letGo)
	time.Sleep(300 * time.Millisecond)
	if !eval[bool](t, tab, word) {
		t.Error("the older answer took the word away")
	}
}

// Whatever changes while the night is being read is read once after it, however often.
func TestBrowserManyChanges(t *testing.T) {
	_, n, tab := liveNight(t, 1, 2)
	eval[bool](t, tab, holding)
	eval[bool](t, tab, `window.hold = /api.night/, window.asked = 0, (() => { const ask = window.fetch; window.fetch = (what, ...rest) => { window.asked += /api.night/.test(what); return ask(what, ...rest); }; })(), true`)
	n.page.Changed()
	until(t, tab, "the answer", `window.held === 1`)
	for range 20 {
		n.page.Changed()
	}
	n.page.Notes([]string{"the last word"})
	until(t, tab, "all events", `document.querySelector('#notes').textContent.includes('last word')`)
	eval[bool](t, tab, letGo)
	until(t, tab, "the notes of now", `document.querySelector('#notes').hidden`)
	time.Sleep(300 * time.Millisecond)
	if asked := eval[int](t, tab, `window.asked`); asked != 2 {
		t.Errorf("the night was read %d times", asked)
	}
}

// When the last shot leaves nothing of it stays, and who looked back at a shot that left follows
// again.
func TestBrowserShotsLeave(t *testing.T) {
	dir, _, tab := liveNight(t, 1, 2, 3)
	remove := func(shot string) {
		t.Helper()
		if err := os.Remove(filepath.Join(dir, shot+".fits")); err != nil {
			t.Fatal(err)
		}
	}
	do(t, tab, chromedp.KeyEvent(kb.ArrowLeft))
	shown(t, tab, "ramp_0002")
	remove("ramp_0002")
	shown(t, tab, "ramp_0003")
	until(t, tab, "following", isLive)
	remove("ramp_0001")
	remove("ramp_0003")
	until(t, tab, "no shots", `document.querySelector('#shot').textContent === 'no shots yet'`)
	until(t, tab, "nothing of the last", `!document.querySelector('.card, #flags li, #all tr, #density image, #cut1 canvas') && document.querySelector('#about').textContent === '' && document.querySelector('#notes').hidden`)
	screenshot(t, tab, "no-shots")
	do(t, tab, chromedp.KeyEvent("b"))
	if eval[bool](t, tab, `document.querySelector('#bad-dialog').open`) {
		t.Error("a person is asked about a shot that is not there")
	}
	addShot(t, dir, 6, "ramp_0006")
	shown(t, tab, "ramp_0006")
}

// A column that cannot be read yet is not drawn with the values of another.
func TestBrowserColumnLater(t *testing.T) {
	_, _, tab := liveNight(t, 1, 2, 3)
	hover(t, tab, 0.02, "atoms", `/^ramp_0001: \d{5,} /.test(r.replace(/[^\w:. ]/g, ''))`)
	eval[bool](t, tab, `(() => {
		const ask = window.fetch;
		window.fetch = (what, ...rest) => /api.column/.test(what) && !window.up ? Promise.reject(new TypeError('no network')) : ask(what, ...rest);
		const s = document.querySelector('#trend-y'); s.value = 'T_nK'; s.dispatchEvent(new Event('change'));
		return true;
	})()`)
	time.Sleep(300 * time.Millisecond)
	x, y := inTrend(t, tab, 0.02)
	for i := range 3 {
		do(t, tab, chromedp.MouseEvent("mouseMoved", x, y+float64(i)))
	}
	if r := eval[string](t, tab, `document.querySelector('#trend-read').textContent`); r != "" {
		t.Errorf("before T was read the trend reads %q", r)
	}
	eval[bool](t, tab, `window.up = true`)
	hover(t, tab, 0.02, "T", `/^ramp_0001: \d{2,3}\b.*nK/.test(r)`)
}

// A word against a shot does not undo the zoom of the trend in which it was found.
func TestBrowserZoomStays(t *testing.T) {
	_, n, tab := liveNight(t, 1, 2, 3, 4, 5)
	x0, y0 := inTrend(t, tab, 0.4)
	x1, y1 := inTrend(t, tab, 0.9)
	do(t, tab, chromedp.DragAndDropXY(x0, y0, x1, y1, 5))
	until(t, tab, "the zoom", `!document.querySelector('#trend-all').hidden`)
	if err := n.watch.Judge(context.Background(), "ramp_0004", "lamp on"); err != nil {
		t.Fatal(err)
	}
	until(t, tab, "the word", `document.querySelector('.item.bad')`)
	until(t, tab, "the mark in the trend", `document.querySelector('#trend-bad').checkVisibility()`)
	if !eval[bool](t, tab, `!document.querySelector('#trend-all').hidden`) {
		t.Error("the zoom was undone")
	}
}

// Who looks back in a long list keeps in sight what he looks at when a shot comes.
func TestBrowserListStays(t *testing.T) {
	dir := newNight(t)
	for i := range 40 {
		addShot(t, dir, 1+i%9, fmt.Sprintf("ramp_%04d", i+1))
	}
	n := watchNight(t, dir, "127.0.0.1:0")
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate(n.url))
	until(t, tab, "forty shots", fmt.Sprintf(countIs, 40))
	shown(t, tab, "ramp_0040")
	do(t, tab, chromedp.KeyEvent(kb.ArrowLeft))
	shown(t, tab, "ramp_0039")
	eval[bool](t, tab, `document.querySelector('#list').scrollTop = 305, true`)
	const there = `(() => { const b = document.querySelector('#list').getBoundingClientRect(); return document.elementFromPoint(b.x + 40, b.y + 200).closest('.item')?.textContent ?? ''; })()`
	until(t, tab, "a shot further down", there+` !== ''`)
	before := eval[string](t, tab, there)
	addShot(t, dir, 5, "ramp_0041")
	until(t, tab, "the next", fmt.Sprintf(countIs, 41))
	time.Sleep(200 * time.Millisecond)
	if after := eval[string](t, tab, there); after != before {
		t.Errorf("%q stands where %q stood", after, before)
	}
	do(t, tab, chromedp.KeyEvent(kb.End))
	shown(t, tab, "ramp_0041")
	eval[bool](t, tab, `document.querySelector('#list').scrollTop = 305, true`)
	do(t, tab, chromedp.KeyEvent(kb.End))
	until(t, tab, "the last shot in sight", `document.querySelector('#list').scrollTop === 0`)
}

// A page that is left open over a restart says why the program does not let it in any more.
func TestBrowserNewToken(t *testing.T) {
	dir := newNight(t, 1, 2)
	n := watchNight(t, dir, "0.0.0.0:0")
	_, port, err := net.SplitHostPort(strings.TrimPrefix(n.url[:strings.Index(n.url, "/?")], "http://"))
	if err != nil {
		t.Fatal(err)
	}
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate("http://127.0.0.1:"+port+n.url[strings.Index(n.url, "/?"):]))
	shown(t, tab, "ramp_0002")
	until(t, tab, "the connection", isLive)
	n.stop()
	watchNight(t, dir, "0.0.0.0:"+port)
	until(t, tab, "what to do", `document.querySelector('#notes').textContent === 'open the page with the address that the program printed: it holds the token'`)
	screenshot(t, tab, "new-token")
}

// gate stands between page and browser; it can keep from the browser what comes on the
// connections that there are, as a phone that slept or a network that changed does.
type gate struct {
	mu   sync.Mutex
	open []chan struct{}
}

// shut lets nothing through any more on the connections that there are.
func (g *gate) shut() {
	g.mu.Lock()
	defer g.mu.Unlock()
	for _, c := range g.open {
		close(c)
	}
	g.open = nil
}

// openGate opens a gate to the page on another address of this machine.
func openGate(t *testing.T, from, to string) *gate {
	t.Helper()
	l, err := net.Listen("tcp", from)
	if err != nil {
		t.Skipf("no second address of this machine: %v", err)
	}
	t.Cleanup(func() { l.Close() })
	g := &gate{}
	go func() {
		for {
			in, err := l.Accept()
			if err != nil {
				return
			}
			out, err := net.Dial("tcp", to)
			if err != nil {
				in.Close()
				continue
			}
			shut := make(chan struct{})
			g.mu.Lock()
			g.open = append(g.open, shut)
			g.mu.Unlock()
			go through(out, in, shut)
			go through(in, out, shut)
		}
	}()
	return g
}

// through copies until the gate is shut; then who only listens waits for ever, and who speaks is
// cut off.
func through(to, from net.Conn, shut chan struct{}) {
	b := make([]byte, 1<<16)
	for {
		n, err := from.Read(b)
		select {
		case <-shut:
			from.Close()
			return
		default:
		}
		if _, e := to.Write(b[:n]); e != nil || err != nil {
			if err != io.EOF || e != nil {
				from.Close()
			}
			to.Close()
			return
		}
	}
}

// What was asked on a connection that died is asked again.
func TestBrowserAsksAgain(t *testing.T) {
	n := watchNight(t, newNight(t, 1, 2), "127.0.0.2:0")
	address := strings.TrimSuffix(strings.TrimPrefix(n.url, "http://"), "/")
	at := strings.Replace(address, "127.0.0.2", "127.0.0.1", 1)
	g := openGate(t, at, address)
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(1440, 900), chromedp.Navigate("http://"+at))
	shown(t, tab, "ramp_0002")
	until(t, tab, "the connection", isLive)
	eval[bool](t, tab, `(() => {
		const ask = window.fetch;
		window.fetch = (what, init, ...rest) => {
			if (window.dead || !/view.*ramp_0001/.test(what)) return ask(what, init, ...rest);
			window.dead = true;
			return new Promise((_, fail) => init?.signal?.addEventListener('abort', () => fail(init.signal.reason)));
		};
		return true;
	})()`)
	do(t, tab, chromedp.KeyEvent(kb.ArrowLeft))
	until(t, tab, "the picture asked for", `window.dead`)
	g.shut()
	eval[bool](t, tab, `(() => { const now = Date.now; Date.now = () => now() + 100000; return true; })()`)
	shown(t, tab, "ramp_0001")
}

// A connection that died without a word, as on a phone that slept, is noticed; what was missed
// is shown, and the age of the last shot is that of the shot.
func TestBrowserSleeps(t *testing.T) {
	dir := newNight(t, 1, 2)
	n := watchNight(t, dir, "127.0.0.2:0")
	address := strings.TrimSuffix(strings.TrimPrefix(n.url, "http://"), "/")
	at := strings.Replace(address, "127.0.0.2", "127.0.0.1", 1)
	g := openGate(t, at, address)
	tab := browser(t)
	do(t, tab, chromedp.EmulateViewport(390, 844), chromedp.Navigate("http://"+at))
	shown(t, tab, "ramp_0002")
	until(t, tab, "the connection", isLive)
	g.shut()
	addShot(t, dir, 3, "ramp_0003")
	for end := time.Now().Add(patience); ; time.Sleep(20 * time.Millisecond) {
		if r, err := n.watch.Row(context.Background(), "ramp_0003"); err != nil || time.Now().After(end) {
			t.Fatalf("the third shot: %v, %v", r, err)
		} else if r != nil {
			break
		}
	}
	time.Sleep(time.Second)
	if eval[bool](t, tab, fmt.Sprintf(countIs, 3)) {
		t.Fatal("the gate is not shut")
	}
	eval[bool](t, tab, `(() => { const now = Date.now; Date.now = () => now() + 1e8; return true; })()`)
	shown(t, tab, "ramp_0003")
	until(t, tab, "the age of the shot", `document.querySelector('#status').textContent === 'last shot 28 h ago'`)
	screenshot(t, tab, "woke")
	do(t, tab, chromedp.Navigate("http://"+at))
	until(t, tab, "the age after loading", `/^last shot \d+ s ago$/.test(document.querySelector('#status').textContent)`)
}

// A picture that nobody waits for any more is not asked for any more.
func TestBrowserPassedBy(t *testing.T) {
	_, _, tab := liveNight(t, 1, 2, 3)
	eval[bool](t, tab, `(() => {
		const ask = window.fetch;
		window.fetch = (what, init, ...rest) => {
			if (/view.*ramp_0002/.test(what)) init?.signal?.addEventListener('abort', () => { window.ended = true; });
			return /view.*ramp_0002/.test(what) ? new Promise(() => {}) : ask(what, init, ...rest);
		};
		return true;
	})()`)
	do(t, tab, chromedp.KeyEvent(kb.ArrowLeft), chromedp.KeyEvent(kb.ArrowLeft))
	shown(t, tab, "ramp_0001")
	if !eval[bool](t, tab, `window.ended === true`) {
		t.Error("it is still asked for")
	}
}

// A picture that is drawn by other settings than the numbers are of says so, as after settings
// changed while nobody watched, until it is so no longer.
func TestBrowserStalePicture(t *testing.T) {
	dir, n, tab := liveNight(t, 4, 5)
	n.stop()
	file := filepath.Join(dir, "fallshadow.toml")
	text, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	alpha := func(value string) {
		t.Helper()
		changed := strings.Replace(string(text), "alpha = { value = 1.5,", "alpha = { value = "+value+",", 1)
		if err := os.WriteFile(file, []byte(changed), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	alpha("3.0")
	watchNight(t, dir, strings.TrimSuffix(strings.TrimPrefix(n.url, "http://"), "/"))
	const said = `document.querySelector('#region-now').textContent === 'picture by the settings of now'`
	until(t, tab, "word of it", said)
	do(t, tab, chromedp.EmulateViewport(390, 844))
	screenshot(t, tab, "stale-picture-phone")
	readable(t, tab, "stale-picture-phone")
	do(t, tab, chromedp.EmulateViewport(1440, 900))
	screenshot(t, tab, "stale-picture")
	alpha("1.5")
	until(t, tab, "no word of it", `document.querySelector('#region-now').textContent === ''`)
	shown(t, tab, "ramp_0005")
}

// A picture that there is none of for a moment, as of a file that is being written, is shown when
// there is one, and what went wrong is not said any longer.
func TestBrowserPictureLater(t *testing.T) {
	_, _, tab := liveNight(t, 1, 2, 3)
	eval[bool](t, tab, `(() => {
		const ask = window.fetch;
		window.fetch = async (what, ...rest) => /view.*ramp_0002/.test(what) && !window.whole ? new Response('ramp_0002.fits: truncated', { status: 500 }) : ask(what, ...rest);
		return true;
	})()`)
	do(t, tab, chromedp.KeyEvent(kb.ArrowLeft))
	until(t, tab, "what went wrong", `document.querySelector('#notes').textContent === 'ramp_0002.fits: truncated'`)
	eval[bool](t, tab, `window.whole = true`)
	shown(t, tab, "ramp_0002")
	until(t, tab, "no word of it", `document.querySelector('#notes').hidden`)
}
