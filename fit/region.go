package fit

import (
	"math"

	"fallshadow/model"
)

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

// The images that are blurred: the transmission, s times its derivative to s, its derivative to
// each density parameter, and the light they are weighted with. The optics blur the light that
// atoms let through, I T, while the reference holds I blurred: what lets the reference through
// is blur(I T)/blur(I), which differs from blur(T) where light and cloud both change.
const (
	imageT     = 0
	imageTS    = 1
	imageFirst = 2
	imageLight = imageFirst + firstLight
	numImages  = imageLight + 1
)

type regionBuffers struct {
	images [numImages][]float64
	line   []float64
	spare  []float64
	taps   []float64
}

func (b *regionBuffers) size(n, line int) {
	for i := range b.images {
		if cap(b.images[i]) < n {
			b.images[i] = make([]float64, n)
		}
		b.images[i] = b.images[i][:n]
	}
	if cap(b.line) < line {
		b.line = make([]float64, line)
	}
	if cap(b.spare) < n {
		b.spare = make([]float64, n)
	}
}

// blurTaps returns the taps 0..r of a symmetric kernel of variance v (in pixels of its grid):
// samples of a gaussian, or for a narrow one five taps with its second and fourth moment.
func blurTaps(dst []float64, v float64) []float64 {
	if v == 0 {
		return append(dst[:0], 1)
	}
	if v < 0.5 {
		w2 := (3*v*v - v) / 24
		w1 := (v - 8*w2) / 2
		return append(dst[:0], 1-2*w1-2*w2, w1, w2)
	}
	r := int(math.Ceil(4.5 * math.Sqrt(v)))
	dst = dst[:0]
	sum := 0.0
	for i := range r + 1 {
		w := math.Exp(-float64(i*i) / (2 * v))
		dst = append(dst, w)
		sum += w
		if i > 0 {
			sum += w
		}
	}
	for i := range dst {
		dst[i] /= sum
	}
	return dst
}

// blurred paints the cloud over a box of the fine level with the margin that the kernel asks for
// and blurs it; it returns the margin and the width of the images.
func (p *problem) blurred(q *params, in box, full bool) (pad, w int) {
	b := &p.buf.region
	bin := float64(p.fine.bin)
	b.taps = blurTaps(b.taps, p.blurOn(p.fine)/(bin*bin))
	pad = len(b.taps) - 1
	w = in.x1 - in.x0 + 2*pad
	h := in.y1 - in.y0 + 2*pad
	b.size(w*h, max(w, h))
	sharp := p.geometry(q, 0)
	p.paint(q, &sharp, in.x0-pad, in.y0-pad, w, h, full)
	if !p.fine.linear {
		p.weight(in.x0-pad, in.y0-pad, w, h, full)
		b.blur(b.images[imageLight], w, h)
	}
	for i := range imageLight {
		if i != imageT && (!full || !p.used(i)) {
			continue
		}
		b.blur(b.images[i], w, h)
		if !p.fine.linear {
			for n, v := range b.images[imageLight] {
				b.images[i][n] /= v
			}
		}
	}
	return pad, w
}

// weight multiplies the images by the light, beyond the picture that of the nearest pixel.
func (p *problem) weight(i0, j0, w, h int, full bool) {
	l, b := p.fine, &p.buf.region
	if l.beam == nil {
		l.setBeam(p.blur * p.blur)
	}
	light := b.images[imageLight]
	for j := range h {
		row := min(max(j0+j, 0), l.h-1) * l.w
		for i := range w {
			light[j*w+i] = l.beam[row+min(max(i0+i, 0), l.w-1)]
		}
	}
	for i := range imageLight {
		if i == imageT || full && p.used(i) {
			for n, v := range light {
				b.images[i][n] *= v
			}
		}
	}
}

// regionNormal adds the pixels of the box to the normal matrix and gradient, and returns
// their sum of squares.
func (p *problem) regionNormal(q *params, geo *geometry, in box, h, g []float64) float64 {
	if in.empty() {
		return 0
	}
	l := p.fine
	pad, w := p.blurred(q, in, h != nil)
	var acc accumulator
	for c := range acc.used {
		acc.used[c] = p.used(imageFirst + c)
	}
	for j := in.y0; j < in.y1; j++ {
		for i := in.x0; i < in.x1; i++ {
			o := j*l.w + i
			if l.count[o] == 0 || (p.skip != nil && p.skip[o]) {
				continue
			}
			p.regionPixel(geo, o, i, j, (j-in.y0+pad)*w+i-in.x0+pad, h != nil, &acc)
		}
	}
	if h != nil {
		acc.add(h, g)
	}
	return acc.rr
}

