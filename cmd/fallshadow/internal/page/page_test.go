package page

import (
	"bufio"
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"image"
	"io"
	"iter"
	"net"
	"net/http"
	"net/http/cookiejar"
	"net/http/httptest"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit"
	"fallshadow/imageio"
)

// still is a night of fixed rows that notes what is done to it.
type still struct {
	rows           []ledger.Row
	judged         []string
	drawn          image.Rectangle
	undone         bool
	drawnOtherwise bool
	came           map[string]time.Time
}

func (s *still) Each(context.Context) iter.Seq2[*ledger.Row, error] {
	return func(yield func(*ledger.Row, error) bool) {
		for i := range s.rows {
			if !yield(&s.rows[i], nil) {
				return
			}
		}
	}
}
func (s *still) Arrived(r *ledger.Row) time.Time { return s.came[r.Shot] }
func (s *still) Row(_ context.Context, shot string) (*ledger.Row, error) {
	if i := slices.IndexFunc(s.rows, func(r ledger.Row) bool { return r.Shot == shot }); i >= 0 {
		return &s.rows[i], nil
	}
	return nil, nil
}
func (s *still) Measure(_ context.Context, shot string) (*report.Facts, *imageio.Raw, error) {
	if shot == "unread" {
		return nil, nil, errors.New("the frames cannot be read")
	}
	m := &fit.Maps{Width: 4, Height: 3}
	for range 12 {
		m.Density, m.Thermal, m.Total, m.Residual = append(m.Density, 1), append(m.Thermal, 1), append(m.Total, 1), append(m.Residual, 0)
		m.Seen = m.Total
	}
	frame := &imageio.Frame{Width: 8, Height: 6, Pix: make([]float32, 48)}
	raw := &imageio.Raw{}
	raw.Frames[imageio.Atoms], raw.Frames[imageio.Light] = frame, frame
	return &report.Facts{Pixel: 1e-6, Region: image.Rect(2, 2, 6, 5), Fit: &fit.Result{Model: fit.ModelNone, Maps: m}}, raw, nil
}
func (s *still) Scan() []string       { return []string{"RAMP"} }
func (s *still) SettingsText() string { return "[trap]\n" }
func (s *still) Notes() []string      { return nil }
func (s *still) Region() (now, next *image.Rectangle) {
	return &image.Rectangle{Max: image.Pt(3, 4)}, nil
}
func (s *still) Drawn(r *ledger.Row) string {
	if r.Shot == "shot_2" && !s.drawnOtherwise {
		return "left out"
	}
	return ""
}
func (s *still) Judge(_ context.Context, shot, word string) error {
	s.judged = append(s.judged, shot+": "+word)
	return nil
}
func (s *still) Draw(region image.Rectangle) error {
	if region.Empty() {
		return errors.New("too small")
	}
	s.drawn = region
	return nil
}
func (s *still) Undraw() { s.undone = true }

const hostile = `<img src=x onerror=alert(1)>/../"'&%00`

func newStill() *still {
	good := ledger.Row{Shot: "shot_2", Files: []string{"shot_2.fits"}, Provisional: true, Meta: map[string]string{"RAMP": "2.5"}}
	for column, v := range map[string]float64{"flight_ms": 16, "atoms": 123456, "atoms_err": 789, "atoms_cal": 2900, "fraction_high": 0.0123} {
		good.SetNumber(column, v)
	}
	good.SetWord("model", "thermal")
	return &still{rows: []ledger.Row{
		good,
		{Shot: "unread", Reason: "the file is cut short", Bad: "lamp on"},
		{Shot: hostile, Meta: map[string]string{"RAMP": "<b>"}},
	}}
}

// newServer serves a still night on loopback.
func newServer(t *testing.T, token string) (*Page, *still, string) {
	t.Helper()
	p, s := New("night"), newStill()
	p.Show(s)
	l, url, err := p.Listen("127.0.0.1:0", "")
	if err != nil {
		t.Fatal(err)
	}
	if token != "" { // as on an address that other machines reach
		p.guard.token = token
		url = p.guard.url()
	}
	ctx, cancel := context.WithCancel(context.Background())
	end := make(chan error, 1)
	go func() { end <- p.Serve(ctx, l) }()
	t.Cleanup(func() {
		cancel()
		if err := <-end; err != nil {
			t.Error(err)
		}
	})
	return p, s, strings.TrimSuffix(url, "/")
}

