package fit

import (
	"math"
	"sort"

	"fallshadow/model"
	"fallshadow/model/bose"
)

// guess is what a first look at a coarse picture tells, with no help from anyone.
type guess struct {
	light  float64 // ln of the scale of the reference
	x, y   float64 // centre, px of the full picture
	peak   float64 // σ0 n
	moment [3]float64
	sum    float64 // of σ0 n over the window that holds it, in pixels
	core   float64 // geometric mean half width at half the peak, px
	signal float64 // of the cloud's sum, in standard deviations
}

// look finds the places where a cloud may be on a coarse level, the likeliest first: the window in
// which the summed density stands farthest above its noise, then moments in a window that
// follows it; and the same once more with that cloud taken away, where what is left is not
// much less.
func (p *problem) look() []guess {
	l := p.level
	light := l.borderLight()
	od, noise := p.densityMap(light)
	if base := borderMedian(od, l.w, l.h); !math.IsNaN(base) {
		for i := range od {
			od[i] -= base
		}
	}
	spread := func([]float64, int) float64 { return noise }
	if l.fullW*l.fullH > Large {
		flatten(od, l.w, l.h)
		spread = func(sum []float64, r int) float64 { return math.Max(noise, tileSpread(sum, r, l.w, l.h)) }
	}
	var list []guess
	for len(list) < 2 {
		g := guess{light: light}
		x, y, half, signal := bestWindow(od, spread, l.w, l.h)
		g.signal = signal
		g.follow(od, l, x, y, half)
		if len(list) > 0 && signal < secondSignal*list[0].signal {
			break
		}
		list = append(list, g)
		g.erase(od, l)
	}
	return list
}

// secondSignal is the share of the first signal that a second place needs to be tried.
const secondSignal = 0.3

// erased is how many widths of a cloud are taken away before another is looked for: the moments
// of a window are smaller than those of the wings beyond it.
const erased = 5

// erase sets the density to 0 where the cloud is.
func (g *guess) erase(od []float64, l *level) {
	in := model.Shape{XX: g.moment[0], XY: g.moment[1], YY: g.moment[2]}.Inverse()
	const far = erased * erased
	for o := range od {
		dx, dy := l.at(o%l.w)-g.x, l.at(o/l.w)-g.y
		if !(dx*(in.XX*dx+2*in.XY*dy)+in.YY*dy*dy > far) {
			od[o] = 0
		}
	}
}

// densityMap inverts the absorption law bin by bin; black bins get what their noise still
// allows. It also returns the typical noise of a bin.
func (p *problem) densityMap(light float64) (od []float64, noise float64) {
	l := p.level
	od = make([]float64, l.w*l.h)
	if l.linear {
		copy(od, l.atoms)
		for o := range od {
			if l.count[o] == 0 || !finite(od[o]) {
				od[o] = 0
			}
		}
		return od, math.Max(spreadOf(od, l.w, l.h), 1e-12)
	}
	k := math.Exp(light)
	for o := range od {
		if l.count[o] == 0 || !(l.smooth[o] > 0) {
			continue
		}
		floor := 1.5*math.Sqrt(l.readVariance(o)) + 1e-3*l.smooth[o]
		t := math.Max(l.atoms[o], floor) / (k * l.smooth[o])
		if v := p.law.od(t, k*l.smooth[o]*l.saturate/l.count[o]); finite(v) {
			od[o] = v
		}
	}
	return od, math.Max(spreadOf(od, l.w, l.h), 1e-12)
}

func finite(x float64) bool { return math.Abs(x) <= math.MaxFloat64 }

// borderLight is the median over the outer ring of ln(atoms/reference).
func (l *level) borderLight() float64 {
	if l.linear {
		return 0
	}
	var v []float64
	ring(l.w, l.h, func(o int) {
		if l.count[o] > 0 && l.smooth[o] > 0 && l.atoms[o] > 0 {
			v = append(v, math.Log(l.atoms[o]/l.smooth[o]))
		}
	})
	if len(v) == 0 {
		return 0
	}
	return medianOf(v)
}

