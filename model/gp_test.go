package model

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
)

// TestGroundState against a table computed apart on other grids, 9 digits printed. Its
// peak densities of attractive gases are less good, see TestGroundStateByShooting.
func TestGroundState(t *testing.T) {
	for _, r := range readTable(t, "gp_isotropic.csv") {
		s := must(SolveGroundState(r.num(t, "g")))(t)
		for column, got := range map[string]float64{
			"mu": s.Mu, "E_per_N": s.Energy, "E_kin": s.Kinetic, "E_ho": s.Potential, "E_int": s.Interaction, "x_rms": s.RMS(),
		} {
			near(t, column+" at g="+r["g"], got, r.num(t, column), 5e-9)
		}
		peak := 5e-9
		if s.G < -0.2 {
			peak = 6e-6
		}
		near(t, "n0 at g="+r["g"], s.Density(0), r.num(t, "n0"), peak)
		within(t, "virial", (2*s.Kinetic-2*s.Potential+3*s.Interaction)/s.Energy, 0, 1e-10)
		near(t, "μ", s.Mu, s.Energy+s.Interaction, 1e-11)
	}
}

// TestGroundStateByShooting integrates the equation outwards from the centre by
// Runge-Kutta, a way that shares nothing with collocation; it must meet ψ two lengths out.
func TestGroundStateByShooting(t *testing.T) {
	for _, g := range []float64{-0.57, -0.5, 0, 3, 100} {
		s := must(SolveGroundState(g))(t)
		slope := func(r, psi, v float64) (float64, float64) {
			return v, (r*r+8*math.Pi*g*psi*psi-2*s.Mu)*psi - 2*v/r
		}
		const h, end = 1e-3, 2.
		r, psi := 1e-6, math.Sqrt(s.Density(0))
		v := (8*math.Pi*g*psi*psi - 2*s.Mu) * psi * r / 3
		for range int(math.Round((end - r) / h)) {
			p1, v1 := slope(r, psi, v)
			p2, v2 := slope(r+h/2, psi+h/2*p1, v+h/2*v1)
			p3, v3 := slope(r+h/2, psi+h/2*p2, v+h/2*v2)
			p4, v4 := slope(r+h, psi+h*p3, v+h*v3)
			psi += h / 6 * (p1 + 2*p2 + 2*p3 + p4)
			v += h / 6 * (v1 + 2*v2 + 2*v3 + v4)
			r += h
		}
		near(t, "ψ²(2)", psi*psi, s.Density(r), 1e-6)
	}
}

// TestGroundStateHandbook: five published values of μ (Muruganandam, Adhikari, Comput.
// Phys. Commun. 180, 1888 (2009)) at 4πg, and the edge of collapse, N|a|/ā = 0.574
// (Roberts et al., Phys. Rev. Lett. 86, 4211 (2001)).
func TestGroundStateHandbook(t *testing.T) {
	for id, nonlinearity := range map[string]float64{"W30": -3.1371, "W31": 3.1371, "W32": 12.5484, "W33": 31.371, "W34": 125.484} {
		expected, tolerance := workedExample(t, id)
		within(t, id, must(SolveGroundState(nonlinearity/(4*math.Pi)))(t).Mu, expected, tolerance)
	}
	expected, tolerance := workedExample(t, "W19")
	if s, err := SolveGroundState(-expected); err != nil || !(s.Mu > 0.364 && s.Mu < 0.45) {
		t.Errorf("at the published critical number: %v, %v", s, err)
	}
	if _, err := SolveGroundState(-expected - tolerance); !errors.Is(err, ErrCollapse) {
		t.Errorf("beyond it: %v", err)
	}
	for _, g := range []float64{math.NaN(), 1e6, math.Inf(1), math.Inf(-1)} {
		if s, err := SolveGroundState(g); err == nil {
			t.Errorf("g = %g gives μ = %g", g, s.Mu)
		}
	}
}

// TestThomasFermiAgainstGroundState compares both routes with tf_vs_gp.csv, which says
// how far Thomas-Fermi is off.
func TestThomasFermiAgainstGroundState(t *testing.T) {
	trap := unitTrap(1, 1, 1)
	length := trap.Length(rubidium)
	for _, r := range readTable(t, "tf_vs_gp.csv") {
		g := r.num(t, "g")
		s := must(SolveGroundState(g))(t)
		mu := must(Mu(g, rubidium, length, trap))(t) / HBar
		rms := Radii(mu*HBar, rubidium, trap)[0] / length / math.Sqrt(7)
		n0 := must(PeakDensity(mu*HBar, rubidium, length))(t) * length * length * length / g
		for column, got := range map[string]float64{
			"mu_err": mu / s.Mu, "E_err": EnergyPerAtom(mu) / s.Energy, "x_rms_err": rms / s.RMS(),
			"n0_err": n0 / s.Density(0), "E_rel_err": ReleaseEnergy(mu) / s.Release(),
		} {
			within(t, column+" at g="+r["g"], got-1, r.num(t, column), 6e-5*math.Abs(r.num(t, column))+1e-8)
		}
	}
}

// TestGroundStateColumn: gaussian without interaction, Thomas-Fermi with much, and of
// norm 1.
func TestGroundStateColumn(t *testing.T) {
	for _, g := range []float64{-0.57, 0, 2, 1e5} {
		s := must(SolveGroundState(g))(t)
		ring := func(rho float64) float64 { return 2 * math.Pi * rho * s.Column(rho) }
		near(t, fmt.Sprint("norm at g=", g), quad.Fixed(ring, 0, s.Radius, 160, nil, 0), 1, 1e-8)
	}
	ideal := must(SolveGroundState(0))(t)
	for _, rho := range []float64{0, 0.7, 2.1} {
		near(t, "gaussian", ideal.Column(rho), math.Exp(-rho*rho)/math.Pi, 1e-9)
	}
	strong := must(SolveGroundState(1e5))(t)
	radius := math.Pow(15e5, 0.2)
	for _, x := range []float64{0, 0.4, 0.8} {
		tf := CondensateColumn(1, Shape{radius * radius, 0, radius * radius}, x*radius, 0)
		near(t, "Thomas-Fermi", strong.Column(x*radius), tf, 1e-3)
	}
	if strong.Column(30) != 0 || strong.Density(30) != 0 {
		t.Error("density beyond the ball")
	}
}

func BenchmarkSolveGroundState(b *testing.B) {
	for b.Loop() {
		if _, err := SolveGroundState(300); err != nil {
			b.Fatal(err)
		}
	}
}