// used says whether image i steers the fit: a parameter that is held has none, and of two
// that are tied the first carries both.
func (p *problem) used(i int) bool {
	if i == imageTS {
		return p.fine.saturate > 0
	}
	i -= imageFirst
	t := p.ties
	if t == nil || i < 0 {
		return true
	}
	return t.slot[i] >= 0 && !(t.merged(i) && (i == pWidth2 || i == pRadius2))
}

// paint fills the images with the unblurred cloud over a w×h rectangle from pixel (i0,j0).
// The light beyond the picture is taken as that of the nearest pixel.
func (p *problem) paint(q *params, geo *geometry, i0, j0, w, h int, full bool) {
	l, b := p.fine, &p.buf.region
	cond := p.tmpl.condensateOf(q)
	inv := ellipse{[2]float64{1 / cond.square[0], 1 / cond.square[1]}, cond.angle}.shape()
	cs, sn := math.Cos(cond.angle), math.Sin(cond.angle)
	tied1, tied2 := p.ties.merged(pWidth1), p.ties.merged(pRadius1)
	for j := range h {
		y := l.at(j0+j) - geo.y0
		jj := min(max(j0+j, 0), l.h-1)
		var walk walk
		for i := range w {
			x := l.at(i0+i) - geo.x0
			o := jj*l.w + min(max(i0+i, 0), l.w-1)
			gt, ht := boseFast(x*(0.5*geo.axx*x+geo.axy*y) + 0.5*geo.ayy*y*y + geo.alpha)
			norm := geo.norm
			if p.tmpl.excess != nil {
				norm *= geo.excess(p.tmpl.excess, x, y)
			}
			gt, ht = gt*norm, ht*norm
			c, e := p.condensate(x, y, &inv)
			d := geo.amp*gt + q[pCondensate]*c
			t, td, ts := p.transmission(&walk, geo, o, x+geo.x0, y+geo.y0, d)
			n := j*w + i
			b.images[imageT][n], b.images[imageTS][n] = t, ts
			if !full {
				continue
			}
			u1, u2 := x*geo.cos+y*geo.sin, y*geo.cos-x*geo.sin
			w1, w2 := x*cs+y*sn, y*cs-x*sn
			mt, mc := geo.amp*ht*td, 3*q[pCondensate]*e*td
			im := &b.images
			im[imageFirst+pThermal][n] = gt * td
			im[imageFirst+pWidth1][n] = mt * u1 * u1 / geo.v[0]
			im[imageFirst+pWidth2][n] = mt * u2 * u2 / geo.v[1]
			im[imageFirst+pCondensate][n] = c * td
			im[imageFirst+pRadius1][n] = mc * w1 * w1 / cond.square[0]
			im[imageFirst+pRadius2][n] = mc * w2 * w2 / cond.square[1]
			im[imageFirst+pX][n] = mt*(geo.axx*x+geo.axy*y) + mc*(inv.XX*x+inv.XY*y)
			im[imageFirst+pY][n] = mt*(geo.axy*x+geo.ayy*y) + mc*(inv.XY*x+inv.YY*y)
			im[imageFirst+pAngle][n] = -mt*u1*u2*(1/geo.v[0]-1/geo.v[1]) - mc*w1*w2*(1/cond.square[0]-1/cond.square[1])
			im[imageFirst+pAlpha][n] = geo.amp * (gt*geo.slope - ht) * td
			if tied1 {
				im[imageFirst+pWidth1][n] += im[imageFirst+pWidth2][n]
			}
			if tied2 {
				im[imageFirst+pRadius1][n] += im[imageFirst+pRadius2][n]
			}
		}
	}
}

// condensate returns the profile c of unit peak and e, a third of −2 ∂c/∂(r ᵀS⁻¹r): the
// Thomas-Fermi column (1−ρ²)^(3/2) has e = (1−ρ²)^(1/2), the gaussian exp(−ρ²/2) e = c/3.
func (p *problem) condensate(x, y float64, inv *model.Shape) (c, e float64) {
	r := x*(inv.XX*x+2*inv.XY*y) + inv.YY*y*y
	if p.tmpl.gaussian {
		c = math.Exp(-0.5 * r)
		return c, c / 3
	}
	if r >= 1 {
		return 0, 0
	}
	e = math.Sqrt(1 - r)
	return e * (1 - r), e
}

