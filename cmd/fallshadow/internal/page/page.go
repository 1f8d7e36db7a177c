// Package page serves a night that is being watched to a browser: one local page with the
// last shot, its numbers and the trend, and what a person may say of shots and regions.
package page

import (
	"context"
	"embed"
	"errors"
	"fmt"
	"image"
	"io/fs"
	"iter"
	"net"
	"net/http"
	"sync/atomic"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/imageio"
)

// Night is the night that is shown. Its methods may be called from any goroutine.
type Night interface {
	// Each yields all rows in natural order; a row holds until the next.
	Each(ctx context.Context) iter.Seq2[*ledger.Row, error]
	// Arrived tells when the shot of a row came.
	Arrived(r *ledger.Row) time.Time
	Row(ctx context.Context, shot string) (*ledger.Row, error)
	// Measure fits a shot once more, for its picture.
	Measure(ctx context.Context, shot string) (*report.Facts, *imageio.Raw, error)
	Scan() []string
	SettingsText() string
	Notes() []string
	Region() (now, next *image.Rectangle)
	// Drawn says how a row stands to the region that a person drew and that is in force for
	// its shot: "used", "left out", "unknown", or "" where there is none.
	Drawn(r *ledger.Row) string

	Judge(ctx context.Context, shot, word string) error
	Draw(region image.Rectangle) error
	Undraw()
}

// Page is the server. It is an audience of a watch.
type Page struct {
	name   string // of the night
	night  Night
	guard  guard
	stream *stream
	views  *views
	told   atomic.Int64 // when browsers were told of a row, ms since 1970; 0 before the first
}

//go:embed assets
var embedded embed.FS

var assets = must(fs.Sub(embedded, "assets"))

func must[T any](v T, err error) T {
	if err != nil {
		panic(err) // the files are part of the program
	}
	return v
}

// New returns the page of a night of the given name.
func New(name string) *Page {
	p := &Page{name: name, stream: newStream()}
	p.views = newViews(p.measure)
	return p
}

// Show says which night to show. It is called once, before the page is served.
func (p *Page) Show(n Night) { p.night = n }

func (p *Page) measure(ctx context.Context, shot string) (*report.Facts, *imageio.Raw, error) {
	return p.night.Measure(ctx, shot)
}

// Row tells the browsers of a stored row.
func (p *Page) Row(r *ledger.Row) {
	d := p.detail(r)
	d.Told = time.Now().UnixMilli()
	p.told.Store(d.Told)
	p.stream.send("row", d)
}

// Picture draws a shot and tells the browsers that it can be seen.
func (p *Page) Picture(shot string, f *report.Facts, raw *imageio.Raw) {
	p.views.put(shot, newView(f, raw), raw)
	p.stream.send("picture", shot)
}

// Changed tells the browsers to read all rows again.
func (p *Page) Changed() {
	p.views.forgetStale()
	p.stream.send("changed", nil)
}

// Heard is for who does not see the page.
func (p *Page) Heard(string) {}

// Notes tells the browsers what a person should know.
func (p *Page) Notes(notes []string) { p.stream.send("notes", notes) }

// Listen opens the address of the page. An address beyond this machine needs a token,
// which is in the address that a person is told. A port that is in use is an error that
// wraps the cause.
func (p *Page) Listen(address, token string) (l net.Listener, url string, err error) {
	if l, err = net.Listen("tcp", address); err != nil {
		return nil, "", fmt.Errorf("open the page at %s: %w", address, err)
	}
	p.guard, err = newGuard(l.Addr().(*net.TCPAddr), address, token)
	if err != nil {
		return nil, "", errors.Join(err, l.Close())
	}
	return l, p.guard.url(), nil
}

// Serve serves the page until ctx is done.
func (p *Page) Serve(ctx context.Context, l net.Listener) error {
	s := &http.Server{
		Handler: p.handler(), ReadHeaderTimeout: 5 * time.Second, IdleTimeout: time.Minute,
		BaseContext: func(net.Listener) context.Context { return ctx }, // ends open streams
	}
	stop := context.AfterFunc(ctx, func() {
		soon, cancel := context.WithTimeout(context.Background(), time.Second)
		defer cancel()
		if s.Shutdown(soon) != nil {
			s.Close()
		}
	})
	defer stop()
	if err := s.Serve(l); !errors.Is(err, http.ErrServerClosed) {
		return fmt.Errorf("serve the page: %w", err)
	}
	return nil
}

// handler routes. No path and no parameter becomes the name of a file.
func (p *Page) handler() http.Handler {
	mux := http.NewServeMux()
	mux.Handle("GET /", packed(http.FileServerFS(assets)))
	mux.Handle("GET /api/night", packed(answer(p.serveNight)))
	mux.Handle("GET /api/row", packed(answer(p.serveRow)))
	mux.Handle("GET /api/column", packed(answer(p.serveColumn)))
	mux.Handle("GET /api/view", packed(answer(p.serveView)))
	mux.Handle("POST /api/verdict", answer(p.takeVerdict))
	mux.Handle("POST /api/region", answer(p.takeRegion))
	mux.HandleFunc("GET /picture/{kind}", p.servePicture)
	mux.HandleFunc("GET /events", p.stream.serve)
	return p.guard.protect(mux)
}