// ask sends a request and returns status and body.
func ask(t *testing.T, method, url, body string, headers ...string) (int, string) {
	t.Helper()
	r, err := http.NewRequest(method, url, strings.NewReader(body))
	if err != nil {
		t.Fatal(err)
	}
	for i := 0; i < len(headers); i += 2 {
		if headers[i] == "Host" {
			r.Host = headers[i+1]
		} else {
			r.Header.Set(headers[i], headers[i+1])
		}
	}
	client := http.Client{CheckRedirect: func(*http.Request, []*http.Request) error { return http.ErrUseLastResponse }}
	response, err := client.Do(r)
	if err != nil {
		t.Fatal(err)
	}
	defer response.Body.Close()
	text, err := io.ReadAll(response.Body)
	if err != nil {
		t.Fatal(err)
	}
	return response.StatusCode, string(text)
}

// What is refused, and what is not.
func TestProtection(t *testing.T) {
	_, s, url := newServer(t, "")
	port := url[strings.LastIndex(url, ":"):]
	change := []string{"Origin", url, "Content-Type", "application/json"}
	verdict := `{"shot":"shot_2","word":"x"}`
	tests := []struct {
		name, method, path, body string
		headers                  []string
		status                   int
	}{
		{"the page", "GET", "/", "", nil, 200},
		{"under localhost", "GET", "/api/night", "", []string{"Host", "localhost" + port}, 200},
		{"under a foreign name", "GET", "/api/night", "", []string{"Host", "evil.example" + port}, 403},
		{"under a foreign name without port", "GET", "/", "", []string{"Host", "127.0.0.1"}, 403},
		{"another port", "GET", "/", "", []string{"Host", "127.0.0.1:1"}, 403},
		{"a verdict", "POST", "/api/verdict", verdict, change, 204},
		{"a verdict from elsewhere", "POST", "/api/verdict", verdict, []string{"Origin", "http://evil.example", "Content-Type", "application/json"}, 403},
		{"a verdict from nowhere", "POST", "/api/verdict", verdict, []string{"Content-Type", "application/json"}, 403},
		{"a verdict of a null origin", "POST", "/api/verdict", verdict, []string{"Origin", "null", "Content-Type", "application/json"}, 403},
		{"a verdict by a form", "POST", "/api/verdict", verdict, []string{"Origin", url, "Content-Type", "text/plain"}, 403},
		{"a verdict by GET", "GET", "/api/verdict", "", nil, 404},
		{"a verdict on no shot", "POST", "/api/verdict", `{"shot":"nothing","word":"x"}`, change, 404},
		{"a verdict of many letters", "POST", "/api/verdict", `{"shot":"shot_2","word":"` + strings.Repeat("x", 201) + `"}`, change, 400},
		{"a verdict too long to read", "POST", "/api/verdict", `{"shot":"shot_2","word":"` + strings.Repeat("x", 5000) + `"}`, change, 400},
		{"junk", "POST", "/api/verdict", `{`, change, 400},
		{"a region", "POST", "/api/region", `{"region":[1,2,30,40]}`, change, 204},
		{"a region of nothing", "POST", "/api/region", `{"region":[1,1,1,1]}`, change, 400},
		{"no region", "POST", "/api/region", `{}`, change, 204},
		{"deleting", "DELETE", "/api/night", "", change, 405},
		{"a row", "GET", "/api/row?shot=shot_2", "", nil, 200},
		{"no row", "GET", "/api/row?shot=../../etc/passwd", "", nil, 404},
		{"a file as shot", "GET", "/picture/density?shot=%2e%2e%2fetc%2fpasswd", "", nil, 404},
		{"a picture", "GET", "/picture/density?shot=shot_2", "", nil, 200},
		{"no such picture", "GET", "/picture/other?shot=shot_2", "", nil, 404},
		{"a path upwards is cleaned", "GET", "/../page.go", "", nil, 307},
		{"and is not there", "GET", "/page.go", "", nil, 404},
		{"a path upwards, in disguise", "GET", "/%2e%2e/page.go", "", nil, 404},
		{"no such column", "GET", "/api/column?name=reason", "", nil, 404},
		{"a column", "GET", "/api/column?name=atoms", "", nil, 200},
	}
	for _, test := range tests {
		status, body := ask(t, test.method, url+test.path, test.body, test.headers...)
		if status != test.status {
			t.Errorf("%s: status %d, want %d: %s", test.name, status, test.status, body)
		}
	}
	if diff := cmp.Diff([]string{"shot_2: x"}, s.judged); diff != "" {
		t.Error(diff)
	}
	if s.drawn != image.Rect(1, 2, 30, 40) || !s.undone {
		t.Errorf("drawn %v, taken back %v", s.drawn, s.undone)
	}
}

