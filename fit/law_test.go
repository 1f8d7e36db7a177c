package fit

import (
	"math"
	"testing"
)

// depthOf solves u + s(1−e^−u) = d by Newton's steps from below, to rounding.
func depthOf(d, s float64) float64 {
	u := math.Max(d/(1+s), d-s)
	for range 100 {
		step := (d - u + s*math.Expm1(-u)) / (1 + s*math.Exp(-u))
		u += step
		if math.Abs(step) < 1e-16*(1+u) {
			break
		}
	}
	return u
}

// lawCase is a run of one probe over rising depths.
func lawCase(law func(t, c, d, g, h, s []float64, l *kernelLight), s, most, stray float64) (d, t, c, m []float64) {
	const n = 512
	rows := make([][]float64, 6)
	for i := range rows {
		rows[i] = make([]float64, n)
	}
	d = make([]float64, n)
	l := new(kernelLight)
	for i := range n {
		d[i] = most * float64(i) / (n - 1)
		rows[2][i], rows[3][i], rows[5][i] = d[i], 1, 1
	}
	for j := range kernelLanes {
		l.k[j], l.step[j], l.sat[j], l.pass[j], l.stray[j] = 1, 1, s, 1-stray, stray
	}
	law(rows[0], rows[1], rows[2], rows[3], rows[4], rows[5], l)
	return d, rows[0], rows[1], rows[2]
}

// The law's kernels against Newton's steps to rounding: the transmission within 1e-9 up to a
// hundred times the saturation, its derivatives within 1e-6 of themselves; where that costs
// nothing, at weak saturation and for a faint cloud, much closer.
func TestLawKernels(t *testing.T) {
	for _, s := range []float64{0, 0.05, 0.5, 1, 3, 10, 30, 100} {
		for _, stray := range []float64{0, 0.02} {
			near, rel := 1e-9, 1e-6
			if s <= 3 {
				near, rel = 1e-12, 1e-10
			}
			d, tr, c, m := lawCase(scalarAbsorb, s, s+15, stray)
			checkLaw(t, "absorb", s, stray, near, rel, d, tr, c, m)
			d, tr, c, m = lawCase(scalarThin, s, thinMost, stray)
			checkLaw(t, "thin", s, stray, 1e-9, 1e-6, d, tr, c, m)
			d, tr, c, m = lawCase(scalarFaint, s, faintMost, stray)
			checkLaw(t, "faint", s, stray, 1e-14, 1e-11, d, tr, c, m)
		}
	}
}

// checkLaw wants the transmission within near and its derivatives within rel of themselves.
func checkLaw(t *testing.T, name string, s, stray, near, rel float64, d, tr, c, m []float64) {
	t.Helper()
	for i := range d {
		u := depthOf(d[i], s)
		e := math.Exp(-u)
		slope := (1 - stray) * e / (1 + s*e)
		light := (1-stray)*(e+s*e*(1-e)/(1+s*e)) + stray
		if !(math.Abs(tr[i]-(1-stray)*e-stray) <= near) || !(math.Abs(m[i]-slope) <= rel*slope) || !(math.Abs(c[i]-light) <= rel*light) {
			t.Fatalf("%s at s = %g, d = %g, stray %g: %v, %v, %v, want %v, %v, %v", name, s, d[i], stray, tr[i], m[i], c[i], (1-stray)*e+stray, slope, light)
		}
	}
}

// A depth beyond all light leaves numbers.
func TestLawDeep(t *testing.T) {
	_, tr, c, m := lawCase(scalarAbsorb, 0.3, 1e300, 0)
	for i := range tr {
		if !finite(tr[i]) || !finite(c[i]) || !finite(m[i]) {
			t.Fatalf("%d: %v, %v, %v", i, tr[i], c[i], m[i])
		}
	}
}

// Inverting the law gives back the density.
func TestLawInverts(t *testing.T) {
	l := law{a: 1.7, stray: 0.01}
	for _, s := range []float64{0, 0.2, 4} {
		d, tr, _, _ := lawCase(scalarAbsorb, s/l.a, 5, l.stray)
		for i := range d {
			within(t, "density", l.od(tr[i], s), l.a*d[i], 1e-7*(1+d[i]))
		}
	}
}
