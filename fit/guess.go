package fit

import (
	"math"
	"sort"
)

// guess is what a first look at a coarse picture tells, with no help from anyone.
type guess struct {
	light  float64 // ln of the scale of the reference
	x, y   float64 // centre, px of the full picture
	peak   float64 // σ0 n
	moment [3]float64
	core   float64 // geometric mean half width at half the peak, px
	signal float64 // of the cloud's sum, in standard deviations
}

// look finds the cloud on a coarse level: the place and size of the window in which the
// summed density stands farthest above its noise, then moments in a window that follows it.
// Single bright bins are put out by a median first.
func (p *problem) look() guess {
	l := p.level
	g := guess{light: l.borderLight()}
	od, noise := p.densityMap(g.light)
	od = median3(od, l.w, l.h)
	if base := borderMedian(od, l.w, l.h); !math.IsNaN(base) {
		for i := range od {
			od[i] -= base
		}
	}
	x, y, half, signal := bestWindow(od, noise, l.w, l.h)
	g.signal = signal
	g.follow(od, l, x, y, half)
	return g
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

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }

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

// median3 replaces every bin by the median of its 3×3 neighbours.
func median3(v []float64, w, h int) []float64 {
	out := make([]float64, len(v))
	var near [9]float64
	for j := range h {
		for i := range w {
			n := 0
			for y := max(j-1, 0); y <= min(j+1, h-1); y++ {
				for x := max(i-1, 0); x <= min(i+1, w-1); x++ {
					near[n] = v[y*w+x]
					n++
				}
			}
			s := near[:n]
			sort.Float64s(s)
			out[j*w+i] = s[n/2]
		}
	}
	return out
}

// bestWindow returns the square window, of half sizes 1, 2, 4, … bins, whose sum is largest
// against the noise of so many bins: centre in bins, half size, and that ratio.
func bestWindow(v []float64, noise float64, w, h int) (x, y, half int, best float64) {
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
	var sxx, sxy, syy float64
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
		sxx, sxy, syy = xx/s-dx*dx, xy/s-dx*dy, yy/s-dy*dy
		sxx, syy = clampLow(sxx, 0.5), clampLow(syy, 0.5)
		rx, ry = math.Max(2, 2.5*math.Sqrt(sxx)), math.Max(2, 2.5*math.Sqrt(syy))
	}
	each(l, cx, cy, rx, ry, func(o int, _, _ float64) { g.peak = math.Max(g.peak, od[o]) })
	n := 0
	each(l, cx, cy, rx, ry, func(o int, _, _ float64) {
		if od[o] > 0.5*g.peak {
			n++
		}
	})
	bin := float64(l.bin)
	g.x, g.y = cx*bin+0.5*(bin-1), cy*bin+0.5*(bin-1)
	g.moment = [3]float64{sxx * bin * bin, sxy * bin * bin, syy * bin * bin}
	g.core = bin * math.Sqrt(float64(max(n, 1))/math.Pi)
}

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

// starts returns the points from which the fits of a first look begin: the size of the thermal
// part from the moments of the whole cloud, over and under it, the condensate from the core.
func (p *problem) starts(g guess, k kind) []params {
	base := params{pX: g.x, pY: g.y, pLight: g.light}
	wide := math.Sqrt((g.moment[0] + g.moment[2]) / (p.tmpl.thermal.square[0] + p.tmpl.thermal.square[1]))
	c := p.tmpl.condensate.square
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
		list = append(list, q)
	}
	switch {
	case k.thermal && k.condensate:
		add(0.4, 1.1, 0.6, core)
		add(0.15, 1.8, 0.85, core)
		add(0.7, 1, 0.3, core/2)
		add(0.1, 1, 0.9, whole)
		for i := range list {
			list[i][pAlpha] = 0.1 // where it is free
		}
	case k.thermal:
		add(1, 1.1, 0, core)
		add(1, 0.5, 0, core)
		for i := range list {
			list[i][pAlpha] = 0.5
		}
	default:
		add(0, 1, 1, core)
		add(0, 1, 1, whole)
	}
	return list
}