// transmission returns the transmitted fraction at bin o of the fine level and position x, y of the
// picture, with its derivatives as transmit does; on a linear level the density itself.
func (p *problem) transmission(w *walk, geo *geometry, o int, x, y, d float64) (t, td, ts float64) {
	if p.fine.linear {
		return d, 1, 0
	}
	s := 0.0
	if p.fine.saturate > 0 {
		s = geo.scale(x, y) * p.fine.probe[o]
	}
	return w.transmit(&p.law, d, s)
}

// scale returns k at position x, y of the picture.
func (geo *geometry) scale(x, y float64) float64 { return math.Exp(geo.plane(x, y)) }

func (geo *geometry) plane(x, y float64) float64 {
	return geo.light[0] + geo.light[1]*(x-geo.xc)*geo.iw + geo.light[2]*(y-geo.yc)*geo.ih
}

// regionPixel adds one blurred pixel: n is its place in the images.
func (p *problem) regionPixel(geo *geometry, o, i, j, n int, full bool, acc *accumulator) {
	l, b := p.fine, &p.buf.region
	x, y := l.at(i), l.at(j)
	t := b.images[imageT][n]
	var rho, slope, bb float64
	if l.linear {
		slope = -math.Sqrt(l.count[o]) / l.sigma
		rho = (t + geo.plane(x, y) - l.atoms[o]) * slope
		bb = slope
	} else {
		k := geo.scale(x, y)
		r, iv, lambda := l.slope(o, k*t)
		root := math.Sqrt(iv)
		rho, slope = r*root, -lambda*root*k
		bb = slope * (t + b.images[imageTS][n])
	}
	acc.rr += rho * rho
	if !full {
		return
	}
	var v [numParams]float64
	for c := range firstLight {
		if acc.used[c] {
			v[c] = slope * b.images[imageFirst+c][n]
		}
	}
	v[pLight], v[pLightX], v[pLightY] = bb, bb*(x-geo.xc)*geo.iw, bb*(y-geo.yc)*geo.ih
	acc.pixel(&v, rho)
}

// accumulator sums outer products of Jacobian rows.
type accumulator struct {
	h  [numParams][numParams]float64
	g  [numParams]float64
	rr float64

	used [firstLight]bool
}

func (a *accumulator) pixel(v *[numParams]float64, rho float64) {
	for i := range numParams {
		f := v[i]
		if f == 0 {
			continue
		}
		row := &a.h[i]
		for k := i; k < numParams; k++ {
			row[k] += f * v[k]
		}
		a.g[i] += f * rho
	}
}

func (a *accumulator) add(h, g []float64) {
	for i := range numParams {
		for k := i; k < numParams; k++ {
			h[i*numParams+k] += a.h[i][k]
			if k > i {
				h[k*numParams+i] += a.h[i][k]
			}
		}
		g[i] += a.g[i]
	}
}

// blur convolves an image in place along rows and columns. Within reach of its border it is
// not right there; the images are painted with a margin that wide.
func (b *regionBuffers) blur(v []float64, w, h int) {
	r := len(b.taps) - 1
	line := b.line[:w]
	for j := range h {
		row := v[j*w : (j+1)*w]
		copy(line, row)
		b.mix(row[r:w-r], func(k int) []float64 { return line[r+k : w-r+k] })
	}
	out := b.spare[:w*h]
	for j := r; j < h-r; j++ {
		b.mix(out[j*w:(j+1)*w], func(k int) []float64 { return v[(j+k)*w : (j+k+1)*w] })
	}
	copy(v[r*w:(h-r)*w], out[r*w:(h-r)*w])
}

// mix sets dst to Σ_k tap(|k|) src(k) over the kernel.
func (b *regionBuffers) mix(dst []float64, src func(k int) []float64) {
	t := b.taps[0]
	for i, x := range src(0)[:len(dst)] {
		dst[i] = t * x
	}
	for k := 1; k < len(b.taps); k++ {
		t, lo, hi := b.taps[k], src(-k)[:len(dst)], src(k)[:len(dst)]
		for i := range dst {
			dst[i] += t * (lo[i] + hi[i])
		}
	}
}