// Beyond this machine nothing is served without the token, which the address carries once.
func TestToken(t *testing.T) {
	_, _, url := newServer(t, "sesame")
	base := strings.TrimSuffix(url, "?token=sesame")
	base = strings.TrimSuffix(base, "/")
	for path, want := range map[string]int{
		"/": 403, "/api/night": 403, "/events": 403, "/style.css": 403, "/?token=sesam": 403, "/?token=": 403, "/?token=sesame": 303,
	} {
		if status, _ := ask(t, "GET", base+path, ""); status != want {
			t.Errorf("%s: status %d, want %d", path, status, want)
		}
	}
	name := "fallshadow" + base[strings.LastIndex(base, ":")+1:]
	if status, _ := ask(t, "GET", base+"/api/night", "", "Cookie", name+"=sesame"); status != 200 {
		t.Errorf("with the cookie: status %d", status)
	}
	if status, _ := ask(t, "GET", base+"/api/night", "", "Cookie", name+"=other"); status != 403 {
		t.Errorf("with another cookie: status %d", status)
	}
}

// One browser may look at two pages of a machine: cookies are the same for all its ports, so
// that each needs one of its own.
func TestTwoPagesInOneBrowser(t *testing.T) {
	jar, err := cookiejar.New(nil)
	if err != nil {
		t.Fatal(err)
	}
	client := http.Client{Jar: jar}
	_, _, one := newServer(t, "sesame")
	_, _, two := newServer(t, "thyme")
	for _, url := range []string{one, two, strings.TrimSuffix(one, "?token=sesame"), strings.TrimSuffix(two, "?token=thyme")} {
		r, err := client.Get(url)
		if err != nil {
			t.Fatal(err)
		}
		r.Body.Close()
		if r.StatusCode != 200 {
			t.Errorf("%s: status %d", url, r.StatusCode)
		}
	}
}

// An address that other machines reach gets a token by itself, loopback none.
func TestTokenIsMadeUp(t *testing.T) {
	for address, want := range map[string]bool{"127.0.0.1:0": false, "localhost:0": false, "0.0.0.0:0": true} {
		p := New("night")
		l, url, err := p.Listen(address, "")
		if err != nil {
			t.Fatal(err)
		}
		l.Close()
		if got := strings.Contains(url, "token="); got != want || want && len(p.guard.token) < 20 {
			t.Errorf("%s: %s, token %q", address, url, p.guard.token)
		}
	}
	if _, _, err := New("night").Listen("nonsense", ""); err == nil {
		t.Error("an address without a port was taken")
	}
}

// What files bring in goes out as JSON text, in which no markup stands.
func TestHostileNames(t *testing.T) {
	_, _, url := newServer(t, "")
	_, body := ask(t, "GET", url+"/api/night", "")
	if strings.Contains(body, "<img") {
		t.Error("markup stands in the answer as it is")
	}
	var night struct{ Rows []struct{ Shot string } }
	if err := json.Unmarshal([]byte(body), &night); err != nil || night.Rows[2].Shot != hostile {
		t.Errorf("%v, %+v", err, night)
	}
	for _, path := range []string{"/", "/style.css", "/api/night"} {
		r, err := http.Get(url + path)
		if err != nil {
			t.Fatal(err)
		}
		r.Body.Close()
		if policy := r.Header.Get("Content-Security-Policy"); !strings.Contains(policy, "default-src 'self'") || strings.Contains(policy, "unsafe") {
			t.Errorf("%s: policy %q", path, policy)
		}
	}
}

// A row tells its numbers with the digits that their errors leave.
func TestDetail(t *testing.T) {
	p, s := New("night"), newStill()
	p.Show(s)
	d := p.detail(&s.rows[0])
	want := []report.Card{
		{Name: "atoms", Label: "N", Value: "123\u2009500", Err: "± 800", Cal: "± 2900"},
		{Name: "fraction", Label: "N₀/N", Value: "< 0.012"},
	}
	if diff := cmp.Diff(want, d.Cards); diff != "" {
		t.Error(diff)
	}
	if d.Flight != "16 ms" || len(d.Scan) != 1 || d.Numbers["RAMP"] != 2.5 || d.Region != "left out" || !slices.Contains(d.Flags, "provisional") {
		t.Errorf("%+v", d)
	}
}

