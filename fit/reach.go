package fit

import "math"

// reach measures places by an ellipse around a centre: r ᵀS⁻¹r is 1 on it.
type reach struct{ x0, y0, xx, xy, yy float64 }

func (e ellipse) reach(x0, y0 float64) reach {
	inv := e.shape().Inverse()
	return reach{x0, y0, inv.XX, inv.XY, inv.YY}
}

func (r *reach) at(x, y float64) float64 {
	dx, dy := x-r.x0, y-r.y0
	return dx*(r.xx*dx+2*r.xy*dy) + r.yy*dy*dy
}

// row returns the columns [a,b), of w, of row y where r ᵀS⁻¹r is below most.
func (r *reach) row(y, most float64, w int) (a, b int) {
	dy := y - r.y0
	half := r.xy * dy
	d := half*half - r.xx*(r.yy*dy*dy-most)
	if !(d > 0) || !(r.xx > 0) {
		return 0, 0
	}
	d = math.Sqrt(d)
	lo, hi := r.x0+(-half-d)/r.xx, r.x0+(-half+d)/r.xx
	if !(hi >= 0 && lo <= float64(w-1)) {
		return 0, 0
	}
	return int(math.Ceil(max(lo, 0))), int(min(hi, float64(w-1))) + 1
}

// cover are the places within some reach of either part of a cloud.
type cover struct {
	parts [2]reach
	most  [2]float64 // 0 for a part that is not there
}

// cover returns the places within the squares of the given widths or radii.
func (s *session) cover(st *state, thermal, condensate float64) cover {
	q := &st.p
	c := cover{parts: [2]reach{s.tmpl.thermalOf(q).reach(q[pX], q[pY]), s.tmpl.condensateOf(q).reach(q[pX], q[pY])}}
	if st.kind.thermal {
		c.most[0] = thermal
	}
	if st.kind.condensate {
		c.most[1] = condensate
	}
	return c
}

func (c *cover) holds(x, y float64) bool {
	return c.parts[0].at(x, y) < c.most[0] || c.parts[1].at(x, y) < c.most[1]
}

// row visits the runs [a,b) of covered columns of row y, of w.
func (c *cover) row(y float64, w int, visit func(a, b int)) {
	a0, b0 := c.parts[0].row(y, c.most[0], w)
	a1, b1 := c.parts[1].row(y, c.most[1], w)
	switch {
	case a0 >= b0:
		a0, b0 = a1, b1
	case a1 < b1 && a1 <= b0 && a0 <= b1:
		a0, b0 = min(a0, a1), max(b0, b1)
	case a1 < b1:
		visit(a1, b1)
	}
	if a0 < b0 {
		visit(a0, b0)
	}
}
