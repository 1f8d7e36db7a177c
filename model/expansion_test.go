package model

import (
	"math"
	"strings"
	"testing"
)

// TestCastinDum takes all seven traps of the table (DOP853 against a 25-digit Taylor
// integrator). Numbers are printed with 12 digits; velocities are compared relative to
// the largest, as the table's own residual is.
func TestCastinDum(t *testing.T) {
	worst := 0.0
	for _, row := range readTable(t, "castin_dum.csv") {
		trap := Trap{[3]float64{row.num(t, "w1"), row.num(t, "w2"), row.num(t, "w3")}}
		s := must(ExpandCondensateRates(trap, row.num(t, "tau"), Release{}))(t)
		for i, axis := range []string{"1", "2", "3"} {
			b, v := row.num(t, "b"+axis), row.num(t, "v"+axis)
			near(t, row["trap"]+" tau="+row["tau"]+" b"+axis, s.B[i], b, 1e-11)
			within(t, row["trap"]+" tau="+row["tau"]+" v"+axis, s.V[i], v, 1e-11*math.Max(v, 0.01))
			worst = math.Max(worst, math.Abs(s.B[i]/b-1))
		}
		within(t, row["trap"]+" first integral", CondensateInvariant(trap, s), 0, 1e-12)
	}
	t.Logf("worst relative error of b %.2g", worst)
}

// TestCigarLimit compares with the analytic limit b_⊥ = √(1+τ²), b_z = 1+ε²[τ atan τ −
// ln√(1+τ²)] of Castin and Dum (1996), whose error against the exact equations the table
// prints with 4 digits (at least 1e-12).
func TestCigarLimit(t *testing.T) {
	for _, row := range readTable(t, "castin_dum_cigar_limit.csv") {
		eps, tau := row.num(t, "eps"), row.num(t, "tau")
		b := must(ExpandCondensate(Trap{[3]float64{1, 1, eps}}, tau, Release{}))(t)
		perp := math.Sqrt(1 + tau*tau)
		z := 1 + eps*eps*(tau*math.Atan(tau)-math.Log(perp))
		what := "eps " + row["eps"] + " tau " + row["tau"]
		near(t, what+" perp", perp/b[0]-1, row.num(t, "b_perp_analytic_err"), 6e-4)
		near(t, what+" z", z/b[2]-1, row.num(t, "b_z_analytic_err"), 6e-4)
	}
}

// TestAspectInversion: at the tabulated time both radii are equal (10 printed digits), and
// asymptotically speeds and their ratio are as tabulated. W23 is the limit 2/πε, W24 the
// isotropic speed √(2/3).
func TestAspectInversion(t *testing.T) {
	for _, row := range readTable(t, "castin_dum_inversion.csv") {
		eps := row.num(t, "eps")
		trap := Trap{[3]float64{1, 1, eps}}
		b := must(ExpandCondensate(trap, row.num(t, "tau_inv"), Release{}))(t)
		near(t, "eps "+row["eps"]+" radii at inversion", eps*b[0], b[2], 1e-8)
		// The distance from the asymptotic speed falls as 1/τ² (isotropic: 1/τ³) of the slow axis.
		s := must(ExpandCondensateRates(trap, 1e7/eps, Release{}))(t)
		near(t, "eps "+row["eps"]+" v_perp", s.V[0], row.num(t, "v_perp_inf"), 1e-9)
		near(t, "eps "+row["eps"]+" v_z", s.V[2], row.num(t, "v_z_inf"), 1e-9)
		near(t, "eps "+row["eps"]+" aspect", eps*s.V[0]/s.V[2], row.num(t, "aspect_inf"), 1e-7)
	}
	aspect, tol := workedExample(t, "W23")
	s := must(ExpandCondensateRates(Trap{[3]float64{1, 1, 0.01}}, 1e9, Release{}))(t)
	within(t, "W23", 0.01*s.V[0]/s.V[2], aspect, tol)
	speed, tol := workedExample(t, "W24")
	s = must(ExpandCondensateRates(Trap{[3]float64{1, 1, 1}}, 1e6, Release{}))(t)
	within(t, "W24", s.V[1], speed, tol)
}