func borderMedian(od []float64, w, h int) float64 {
	var v []float64
	ring(w, h, func(o int) { v = append(v, od[o]) })
	if len(v) == 0 {
		return math.NaN()
	}
	return medianOf(v)
}

// ring visits the outer eighth of a picture.
func ring(w, h int, f func(o int)) {
	bx, by := max(1, w/8), max(1, h/8)
	for j := range h {
		for i := range w {
			if i < bx || i >= w-bx || j < by || j >= h-by {
				f(j*w + i)
			}
		}
	}
}

// spreadOf is a robust standard deviation of neighbours' differences.
func spreadOf(v []float64, w, h int) float64 {
	var d []float64
	for j := range h {
		for i := 1; i < w; i++ {
			d = append(d, math.Abs(v[j*w+i]-v[j*w+i-1]))
		}
	}
	if len(d) == 0 {
		return 0
	}
	return medianOf(d) / (0.6745 * math.Sqrt2)
}

func medianOf(v []float64) float64 {
	sort.Float64s(v)
	return v[len(v)/2]
}

// bestWindow returns the square window, of half sizes 1, 2, 4, … bins, whose sum is largest
// against the noise of so many bins: centre in bins, half size, and that ratio. spread is the
// noise of a bin as windows of a half size see it, from sums over all bins before a corner.
func bestWindow(v []float64, spread func(sum []float64, r int) float64, w, h int) (x, y, half int, best float64) {
	sum := make([]float64, (w+1)*(h+1))
	for j := range h {
		row := 0.0
		for i := range w {
			row += v[j*w+i]
			sum[(j+1)*(w+1)+i+1] = sum[j*(w+1)+i+1] + row
		}
	}
	best = math.Inf(-1)
	for r := 1; r <= max(w, h)/4+1; r *= 2 {
		noise := spread(sum, r)
		for j := range h {
			for i := range w {
				x0, x1, y0, y1 := max(i-r, 0), min(i+r+1, w), max(j-r, 0), min(j+r+1, h)
				s := sum[y1*(w+1)+x1] - sum[y0*(w+1)+x1] - sum[y1*(w+1)+x0] + sum[y0*(w+1)+x0]
				if q := s / (noise * math.Sqrt(float64((x1-x0)*(y1-y0)))); q > best {
					x, y, half, best = i, j, r, q
				}
			}
		}
	}
	return x, y, half, best
}

// follow takes moments in a window that follows centre and size a few times, and measures the
// core above half of the peak.
func (g *guess) follow(od []float64, l *level, x, y, half int) {
	cx, cy := float64(x), float64(y)
	rx, ry := 2*float64(half)+1, 2*float64(half)+1
	sxx, sxy, syy := leastMoment, 0.0, leastMoment
	for range 6 {
		var s, mx, my, xx, xy, yy float64
		each(l, cx, cy, rx, ry, func(o int, dx, dy float64) {
			v := od[o]
			s += v
			mx += v * dx
			my += v * dy
			xx += v * dx * dx
			xy += v * dx * dy
			yy += v * dy * dy
		})
		if !(s > 0) {
			break
		}
		dx, dy := clamp(mx/s, rx/2), clamp(my/s, ry/2)
		cx, cy = cx+dx, cy+dy
		sxx, syy = clampLow(xx/s-dx*dx, leastMoment), clampLow(yy/s-dy*dy, leastMoment)
		sxy = clamp(xy/s-dx*dy, mostOblique*math.Sqrt(sxx*syy))
		rx, ry = math.Max(2, 2.5*math.Sqrt(sxx)), math.Max(2, 2.5*math.Sqrt(syy))
	}
	bin := float64(l.bin)
	each(l, cx, cy, rx, ry, func(o int, _, _ float64) {
		g.peak = math.Max(g.peak, od[o])
		g.sum += od[o] * bin * bin
	})
	n := 0
	each(l, cx, cy, rx, ry, func(o int, _, _ float64) {
		if od[o] > 0.5*g.peak {
			n++
		}
	})
	g.x, g.y = cx*bin+0.5*(bin-1), cy*bin+0.5*(bin-1)
	g.moment = [3]float64{sxx * bin * bin, sxy * bin * bin, syy * bin * bin}
	g.core = bin * math.Sqrt(float64(max(n, 1))/math.Pi)
}

