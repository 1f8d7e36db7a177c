package fit

import (
	"fmt"
	"math"
	"testing"

	"fallshadow/model/bose"
)

// The rational forms against the exact functions, over both ranges of t and their border.
func TestBoseForms(t *testing.T) {
	const n = 4096
	var g, h, r [n]float64
	d := make([]float64, n)
	worst := func(from, step float64) (eg, eh float64) {
		for i := range n {
			x := from + float64(i)*step
			eg = max(eg, math.Abs(g[i]-bose.G2(x)))
			eh = max(eh, math.Abs(h[i]-bose.G1(x)))
			if math.IsNaN(g[i]) || math.IsNaN(h[i]) {
				t.Fatalf("not a number at t = %v", x)
			}
		}
		return eg, eh
	}
	check := func(what string, eg, eh float64) {
		t.Logf("%s: error %.1e in g, %.1e in h", what, eg, eh)
		if !(eg <= 1e-12 && eh <= 1e-11) {
			t.Errorf("%s: error %g in g, %g in h", what, eg, eh)
		}
	}
	step := float64(boseSplit) / n
	scalarNear(g[:], h[:], r[:], d, &kernelLine{x0: 0.5 * step, dx: step, t1: 1})
	eg, eh := worst(0.5*step, step)
	check("near", eg, eh)
	scalarNear(g[:], h[:], r[:], d, &kernelLine{x0: 1e-9, dx: 1e-9, t1: 1})
	eg, eh = worst(1e-9, 1e-9)
	check("at the centre", eg, eh)
	f := kernelFar{q: 1}
	step = 30.0 / n
	for i := range kernelLanes {
		f.z[i], f.r[i] = math.Exp(-boseSplit-float64(i)*step), math.Exp(-kernelLanes*step)
	}
	scalarFar(g[:], h[:], r[:], d, &f, &kernelLine{})
	eg, eh = worst(boseSplit, step)
	check("far", eg, eh)
}

// Every vector kernel gives the scalar kernel's bits, for rows of any number of groups and
// arguments beyond the ranges of the forms.
func TestKernelBits(t *testing.T) {
	all := allKernels()
	if len(all) == 1 {
		t.Skip("this processor has the scalar kernels only")
	}
	for _, n := range [...]int{32, 64, 96, 256, 288} {
		for _, scale := range [...]float64{1, 1e-3, 30, 1e10} {
			want := newKernelCase(n)
			want.line.t2 *= scale
			want.line.q2 /= scale
			got := make([]*kernelCase, len(all))
			for i := range all {
				got[i] = newKernelCase(n)
				got[i].line = want.line
			}
			for k, c := range kernelCalls(&scalarKernels, want) {
				c.call()
				for i, s := range all[1:] {
					kernelCalls(s, got[i])[k].call()
					if d := want.differ(got[i]); d != "" {
						t.Errorf("%s/%s of %d at scale %g: %s", s.name, c.name, n, scale, d)
					}
				}
			}
		}
	}
}

// differ names the first number whose bits are not the same.
func (c *kernelCase) differ(o *kernelCase) string {
	a, b := c.all(), o.all()
	for i := range a {
		for k := range a[i] {
			if math.Float64bits(a[i][k]) != math.Float64bits(b[i][k]) {
				return fmt.Sprintf("number %d of slice %d is %v, want %v", k, i, b[i][k], a[i][k])
			}
		}
	}
	return ""
}

func (c *kernelCase) all() [][]float64 {
	v := [][]float64{c.w, c.r, c.g, c.h, c.k, c.d, c.halfW, c.halfD, c.t, c.c, c.e, c.rr[:]}
	v = append(v, c.total[:])
	for i := range c.pass {
		v = append(v, c.pass[i][:])
	}
	for i := range c.products {
		v = append(v, c.products[i][:])
	}
	for i := range c.sum {
		v = append(v, c.sum[i][:])
	}
	for i := range c.run {
		v = append(v, c.run[i][:])
	}
	return v
}