// events reads the kinds of the next n events.
func events(t *testing.T, url, after string, n int) (kinds []string, last string) {
	t.Helper()
	ctx, cancel := context.WithTimeout(context.Background(), time.Minute)
	defer cancel()
	r, err := http.NewRequestWithContext(ctx, "GET", url+"/events", nil)
	if err != nil {
		t.Fatal(err)
	}
	r.Header.Set("Last-Event-ID", after)
	response, err := http.DefaultClient.Do(r)
	if err != nil {
		t.Fatal(err)
	}
	defer response.Body.Close()
	for lines := bufio.NewScanner(response.Body); len(kinds) < n && lines.Scan(); {
		if id, ok := strings.CutPrefix(lines.Text(), "id: "); ok {
			last = id
		}
		if kind, ok := strings.CutPrefix(lines.Text(), "event: "); ok {
			kinds = append(kinds, kind)
		}
	}
	return kinds, last
}

// Who comes back gets what was missed, or word to begin anew.
func TestCatchUp(t *testing.T) {
	p, _, url := newServer(t, "")
	p.Notes([]string{"a"})
	first := p.stream.last()
	p.Changed()
	p.Row(&ledger.Row{Shot: "shot_3"})
	if kinds, last := events(t, url, first, 2); !slices.Equal(kinds, []string{"changed", "row"}) || last != p.stream.last() {
		t.Errorf("missed %v up to %s", kinds, last)
	}
	for range 3 * keep {
		p.Changed()
	}
	for _, after := range []string{first, "", "otherrun-3", p.stream.start + "-999999", p.stream.start + "-x"} {
		if kinds, last := events(t, url, after, 1); !slices.Equal(kinds, []string{"begin"}) || last != p.stream.last() {
			t.Errorf("after %q: %v, %s", after, kinds, last)
		}
	}
	if n := len(p.stream.kept); n > 2*keep {
		t.Errorf("%d events are kept", n)
	}
}

// Shots are listed as they came, and by name where that is not known, and the last one of
// them is told in full.
func TestListedAsTheyCame(t *testing.T) {
	_, s, url := newServer(t, "")
	at := func(ms int64) time.Time { return time.UnixMilli(1764617000000 + ms) }
	s.rows = nil
	for _, shot := range []string{"bec_1", "bec_2", "mot_1", "mot_2", "mot_10"} {
		s.rows = append(s.rows, ledger.Row{Shot: shot})
	}
	for _, test := range []struct {
		came map[string]time.Time
		want []string
	}{
		{map[string]time.Time{"mot_1": at(1), "mot_2": at(2), "bec_1": at(3), "mot_10": at(4), "bec_2": at(5)}, []string{"mot_1", "mot_2", "bec_1", "mot_10", "bec_2"}},
		{map[string]time.Time{"mot_1": at(9), "mot_2": at(9), "mot_10": at(9), "bec_1": at(8), "bec_2": at(20)}, []string{"bec_1", "mot_1", "mot_2", "mot_10", "bec_2"}},
		{nil, []string{"bec_1", "bec_2", "mot_1", "mot_2", "mot_10"}},
	} {
		s.came = test.came
		_, body := ask(t, "GET", url+"/api/night", "")
		var night struct {
			Rows []struct{ Shot string }
			Last struct{ Shot string }
		}
		if err := json.Unmarshal([]byte(body), &night); err != nil {
			t.Fatal(err)
		}
		var got []string
		for _, r := range night.Rows {
			got = append(got, r.Shot)
		}
		if diff := cmp.Diff(test.want, got); diff != "" || night.Last.Shot != got[len(got)-1] {
			t.Errorf("last %q, %s", night.Last.Shot, diff)
		}
	}
}

// A picture may be kept by a browser under the mark of its view alone.
func TestPictureMark(t *testing.T) {
	_, _, url := newServer(t, "")
	_, body := ask(t, "GET", url+"/api/view?shot=shot_2", "")
	var v struct{ Mark string }
	if err := json.Unmarshal([]byte(body), &v); err != nil || v.Mark == "" {
		t.Fatalf("%v, %s", err, body)
	}
	for mark, want := range map[string]string{v.Mark: "private, max-age=3600, immutable", "old": "no-store", "": "no-store"} {
		r, err := http.Get(url + "/picture/density?shot=shot_2&mark=" + mark)
		if err != nil {
			t.Fatal(err)
		}
		r.Body.Close()
		if got := r.Header.Get("Cache-Control"); got != want {
			t.Errorf("mark %q: %q, want %q", mark, got, want)
		}
	}
}

