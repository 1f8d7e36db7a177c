package model

import (
	"errors"
	"math"
	"testing"
)

// TestCondensateExample follows every step from N0 to the optical density in the table
// (computed with CODATA 2022; 9 printed digits).
func TestCondensateExample(t *testing.T) {
	for _, row := range readTable(t, "condensate_example.csv") {
		what := row["species"] + " N0 " + row["N0"]
		atom := must(LookupSpecies(row["species"]))(t)
		n0, a := row.num(t, "N0"), row.num(t, "a_a0")*A0
		near(t, what+" mass", atom.Mass, row.num(t, "m_u")*U, 1e-15)
		near(t, what+" a", atom.ScatteringLength, a, 1e-15)
		trap := TrapHz(row.num(t, "f1"), row.num(t, "f2"), row.num(t, "f3"))

		mu := must(Mu(n0, atom.Mass, a, trap))(t)
		near(t, what+" mu/h", mu/H, row.num(t, "mu_over_h_Hz"), 1e-8)
		near(t, what+" mu/kB", mu/KB, row.num(t, "mu_over_kB_nK")*1e-9, 1e-8)
		near(t, what+" back to N0", must(NumberFromMu(mu, atom.Mass, a, trap))(t), n0, 1e-13)
		density := must(PeakDensity(mu, atom.Mass, a))(t)
		near(t, what+" density", density, row.num(t, "n0_per_um3")*1e18, 1e-8)
		near(t, what+" healing length", HealingLength(density, a), row.num(t, "xi_um")*1e-6, 1e-8)

		b := must(ExpandCondensate(trap, row.num(t, "t_ms")*1e-3, Release{}))(t)
		radii, squared := Radii(mu, atom.Mass, trap), RadiiSquared(mu, atom.Mass, trap, b)
		for i, axis := range []string{"1", "2", "3"} {
			near(t, what+" R"+axis, radii[i], row.num(t, "R"+axis+"_um")*1e-6, 1e-8)
			near(t, what+" b"+axis, b[i], row.num(t, "b"+axis), 1e-8)
			near(t, what+" R(t)"+axis, math.Sqrt(squared[i]), row.num(t, "R"+axis+"t_um")*1e-6, 1e-8)
		}
		peak := CondensatePeakColumn(n0, Shape{XX: squared[0], YY: squared[1]})
		near(t, what+" column", peak, row.num(t, "A_per_um2")*1e12, 1e-8)
		near(t, what+" optical density", peak*atom.Sigma0(), row.num(t, "od_peak"), 1e-8)
	}
}

// TestEnergies: μ = dE/dN with E = N·5μ/7; potential and released energy make the whole;
// all that is released ends as kinetic energy.
func TestEnergies(t *testing.T) {
	rb, trap := must(LookupSpecies("87Rb"))(t), TrapHz(20, 120, 120)
	total := func(n float64) float64 {
		return n * EnergyPerAtom(must(Mu(n, rb.Mass, rb.ScatteringLength, trap))(t))
	}
	mu := must(Mu(1e5, rb.Mass, rb.ScatteringLength, trap))(t)
	near(t, "dE/dN", (total(1.001e5)-total(0.999e5))/200, mu, 1e-6)
	// Potential energy Σ mω²⟨x²⟩/2 with ⟨x²⟩ = R²/7.
	potential := 0.0
	for i, r := range Radii(mu, rb.Mass, trap) {
		potential += rb.Mass * trap.Omega[i] * trap.Omega[i] * r * r / 14
	}
	near(t, "released and potential energy", potential+ReleaseEnergy(mu), EnergyPerAtom(mu), 1e-14)
	// Σ m⟨v²⟩/2 = Σ m R²b'²/14.
	s := must(ExpandCondensateRates(trap, 100, Release{}))(t)
	kinetic := 0.0
	for i, r := range Radii(mu, rb.Mass, trap) {
		kinetic += rb.Mass * r * r * s.V[i] * s.V[i] / 14
	}
	near(t, "kinetic energy at infinity", kinetic, ReleaseEnergy(mu), 1e-9)
}

// TestCondensateColumn integrates the tilted profile and its second moments: N0, and
// ⟨xx⟩ = S/7.
func TestCondensateColumn(t *testing.T) {
	s := Shape{XX: 4, XY: 1.5, YY: 2.5}
	n, xx, xy := moments(3, 400, func(x, y float64) float64 { return CondensateColumn(1e4, s, x, y) })
	near(t, "integral", n, 1e4, 1e-5)
	near(t, "xx", xx, s.XX/7, 1e-5)
	near(t, "xy", xy, s.XY/7, 1e-5)
	near(t, "peak", CondensateColumn(1e4, s, 0, 0), CondensatePeakColumn(1e4, s), 1e-15)
	if v := CondensateColumn(1e4, s, 2.01, 0.8); v != 0 {
		t.Errorf("column outside the edge is %g", v)
	}
}

// moments sums f over a square of the given half-width on a grid of 2k+1 points a side
// and returns its integral and the normalised moments of xx and xy.
func moments(half float64, k int, f func(x, y float64) float64) (n, xx, xy float64) {
	h := half / float64(k)
	for i := -k; i <= k; i++ {
		for j := -k; j <= k; j++ {
			x, y := float64(i)*h, float64(j)*h
			v := f(x, y) * h * h
			n, xx, xy = n+v, xx+x*x*v, xy+x*y*v
		}
	}
	return n, xx / n, xy / n
}

func TestNoThomasFermi(t *testing.T) {
	trap := TrapHz(10, 20, 30)
	for a, want := range map[float64]error{-1e-9: ErrAttractive, 0: ErrAttractive} {
		_, mu := Mu(1e4, 1e-25, a, trap)
		_, n := NumberFromMu(1e-31, 1e-25, a, trap)
		_, density := PeakDensity(1e-31, 1e-25, a)
		for _, err := range []error{mu, n, density} {
			if !errors.Is(err, want) {
				t.Errorf("a = %g: error %v, want %v", a, err, want)
			}
		}
	}
	if _, err := Mu(1e4, 1e-25, math.NaN(), trap); !errors.Is(err, ErrNoScatteringLength) {
		t.Errorf("unknown scattering length: error %v", err)
	}
	if mu := must(Mu(0, 1e-25, 5e-9, trap))(t); mu != 0 {
		t.Errorf("mu of no atoms is %g", mu)
	}
}
