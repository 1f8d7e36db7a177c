package fit

import (
	"math"

	"fallshadow/model/bose"
)

// forward carries the thermal part, row by row of a plate, through the absorption law to the
// light that comes through. Its slices hold one row: the depth d = σ0n/a, which becomes
// −∂t/∂d; g and h, which are multiplied with that; k of the condensate; the transmission t; and
// c, t with its derivative by the logarithm of the light. On a linear plate t is the density
// and c = −1.
type forward struct {
	kernels *kernelSet
	plate   *plate
	linear  bool
	bare    bool // no thermal part, nor one looked for
	geo     geometry
	excess  *excess
	bose    boseRow
	light   *kernelLight
	y       float64 // from the centre
	plane   float64 // logarithm of the light's scale at the first column of the row
	tilt    float64 // and its slope per column
	growth  float64 // exp(tilt)
	thick   float64 // t below which the depth is beyond thinMost
	seen    float64 // and beyond faintMost

	first float64   // exp(plane)
	grown []float64 // exp(tilt) to the power of the column

	d, g, h, k, t, c, w, e, zero []float64
}

// set prepares rows of a plate of level l.
func (f *forward) set(p *problem, l *level, plate *plate, geo *geometry) {
	f.plate, f.linear, f.geo, f.excess = plate, l.linear, *geo, p.tmpl.excess
	f.bare = geo.amp == 0 && !p.used(pThermal)
	if f.kernels == nil {
		f.kernels = bestKernels()
	}
	n := plate.stride + 2*kernelLanes
	for _, b := range [...]*[]float64{&f.d, &f.g, &f.h, &f.k, &f.t, &f.c, &f.w, &f.e} {
		*b = growTo(*b, n)
	}
	if len(f.zero) < n {
		f.zero = make([]float64, n)
	}
	f.bose.kernels, f.bose.x0 = f.kernels, plate.x-geo.x0
	f.bose.line = kernelLine{dx: plate.bin, t2: 0.5 * geo.axx, amp: geo.ampGrown * geo.unit}
	f.bose.bend()
	f.tilt = geo.light[1] * plate.bin * geo.iw
	f.growth = math.Exp(f.tilt)
	f.thick = math.Log(bose.Zeta2 * f.bose.line.amp / thinMost)
	f.seen = f.thick + math.Log(thinMost/faintMost)
	if f.excess != nil {
		f.thick, f.seen = math.Inf(1), math.Inf(1)
	}
	f.grow(n)
	f.setLight(&p.law, l)
}

// grow fills grown for n columns.
func (f *forward) grow(n int) {
	f.grown = growTo(f.grown, n)
	step := math.Exp(kernelLanes * f.tilt)
	for i := range min(n, kernelLanes) {
		f.grown[i] = math.Exp(float64(i) * f.tilt)
	}
	for i := kernelLanes; i < n; i++ {
		f.grown[i] = f.grown[i-kernelLanes] * step
	}
}

func (f *forward) setLight(law *law, l *level) {
	pixels := float64(l.bin * l.bin)
	step := math.Exp(kernelLanes * f.tilt)
	if f.light == nil {
		f.light = new(kernelLight)
	}
	k := f.light
	for j := range kernelLanes {
		k.step[j] = step
		k.sat[j] = l.saturate / (pixels * law.a)
		k.pass[j], k.stray[j] = 1-law.stray, law.stray
		k.shot[j], k.read[j], k.dark[j] = l.noise.LightShot, pixels*l.noise.LightRead, pixels*l.noise.Dark
	}
}

// line begins row j.
func (f *forward) line(j int) {
	geo, l := &f.geo, &f.bose.line
	y := f.plate.row(j)
	f.plane = geo.plane(f.plate.x, y)
	f.first = math.Exp(f.plane)
	y -= geo.y0
	f.y = y
	l.t1, l.t0 = geo.axy*y, 0.5*geo.ayy*y*y+geo.alpha
}

// lightFrom is the light of a run that begins at column a.
func (f *forward) lightFrom(a int) *kernelLight {
	for j, v := range (*lanes)(f.grown[a:]) {
		f.light.k[j] = f.first * v
	}
	return f.light
}

// cloud returns the columns, in whole groups, that the thermal part reaches.
func (f *forward) cloud() (a, b int) {
	if f.bare {
		return 0, 0
	}
	return f.within(farTau + f.geo.alpha)
}

func (f *forward) within(most float64) (a, b int) {
	a, b = f.bose.below(most, f.plate.stride)
	return a &^ (kernelLanes - 1), groups(b)
}

// fill computes g, h and the depth of the thermal part over columns [a,b).
func (f *forward) fill(a, b int) {
	f.bose.fill(f.g, f.h, f.d, f.zero, a, b)
	if f.excess == nil {
		return
	}
	for i := a; i < b; i++ {
		m := f.geo.excess(f.excess, f.bose.x0+float64(i)*f.plate.bin, f.y)
		f.g[i] *= m
		f.h[i] *= m
		f.d[i] = f.bose.line.amp * f.g[i]
	}
}

// carry takes the depth over columns [a,b) of row j through the law.
func (f *forward) carry(j, a, b int) {
	if f.linear {
		for i := a; i < b; i++ {
			f.t[i], f.c[i], f.d[i] = f.d[i], -1, 1
		}
		return
	}
	ta, tb := f.within(f.thick)
	ta, tb = min(max(ta, a), b), min(max(tb, a), b)
	f.thin(j, a, ta)
	f.run(f.kernels.absorb, j, ta, tb)
	f.thin(j, max(ta, tb), b)
}

// thin is carry where the depth is at most thinMost.
func (f *forward) thin(j, a, b int) {
	if a >= b {
		return
	}
	sa, sb := f.within(f.seen)
	sa, sb = min(max(sa, a), b), min(max(sb, a), b)
	f.run(f.kernels.faint, j, a, sa)
	f.run(f.kernels.thin, j, sa, sb)
	f.run(f.kernels.faint, j, max(sa, sb), b)
}

func (f *forward) run(law func(t, c, d, g, h, s []float64, l *kernelLight), j, a, b int) {
	if a < b {
		law(f.t[a:b], f.c[a:b], f.d[a:b], f.g[a:b], f.h[a:b], f.plate.smooth[j*f.plate.stride+a:j*f.plate.stride+b], f.lightFrom(a))
	}
}

// compare weighs columns [a,b) of row j of the transmission t[a:b] against the counts.
func (f *forward) compare(rr *lanes, j, a, b int, t []float64) {
	p, o := f.plate, j*f.plate.stride
	w, e := f.w[a:b], f.e[a:b]
	if !f.linear {
		f.kernels.compare(rr, w, e, t, p.atoms[o+a:o+b], p.light[o+a:o+b], p.smooth[o+a:o+b], p.variance[o+a:o+b], f.lightFrom(a))
		return
	}
	for i := range w {
		r := p.atoms[o+a+i] - t[i] - f.plane - float64(a+i)*f.tilt
		w[i] = p.light[o+a+i]
		e[i] = -r * w[i]
		rr[0] -= r * e[i]
	}
}
