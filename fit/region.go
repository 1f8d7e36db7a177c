package fit

import "math"

// room is the rectangle, in pixels of the full picture, where the cloud is blurred pixel by
// pixel; empty when X1 <= X0. It stands still within a minimisation.
type room struct{ x0, y0, x1, y1 float64 }

// box is a room in pixels of a level, half open.
type box struct{ x0, y0, x1, y1 int }

// gap returns the columns [a,b) of row j that the box takes from a row of w bins.
func (b box) gap(j, w int) (x0, x1 int) {
	if j < b.y0 || j >= b.y1 {
		return w, w
	}
	return b.x0, b.x1
}

func (b box) empty() bool { return b.x1 <= b.x0 || b.y1 <= b.y0 }

func (r room) bounds(l *level) box {
	b := box{l.index(r.x0), l.index(r.y0), l.index(r.x1), l.index(r.y1)}
	b.x0, b.x1 = min(max(b.x0, 0), l.w), min(max(b.x1, 0), l.w)
	b.y0, b.y1 = min(max(b.y0, 0), l.h), min(max(b.y1, 0), l.h)
	if b.empty() {
		return box{}
	}
	return b
}

func (l *level) index(x float64) int {
	if !(math.Abs(x) < 1e6) {
		x = math.Copysign(1e6, x)
	}
	return int(math.Floor((x + 0.5) / float64(l.bin)))
}

// around returns the room that holds an ellipse grown by the factor f and the margin m (px).
func around(x, y float64, e ellipse, f, m float64) room {
	s := e.shape()
	dx, dy := f*math.Sqrt(s.XX)+m, f*math.Sqrt(s.YY)+m
	return room{x - dx, y - dy, x + dx + 1, y + dy + 1}
}

func (r room) union(q room) room {
	if r.x1 <= r.x0 {
		return q
	}
	if q.x1 <= q.x0 {
		return r
	}
	return room{math.Min(r.x0, q.x0), math.Min(r.y0, q.y0), math.Max(r.x1, q.x1), math.Max(r.y1, q.y1)}
}

// used says whether a density parameter steers the fit: one that is held does not, and of
// two that are tied the first carries both.
func (p *problem) used(i int) bool {
	t := p.ties
	if t == nil {
		return true
	}
	return t.slot[i] >= 0 && !(t.merged(i) && (i == pWidth2 || i == pRadius2))
}
