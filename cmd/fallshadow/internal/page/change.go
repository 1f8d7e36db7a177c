package page

import (
	"image"
	"net/http"
	"strings"
	"unicode/utf8"

	"fallshadow/cmd/fallshadow/internal/ledger"
)

// longest is the number of letters that a word against a shot may have.
const longest = 200

// takeVerdict stores a word against a shot; an empty one takes it back.
func (p *Page) takeVerdict(r *http.Request) (any, error) {
	var v struct{ Shot, Word string }
	if err := decode(r, &v); err != nil {
		return nil, err
	}
	v.Word = strings.Join(strings.Fields(v.Word), " ")
	if utf8.RuneCountInString(v.Word) > longest {
		return nil, &refusal{http.StatusBadRequest, "a word against a shot has 200 letters at most"}
	}
	if _, err := p.shot(r, v.Shot); err != nil {
		return nil, err
	}
	return nil, p.night.Judge(r.Context(), v.Shot, v.Word)
}

// takeRegion draws a region, or with none takes back the one that waits.
func (p *Page) takeRegion(r *http.Request) (any, error) {
	var v struct{ Region *[4]int }
	if err := decode(r, &v); err != nil {
		return nil, err
	}
	if v.Region == nil {
		p.night.Undraw()
		return nil, nil
	}
	g := *v.Region
	if err := p.night.Draw(image.Rect(g[0], g[1], g[2], g[3])); err != nil {
		return nil, &refusal{http.StatusBadRequest, err.Error()}
	}
	return nil, nil
}

func (p *Page) serveView(r *http.Request) (any, error) {
	row, err := p.shot(r, r.URL.Query().Get("shot"))
	if err != nil {
		return nil, err
	}
	return p.view(r, row)
}

// view returns the view of a row. One that was fitted without the region drawn by hand is stale,
// but measured without it too.
func (p *Page) view(r *http.Request, row *ledger.Row) (*view, error) {
	return p.views.get(r.Context(), row, row.Stale && p.night.Drawn(row) != "left out")
}

// servePicture sends a picture of a shot: density, residual or frame.
func (p *Page) servePicture(w http.ResponseWriter, r *http.Request) {
	row, err := p.shot(r, r.URL.Query().Get("shot"))
	var v *view
	if err == nil {
		v, err = p.view(r, row)
	}
	if err != nil || v.pictures[r.PathValue("kind")] == nil {
		http.Error(w, "there is no such picture", http.StatusNotFound)
		return
	}
	w.Header().Set("Content-Type", "image/png")
	if v.Mark == r.URL.Query().Get("mark") { // the address holds for these bytes alone
		w.Header().Set("Cache-Control", "private, max-age=3600, immutable")
	}
	w.Write(v.pictures[r.PathValue("kind")])
}
