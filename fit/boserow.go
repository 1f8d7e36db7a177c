package fit

import "math"

// boseRow fills g and h of e^−t along the rows of a picture, on which t is a parabola whose
// curvature is the same for all rows.
type boseRow struct {
	kernels *kernelSet
	line    kernelLine // of the row; x0 and b0 are those of a run
	x0, b0  float64    // X and background of the first column
	// The ratio of e^−t over one pixel falls by bend1 from pixel to pixel, that over a group
	// by bend8, from group to group by bend64; bend28 is what it has fallen by within one.
	bend1, bend8, bend28, bend64 float64
	run                          kernelFar
}

// bend prepares rows of the curvature line.t2.
func (r *boseRow) bend() {
	c := -2 * r.line.t2 * r.line.dx * r.line.dx
	r.bend1, r.bend8, r.bend28, r.bend64 = math.Exp(c), math.Exp(8*c), math.Exp(28*c), math.Exp(64*c)
}

// from is the row's arithmetic for a run that begins at column a.
func (r *boseRow) from(a int) *kernelLine {
	r.line.x0 = r.x0 + float64(a)*r.line.dx
	r.line.b0 = r.b0 + r.line.db*float64(a)
	return &r.line
}

// below are the columns, of n, where t < most.
func (r *boseRow) below(most float64, n int) (lo, hi int) {
	return r.columns(r.line.t2, r.line.t1, r.line.t0-most, n)
}

// columns are those of the row, of n, between the roots of a·X² + b·X + c ≤ 0.
func (r *boseRow) columns(a, b, c float64, n int) (lo, hi int) {
	d := b*b - 4*a*c
	if !(d > 0) {
		return 0, 0
	}
	d = math.Sqrt(d)
	scale := 0.5 / (a * r.line.dx)
	offset := r.x0 / r.line.dx
	first, last := (-b-d)*scale-offset, (-b+d)*scale-offset
	if !(last >= 0) || !(first < float64(n)) {
		return 0, 0
	}
	return int(math.Ceil(max(first, 0))), int(min(last, float64(n-1))) + 1
}

// groups is n rounded up to whole groups.
func groups(n int) int { return (n + kernelLanes - 1) &^ (kernelLanes - 1) }

// fill computes g, h and the residual against the data d over columns [a,b) of all four.
// Runs are of whole groups: what one writes beyond its end the next overwrites, so that the
// slices reach kernelLanes beyond b.
func (r *boseRow) fill(g, h, res, d []float64, a, b int) {
	na, nb := r.below(boseSplit, b)
	if na = max(na, a); na < nb {
		r.far(g, h, res, d, a, na)
		n := groups(nb - na)
		r.kernels.near(g[na:na+n], h[na:na+n], res[na:na+n], d[na:na+n], r.from(na))
		a = nb
	}
	r.far(g, h, res, d, a, b)
}

// noThermal is the state in which a run has no thermal part.
var noThermal kernelFar

// far is fill where t ≥ boseSplit.
func (r *boseRow) far(g, h, res, d []float64, a, b int) {
	if a >= b {
		return
	}
	t := func(i int) float64 { return r.line.at(r.x0 + float64(i)*r.line.dx) }
	if t(a) <= boseDark && t(b-1) <= boseDark {
		r.runFar(g, h, res, d, a, b, r.recurrence(a))
		return
	}
	da, db := r.below(boseDark, b)
	da, db = min(max(da, a), b), min(max(db, a), b)
	r.runFar(g, h, res, d, a, da, &noThermal)
	if da < db {
		r.runFar(g, h, res, d, da, db, r.recurrence(da))
	}
	r.runFar(g, h, res, d, db, b, &noThermal)
}

// boseDark is the t beyond which e^−t is taken as 0, so that no ratio of it overflows.
const boseDark = 80

func (r *boseRow) runFar(g, h, res, d []float64, a, b int, f *kernelFar) {
	if n := groups(b - a); a < b {
		r.kernels.far(g[a:a+n], h[a:a+n], res[a:a+n], d[a:a+n], f, r.from(a))
	}
}

// at is t at X.
func (l *kernelLine) at(x float64) float64 { return (l.t2*x+l.t1)*x + l.t0 }

// recurrence starts z = e^−t at column a.
func (r *boseRow) recurrence(a int) *kernelFar {
	l, f := &r.line, &r.run
	x := r.x0 + float64(a)*l.dx
	z, ratio := math.Exp(-l.at(x)), math.Exp(-l.dx*(l.t2*(2*x+l.dx)+l.t1))
	all := ratio * ratio // over a group: ratio⁸ and what it falls by on the way
	all *= all
	all *= all * r.bend28
	for i := range kernelLanes {
		f.z[i], f.r[i] = z, all
		z *= ratio
		ratio *= r.bend1
		all *= r.bend8
	}
	f.q = r.bend64
	return f
}