// TestSwitchOff compares asymptotic speeds after finite ramps with the table's (8 digits).
// The exponential ramp has its long tail in the flight as well.
func TestSwitchOff(t *testing.T) {
	trap := Trap{[3]float64{1, 1, 1}}
	const flight = 1e6
	for _, row := range readTable(t, "switchoff.csv") {
		x := row.num(t, "w_t_off")
		rate := func(f forces, ramp string) float64 {
			s := must(expand(trap, flight, Release{ramp, x}, f))(t)
			return s.V[0] * s.V[0]
		}
		thermal, mean := forces{kinetic: trap.Omega}, forces{meanField: trap.Omega}
		within(t, "linear thermal "+row["w_t_off"], rate(thermal, "linear"), row.num(t, "T_app_over_T_linear"), 1e-8)
		within(t, "exponential thermal "+row["w_t_off"], rate(thermal, "exponential"), row.num(t, "T_app_over_T_exponential"), 1e-8)
		within(t, "linear condensate "+row["w_t_off"], rate(mean, "linear")/rate(mean, ""), row.num(t, "E_release_ratio_TF_linear"), 1e-8)
		b := must(ExpandThermal(trap, flight, Release{"linear", x}))(t)
		near(t, "width after the linear ramp", b[0]/flight, math.Sqrt(row.num(t, "T_app_over_T_linear")), 1e-5)
	}
}

// TestThermalIsBallistic: the equation of motion gives the closed form that is used.
func TestThermalIsBallistic(t *testing.T) {
	trap := Trap{[3]float64{0.3, 1, 2}}
	for _, flight := range []float64{0, 1e-9, 0.1, 3, 1e3, 1e8} {
		b := must(ExpandThermal(trap, flight, Release{}))(t)
		s := must(expand(trap, flight, Release{}, forces{kinetic: squares(trap.Omega)}))(t)
		for i, w := range trap.Omega {
			near(t, "closed form", b[i], math.Sqrt(1+w*w*flight*flight), 1e-15)
			near(t, "equation", s.B[i], b[i], 1e-12)
		}
	}
}

// TestRampLimits: a ramp of no duration is sudden; one that has hardly begun holds the
// cloud; permuting the axes permutes the answer.
func TestRampLimits(t *testing.T) {
	trap, turned := TrapHz(30, 80, 120), TrapHz(80, 120, 30)
	sudden := must(ExpandCondensate(trap, 0.012, Release{}))(t)
	for _, rel := range []Release{{"sudden", 5}, {"linear", 0}, {"exponential", 0}, {"linear", 1e-12}, {"exponential", 1e-12}} {
		b := must(ExpandCondensate(trap, 0.012, rel))(t)
		p := must(ExpandCondensate(turned, 0.012, rel))(t)
		for i := range 3 {
			near(t, "near sudden", b[i], sudden[i], 2e-9)
			near(t, "permuted", p[i], b[(i+1)%3], 1e-12)
		}
	}
	for _, ramp := range []string{"linear", "exponential"} {
		b := must(ExpandCondensate(trap, 0.01, Release{ramp, 1e6}))(t)
		within(t, "held", b[2], 1, 1e-6)
	}
}

func TestExpansionRefuses(t *testing.T) {
	good := TrapHz(10, 20, 30)
	cases := []struct {
		trap   Trap
		flight float64
		rel    Release
		want   string
	}{
		{good, -1e-9, Release{}, "flight"},
		{good, math.NaN(), Release{}, "flight"},
		{good, math.Inf(1), Release{}, "flight"},
		{Trap{}, 1, Release{}, "frequency 1"},
		{TrapHz(1, math.NaN(), 1), 1, Release{}, "frequency 2"},
		{TrapHz(1, 1, math.Inf(1)), 1, Release{}, "frequency 3"},
		{good, 1, Release{"quadratic", 1}, "switch-off"},
		{good, 1, Release{"linear", -1}, "duration"},
		{good, 1, Release{"exponential", math.NaN()}, "duration"},
		{good, 1e6, Release{"linear", 1e6}, "steps"},
	}
	for _, c := range cases {
		_, condensate := ExpandCondensate(c.trap, c.flight, c.rel)
		_, thermal := ExpandThermal(c.trap, c.flight, c.rel)
		for _, err := range []error{condensate, thermal} {
			if err == nil || !strings.Contains(err.Error(), c.want) {
				t.Errorf("%v %g %v: error %v, want one about %q", c.trap, c.flight, c.rel, err, c.want)
			}
		}
	}
}

// TestExtremeTraps: the first integral holds from 1e-9 s to a year and over aspect ratios
// of 1e5.
func TestExtremeTraps(t *testing.T) {
	for _, trap := range []Trap{TrapHz(0.01, 1000, 1000), TrapHz(1, 1, 1e5), TrapHz(1, 300, 9e4), TrapHz(50, 50, 50)} {
		for _, flight := range []float64{0, 1e-9, 1e-4, 0.02, 1, 3e7} {
			s := must(ExpandCondensateRates(trap, flight, Release{}))(t)
			within(t, "first integral", CondensateInvariant(trap, s), 0, 1e-11)
		}
	}
}

func BenchmarkExpandCondensate(b *testing.B) {
	trap := TrapHz(20, 120, 120)
	for b.Loop() {
		if _, err := ExpandCondensate(trap, 0.02, Release{}); err != nil {
			b.Fatal(err)
		}
	}
}
