package fit

import "math"

// Maps are the pictures of a fit for the eye, row by row in the pixels of the Picture; NaN
// where a pixel does not count.
type Maps struct {
	Width, Height int
	Density       []float32 // σ0 n by the inverted law
	Thermal       []float32 // of the model, without the camera's blur
	Total         []float32 // both parts
	Seen          []float32 // both parts through the camera's blur, to be held against Density
	Residual      []float32 // counts minus model in standard deviations
}

// maps draws the pictures of the fitted state.
func (s *session) maps(st *state) *Maps {
	l := s.levels[0]
	n := l.w * l.h
	m := &Maps{
		Width: l.w, Height: l.h,
		Density: make([]float32, n), Thermal: make([]float32, n), Total: make([]float32, n),
		Seen: make([]float32, n), Residual: make([]float32, n),
	}
	p := s.problem(0, &st.p, st.kind)
	p.render(&st.p, s.ws.kappa, s.ws.kappa)
	p.residuals(s.ws.kappa, s.ws.resid)
	geo := p.geometry(&st.p, p.blurOn(p.level))
	p.density(&st.p, func(j int, thermal, both []float64) {
		for i := range both {
			o := j*l.w + i
			m.Thermal[o], m.Total[o] = float32(thermal[i]), float32(both[i])
			m.Residual[o] = float32(s.ws.resid[o])
			density, seen := s.seen(&geo, o, float64(i), float64(j))
			m.Density[o], m.Seen[o] = float32(density), float32(seen)
		}
	})
	return m
}

// seen is the density that one pixel shows, and the one that the rendered model shows there.
func (s *session) seen(geo *geometry, o int, x, y float64) (density, model float64) {
	l := s.levels[0]
	switch {
	case l.count[o] == 0:
		return math.NaN(), math.NaN()
	case l.linear:
		plane := geo.plane(x, y)
		return l.atoms[o] - plane, s.ws.kappa[o] - plane
	}
	scale := geo.scale(x, y)
	k := scale * l.light[o]
	floor := math.Max(1, 0.5*math.Sqrt(l.readVariance(o)))
	return s.law.od(math.Max(l.atoms[o], floor)/k, k*l.saturate), s.law.od(s.ws.kappa[o]/scale, k*l.saturate)
}
