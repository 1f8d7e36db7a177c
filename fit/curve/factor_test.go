package curve

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"
)

// TestTotal compares with the closed form of residuals r that a setting moves by d each:
// Σr² − (Σrd)²/(1 + Σd²). A setting that is not known, or ignored, takes no part.
func TestTotal(t *testing.T) {
	n := &Night{Gas: rubidium(t), Calibrations: []Calibration{{Name: "known", Known: true}, {Name: "unknown"}, {Name: Alpha, Known: true}}}
	r, d := []float64{3, -1, 2, 0.5}, []float64{2, 1, 1.5, -0.3}
	rr, rd, dd := 0.0, 0.0, 0.0
	const level = 1e6 // so that changes by factors are sums
	for i := range r {
		p := Point{Vector: Vector{level + r[i], 1, 1, 1}, Shifts: []Vector{{d[i]}, {7}, {9}}}
		p.Cov[Thermal][Thermal] = 1
		n.Points = append(n.Points, p)
		rr, rd, dd = rr+r[i]*r[i], rd+r[i]*d[i], dd+d[i]*d[i]
	}
	for i := range n.Calibrations {
		n.Calibrations[i].Gas = n.Gas
	}
	p := n.problem(n.pick(func(*Point) bool { return true }), relation{size: 1, eval: func(_ *Point, v *Vector, _ *scales, _, h []float64) { h[0] = v[Thermal] - level }})
	within(t, "chi2", p.quality(nil).Chi2, rr, 1e-6)
	within(t, "total", p.total(nil, []string{Alpha, Magnification}), rr-rd*rd/(1+dd), 1e-4)
	within(t, "total of none", p.total(nil, []string{"known", Alpha}), rr, 1e-6)
}

// TestFactorWithinCalibrations: what the stated error of a frequency along the line of sight
// explains asks for no factor, and is laid to alpha where no such error is stated.
func TestFactorWithinCalibrations(t *testing.T) {
	ctx, g := context.Background(), rubidium(t)
	th := NewTheory(g, 6e4, 1.5e5)
	for _, off := range []float64{0.005, 0.02, 0.04} {
		stated, silent := 0, 0
		for seed := range uint64(20) {
			n := draw(t, g, th, SemiIdeal, scan(30), rand.New(rand.NewPCG(seed, 99)))
			n.Gas.Trap.Omega[2] *= 1 + off
			moved := n.Gas
			moved.Trap.Omega[2] *= 1 + off
			for _, known := range []bool{true, false} {
				n.Calibrations = []Calibration{{Name: "sight_hz", Known: known, Gas: moved}}
				for i := range n.Points {
					n.Points[i].Shifts = []Vector{{}}
				}
				f, err := n.FindFactor(ctx)
				if err != nil {
					t.Fatal(err)
				}
				if f.Wrong() && known {
					stated++
				}
				if f.Wrong() && !known {
					silent++
				}
				if h := f.of(SemiIdeal, ""); known {
					within(t, "chi2 a degree with calibrations", h.TotalPerDof(), 1, 0.6)
				}
			}
		}
		if stated != 0 || silent < 19 {
			t.Errorf("sight off by %g: %d factors asked for where its error is stated, %d of 20 where not", off, stated, silent)
		}
	}
}

// TestShiftBelowNothing: a step that takes more than there is leaves a small positive number,
// and one of small steps adds.
func TestShiftBelowNothing(t *testing.T) {
	p := Point{Vector: Vector{100, 100, 100, math.NaN()}, Shifts: []Vector{{-150, -30, 1e-3, 0}}}
	v := p.shifted(0, p.Vector)
	if !(v[0] > 0 && v[0] < 50) {
		t.Errorf("100 less 150 is %g", v[0])
	}
	within(t, "100 less 30", v[1], 70, 1e-12)
	within(t, "a small step", v[2], 100.001, 1e-12)
	p.Shifts[0][0] = -50
	at := p.shifted(0, p.Vector)[0]
	p.Shifts[0][0] = -50 - 1e-9
	within(t, "where the halves meet", p.shifted(0, p.Vector)[0], at, 1e-8)
}

// TestSightFrequency: one that is a tenth high is named where the expansion hangs on it, as in
// a short flight; after a long one alpha is, and the frequency is told to mend the night too.
func TestSightFrequency(t *testing.T) {
	ctx, g := context.Background(), rubidium(t)
	th := NewTheory(g, 6e4, 1.5e5)
	for _, power := range []float64{0.3, 0} { // with which mu goes
		named := 0
		for seed := range uint64(20) {
			n := draw(t, g, th, Ideal, scan(40), rand.New(rand.NewPCG(seed, 12)))
			n.Gas.Trap.Omega[2] *= 1.1
			const step = 0.01
			moved := n.Gas
			moved.Trap.Omega[2] *= math.Exp(step)
			n.Calibrations = []Calibration{{Name: Sight, Gas: moved, Step: step}}
			for i := range n.Points {
				p := &n.Points[i]
				p.Vector[Mu] *= math.Pow(1.1, power)
				p.Shifts = []Vector{{Mu: p.Vector[Mu] * math.Expm1(step*power)}}
			}
			f, err := n.FindFactor(ctx)
			if err != nil {
				t.Fatal(err)
			}
			best := f.List[0]
			want := 1 / 1.1
			if power == 0 {
				if best.Setting == Alpha && f.Twin != nil && f.Decided() {
					named++
					within(t, "factor of the twin", f.Twin.Factor.V, want, 4*f.Twin.Factor.Err)
				}
			} else if best.Setting == Sight && f.Twin == nil && f.Decided() {
				named++
				within(t, "factor of the frequency", best.Factor.V, want, 4*best.Factor.Err)
			}
		}
		if named < 18 {
			t.Errorf("power %g: named in %d of 20 nights", power, named)
		}
	}
}
