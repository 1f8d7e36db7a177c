package figure

import (
	"strings"
	"sync"

	"codeberg.org/go-fonts/liberation/liberationsansitalic"
	"codeberg.org/go-fonts/liberation/liberationsansregular"
	"golang.org/x/image/font"
	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"
	"gonum.org/v1/plot/vg"
)

// Label is text in runs of upright, italic, raised and lowered letters.
type Label []run

type run struct {
	text   string
	italic bool
	level  int // 1 raised, -1 lowered
}

// Plain returns a label that shows the text as it is; names of shots may hold anything.
func Plain(text string) Label { return Label{{text: text}} }

// Markup returns a label of text in which *x* is italic, ^{x} raised and _{x} lowered.
func Markup(text string) Label {
	var l Label
	var italic bool
	level := 0
	emit := func(s string) {
		if s != "" {
			l = append(l, run{s, italic, level})
		}
	}
	for text != "" {
		i := strings.IndexAny(text, "*^_}")
		if i < 0 {
			break
		}
		emit(text[:i])
		switch rest := text[i:]; {
		case strings.HasPrefix(rest, "*"):
			italic = !italic
		case strings.HasPrefix(rest, "^{"):
			level = 1
			i++
		case strings.HasPrefix(rest, "_{"):
			level = -1
			i++
		case rest[0] == '}' && level != 0:
			level = 0
		default:
			emit(rest[:1])
		}
		text = text[i+1:]
	}
	emit(text)
	return l
}

// And returns the label with another behind it.
func (l Label) And(m Label) Label { return append(append(Label(nil), l...), m...) }

// Size and place of raised and lowered runs, in parts of the size of the text.
const (
	smallSize = 0.7
	raise     = 0.36
	lower     = -0.16
)

// typeface is a parsed font; its outlines are drawn as paths, so that a figure looks the
// same whatever fonts a viewer has.
type typeface struct {
	mu   sync.Mutex
	font *sfnt.Font
	buf  sfnt.Buffer
}

var upright = sync.OnceValue(func() *typeface { return parseFont(liberationsansregular.TTF) })
var slanted = sync.OnceValue(func() *typeface { return parseFont(liberationsansitalic.TTF) })

func parseFont(data []byte) *typeface {
	f, err := sfnt.Parse(data)
	if err != nil {
		panic(err) // the bytes are part of the program
	}
	return &typeface{font: f}
}

// each calls do with the outline of every letter and where it starts, in parts of the size,
// and returns the width of the text.
func (t *typeface) each(text string, do func(s sfnt.Segments, x float64)) float64 {
	t.mu.Lock()
	defer t.mu.Unlock()
	em := fixed.Int26_6(t.font.UnitsPerEm())
	x := 0.0
	for _, r := range text {
		// Letters that the font lacks get its box of the missing one, glyph 0.
		g, err := t.font.GlyphIndex(&t.buf, r)
		if err != nil {
			g = 0
		}
		if do != nil {
			if s, err := t.font.LoadGlyph(&t.buf, g, em, nil); err == nil {
				do(s, x)
			}
		}
		if a, err := t.font.GlyphAdvance(&t.buf, g, em, font.HintingNone); err == nil {
			x += float64(a) / float64(em)
		}
	}
	return x
}

// walk goes through the runs with the size and the place of each, and returns the width.
func (l Label) walk(size vg.Length, do func(r run, size, x, y vg.Length)) vg.Length {
	x := vg.Length(0)
	for i, r := range l {
		s, y := size, vg.Length(0)
		switch {
		case r.level > 0:
			s, y = size*smallSize, size*raise
		case r.level < 0:
			s, y = size*smallSize, size*lower
		}
		width := r.face().each(r.text, nil)
		// An index above an index stands over it, not behind it.
		stacked := i > 0 && r.level*l[i-1].level < 0
		at := x
		if stacked {
			at -= vg.Length(l[i-1].face().each(l[i-1].text, nil)) * size * smallSize
		}
		if do != nil {
			do(r, s, at, y)
		}
		x = max(x, at+vg.Length(width)*s)
	}
	return x
}

func (r run) face() *typeface {
	if r.italic {
		return slanted()
	}
	return upright()
}

// width returns the length of the label on one line.
func (l Label) width(size vg.Length) vg.Length { return l.walk(size, nil) }

// path returns the outlines of the label whose base line begins at the point.
func (l Label) path(size vg.Length, at vg.Point) vg.Path {
	var p vg.Path
	l.walk(size, func(r run, s, dx, dy vg.Length) {
		em := vg.Length(r.face().font.UnitsPerEm())
		r.face().each(r.text, func(segments sfnt.Segments, x float64) {
			place := func(q fixed.Point26_6) vg.Point {
				// Outlines have y downwards.
				return vg.Point{
					X: at.X + dx + s*(vg.Length(x)+vg.Length(q.X)/em),
					Y: at.Y + dy - s*vg.Length(q.Y)/em,
				}
			}
			outline(&p, segments, place)
		})
	})
	return p
}

func outline(p *vg.Path, segments sfnt.Segments, place func(fixed.Point26_6) vg.Point) {
	open := false
	for _, s := range segments {
		switch s.Op {
		case sfnt.SegmentOpMoveTo:
			if open {
				p.Close()
			}
			open = true
			p.Move(place(s.Args[0]))
		case sfnt.SegmentOpLineTo:
			p.Line(place(s.Args[0]))
		case sfnt.SegmentOpQuadTo:
			p.QuadTo(place(s.Args[0]), place(s.Args[1]))
		case sfnt.SegmentOpCubeTo:
			p.CubeTo(place(s.Args[0]), place(s.Args[1]), place(s.Args[2]))
		}
	}
	if open {
		p.Close()
	}
}