// A browser that does not read is cut off and does not hold up the others.
func TestSlowBrowser(t *testing.T) {
	s := newStream()
	slow, _ := s.join("")
	for i := range 2 * pending {
		s.send("n", i)
	}
	n := 0
	for range slow {
		n++
	}
	if n != pending {
		t.Errorf("%d events were kept for it", n)
	}
}

// Few views are kept; others are measured again, one at a time, and a shot that cannot be
// read has none.
func TestViews(t *testing.T) {
	s := newStill()
	measured := 0
	v := newViews(func(ctx context.Context, shot string) (*report.Facts, *imageio.Raw, error) {
		measured++
		return s.Measure(ctx, shot)
	})
	ctx := context.Background()
	for i := range 3 * remembered {
		if _, err := v.get(ctx, &ledger.Row{Shot: fmt.Sprint(i % (2 * remembered))}, false); err != nil {
			t.Fatal(err)
		}
	}
	if v.recent.Len() != remembered || len(v.at) != remembered {
		t.Errorf("%d views are kept", v.recent.Len())
	}
	before := measured
	got, err := v.get(ctx, &ledger.Row{Shot: fmt.Sprint(remembered - 1)}, false)
	if err != nil || measured != before || got.Frame != [2]int{8, 6} || got.Region != [4]int{2, 2, 6, 5} || got.pictures["residual"] == nil {
		t.Errorf("%+v, %v, measured %d times more", got, err, measured-before)
	}
	if _, err := v.get(ctx, &ledger.Row{Shot: "unread"}, false); err == nil {
		t.Error("there is a view of what cannot be read")
	}
}

// A view serves the pixels it was drawn from: not others that stand under the same name now,
// as after a shot was deleted and another renamed, and not a file that cannot be read.
func TestViewOfOtherPixels(t *testing.T) {
	p, s, url := newServer(t, "")
	view := func() string {
		_, body := ask(t, "GET", url+"/api/view?shot=shot_2", "")
		var v struct{ Mark string }
		if err := json.Unmarshal([]byte(body), &v); err != nil {
			t.Fatalf("%v, %s", err, body)
		}
		return v.Mark
	}
	f, raw, _ := s.Measure(context.Background(), "shot_2")
	s.rows[0].Content = ledger.Digest{1}
	raw.Digest = s.rows[0].Content
	p.Picture("shot_2", f, raw)
	first := view()
	if again := view(); again != first {
		t.Error("a view was not kept")
	}
	s.rows[0].Content = ledger.Digest{2}
	if other := view(); other == first {
		t.Error("other pixels are shown by the view of the first")
	}
	s.rows[1].Content = ledger.Digest{3}
	p.Picture("unread", f, raw)
	if status, body := ask(t, "GET", url+"/api/view?shot=unread", ""); status == 200 {
		t.Errorf("what cannot be read is shown by the view of before: %s", body)
	}
}

// The page stays below 300 kB before pictures, also with a night of 1,500 shots.
func TestWeight(t *testing.T) {
	p, s := New("night"), newStill()
	p.Show(s)
	row := s.rows[0]
	s.rows = nil
	for i := range 1500 {
		row.Shot = fmt.Sprintf("ramp_%04d", i)
		s.rows = append(s.rows, row)
	}
	p.guard, _ = newGuard(&net.TCPAddr{IP: net.IPv4(127, 0, 0, 1), Port: 80}, "127.0.0.1:80", "")
	total := 0
	for _, path := range []string{
		"/", "/style.css", "/theme.js", "/app.js", "/api.js", "/dom.js", "/natural.js", "/shots.js", "/numbers.js", "/reading.js", "/marks.js", "/picture.js",
		"/region.js", "/cuts.js", "/trend.js", "/live.js", "/icon.svg", "/uplot/uPlot.iife.min.js", "/uplot/uPlot.min.css",
		"/api/night", "/api/column?name=atoms",
	} {
		r := httptest.NewRequest("GET", "http://127.0.0.1"+path, nil)
		r.Header.Set("Accept-Encoding", "gzip")
		w := httptest.NewRecorder()
		p.handler().ServeHTTP(w, r)
		if w.Code != 200 || w.Body.Len() == 0 {
			t.Errorf("%s: status %d", path, w.Code)
		}
		total += w.Body.Len()
	}
	t.Logf("%d bytes", total)
	if total > 300e3 {
		t.Errorf("the page weighs %d bytes", total)
	}
}