// A density that is not positive everywhere can have any second moments: these are the least
// square of a size, bins², and the largest share of the mixed one, so that they are an ellipse's.
const leastMoment, mostOblique = 0.5, 0.95

func clamp(v, most float64) float64 { return math.Max(-most, math.Min(most, v)) }

func clampLow(v, least float64) float64 {
	if !(v > least) {
		return least
	}
	return v
}

// each visits the bins of a window around cx, cy.
func each(l *level, cx, cy, rx, ry float64, f func(o int, dx, dy float64)) {
	for j := max(int(cy-ry), 0); j <= min(int(cy+ry), l.h-1); j++ {
		for i := max(int(cx-rx), 0); i <= min(int(cx+rx), l.w-1); i++ {
			f(j*l.w+i, float64(i)-cx, float64(j)-cy)
		}
	}
}

// starts returns the points from which the fits of a first look begin. Some follow the picture:
// the size of the thermal part from the moments of the whole cloud, over and under it, the
// condensate from the core; they do not mind wrong settings. The others follow the physics of as
// many atoms as were counted, at several condensate fractions.
func (s *session) starts(g guess, k kind) []params {
	t := &s.tmpl
	base := params{pX: g.x, pY: g.y, pLight: g.light}
	wide := math.Sqrt((g.moment[0] + g.moment[2]) / (t.thermal.square[0] + t.thermal.square[1]))
	c := t.condensate.square
	core := g.core / 0.6 / math.Sqrt(math.Sqrt(c[0]*c[1]))
	whole := math.Sqrt(7 * (g.moment[0] + g.moment[2]) / (c[0] + c[1]))
	base[pWidth1] = math.Log(wide)
	var list []params
	add := func(thermal, width, condensate, radius float64) {
		q := base
		q[pThermal], q[pCondensate] = thermal*g.peak, condensate*g.peak
		q[pWidth1] += math.Log(width)
		if !k.fixRadius {
			q[pRadius1] = math.Log(radius)
		}
		q[pWidth2], q[pRadius2] = q[pWidth1], q[pRadius1]
		q[pAlpha] = 0.5
		if k.condensate {
			q[pAlpha] = 0.1 // where it is free
		}
		list = append(list, q)
	}
	switch {
	case k.thermal && k.condensate:
		add(0.4, 1.1, 0.6, core)
		add(0.15, 1.8, 0.85, core)
		add(0.7, 1, 0.3, core/2)
		add(0.1, 1, 0.9, whole)
		for _, f := range []float64{0.04, 0.2, 0.6, 0.95} {
			list = s.fraction(list, base, g, f, k)
		}
	case k.thermal:
		add(1, 1.1, 0, core)
		add(1, 0.5, 0, core)
	default:
		add(0, 1, 1, core)
		add(0, 1, 1, whole)
		list = s.fraction(list, base, g, 0.999, k)
	}
	return list
}

// fraction adds the start of an ideal gas with the counted atoms, a part f of them condensed.
func (s *session) fraction(list []params, q params, g guess, f float64, k kind) []params {
	n := math.Max(g.sum, 1) * s.perSum()
	T := model.CriticalTemperature(n, s.lab.Trap) * math.Cbrt(1-f)
	q[pWidth1] = 0.5 * math.Log(T/templateT)
	if sp := &s.lab.Species; !k.fixRadius {
		mu, err := model.Mu(f*n, sp.Mass, sp.ScatteringLength, s.lab.Trap)
		if err != nil {
			return list
		}
		q[pRadius1] = 0.5 * math.Log(mu/templateMu)
	}
	q[pWidth2], q[pRadius2] = q[pWidth1], q[pRadius1]
	e, c := s.tmpl.thermalOf(&q), s.tmpl.condensateOf(&q)
	q[pThermal] = (1 - f) * g.sum / (2 * math.Pi * math.Sqrt(e.square[0]*e.square[1]) * bose.Zeta3 / bose.Zeta2)
	q[pCondensate] = f * g.sum / (s.tmpl.condensateArea() * math.Sqrt(c.square[0]*c.square[1]))
	q[pAlpha] = 0.1
	return append(list, q)
}
