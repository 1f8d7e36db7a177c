package model

import (
	"math"
	"testing"
)

var absorptionLaws = []Law{{1, 0, 0}, {2, 0, 0.01}, {1.4, 0.7, 0}, {1.17, -1.5, 0.05}}

// TestLawHolds puts t back into c ln(1/t) + s(1−t) = od of Reinaudi et al. (2007), from
// no light to 1e4 Isat and over every density. The bound is the rounding of ln t, carried
// through the slope of the law, and that of od.
func TestLawHolds(t *testing.T) {
	for _, law := range absorptionLaws {
		law.Stray = 0
		for _, s := range []float64{0, 1e-300, 1e-8, 0.03, 1, 20, 1e4} {
			for _, od := range []float64{-1000, -30, -1, -1e-3, 0, 1e-12, 1e-3, 0.5, 3, 12, 100, 600} {
				tr := law.Transmit(od, s)
				if math.IsInf(tr, 1) {
					continue // e^1000 of a weak probe
				}
				c := law.Alpha * (1 + 4*law.Detuning*law.Detuning)
				y := math.Log(1 / tr)
				within(t, "law", c*y+s*(1-tr), od, 4e-16*((c+s*tr)*(1+math.Abs(y))+math.Abs(od)))
			}
		}
	}
}

// TestLawInverts goes there and back with stray light, where what atoms leave is not lost
// in it.
func TestLawInverts(t *testing.T) {
	for _, law := range absorptionLaws {
		for _, s := range []float64{0, 0.1, 2, 30} {
			for _, od := range []float64{-0.4, 0, 0.2, 1, 4} {
				tr, slope, _ := law.TransmitDeriv(od, s)
				within(t, "inverse", law.OD(tr, s), od, 6e-16/math.Abs(slope))
			}
		}
	}
}

// TestLawLimits: a weak probe sees Beer-Lambert, e^(−od/c); a strong one is thinned by
// od Isat whatever c is.
func TestLawLimits(t *testing.T) {
	for _, law := range absorptionLaws {
		law.Stray = 0
		c := law.Alpha * (1 + 4*law.Detuning*law.Detuning)
		near(t, "weak probe", law.Transmit(2.5, 0), math.Exp(-2.5/c), 1e-14)
		near(t, "nearly weak probe", law.Transmit(2.5, 1e-9), math.Exp(-2.5/c), 1e-8)
		near(t, "strong probe", law.Transmit(2.5, 1e9), 1-2.5e-9, 1e-15)
	}
	// Half of the light at s = 2, c = 1: ln 2 + 1 exactly.
	near(t, "half", Law{Alpha: 1}.Transmit(math.Ln2+1, 2), 0.5, 1e-15)
	// c = s = 1: t e^t = e^(1−od), so t = W(e^(1−od)); W(1) = 0.567143290409784, the omega
	// constant (DLMF 4.13).
	near(t, "omega constant", Law{Alpha: 1}.Transmit(1, 1), 0.5671432904097838730, 1e-15)
}

// TestCeiling: apparent densities of stray light. ln[(1+ε)/ε] = 6.909, 4.615, 3.045 and
// OD 3 reads 2.981, 2.827, 2.354 for ε = 1e-3, 1e-2, 5e-2 (printed digits, computed by
// hand from −ln[(e^−OD+ε)/(1+ε)], where ε = Stray/(1−Stray) is the stray light over the rest).
func TestCeiling(t *testing.T) {
	for _, row := range [][3]float64{{1e-3, 6.909, 2.981}, {1e-2, 4.615, 2.827}, {5e-2, 3.045, 2.354}} {
		law := Law{Alpha: 1, Stray: row[0] / (1 + row[0])}
		within(t, "ceiling", law.Ceiling(), row[1], 5e-4)
		within(t, "reading at the ceiling", -math.Log(law.Transmit(900, 0)), law.Ceiling(), 1e-12)
		within(t, "reading of OD 3", -math.Log(law.Transmit(3, 0)), row[2], 5e-4)
		if v := law.OD(0.9*law.Stray, 0); !math.IsNaN(v) {
			t.Errorf("less light than the stray light gives od %g, want NaN", v)
		}
	}
	if v := (Law{Alpha: 1}).Ceiling(); !math.IsInf(v, 1) {
		t.Errorf("ceiling without stray light is %g", v)
	}
}

// TestLawDerivatives compares with central differences at asymmetric points, and sees that
// a derivative of another law is told apart.
func TestLawDerivatives(t *testing.T) {
	const h = 1e-5
	for _, law := range absorptionLaws {
		for _, p := range [][2]float64{{0.37, 0.21}, {-0.8, 1.3}, {4.2, 2.9}, {11, 0.6}} {
			od, s := p[0], p[1]
			tr, byOD, byS := law.TransmitDeriv(od, s)
			within(t, "value", tr, law.Transmit(od, s), 0)
			within(t, "dt/dod", byOD, (law.Transmit(od+h, s)-law.Transmit(od-h, s))/(2*h), 1e-10)
			within(t, "dt/ds", byS, (law.Transmit(od, s+h)-law.Transmit(od, s-h))/(2*h), 1e-10)
			other := law
			other.Alpha *= 1.001
			if _, wrong, _ := other.TransmitDeriv(od, s); math.Abs(wrong-byOD) < 1e-9 {
				t.Errorf("alpha 0.1 %% off changes dt/dod by %g only", wrong-byOD)
			}
		}
	}
}

// TestLawIsMonotone: more atoms let less light through; more light a larger part.
func TestLawIsMonotone(t *testing.T) {
	law := Law{Alpha: 1.6, Detuning: 0.2}
	for od := -20.0; od < 60; od += 0.25 {
		if !(law.Transmit(od+0.25, 0.7) < law.Transmit(od, 0.7)) {
			t.Errorf("not falling at od %g", od)
		}
		if od > 0 && !(law.Transmit(od, 0.8) > law.Transmit(od, 0.7)) {
			t.Errorf("not rising with the light at od %g", od)
		}
	}
}

func TestLawRefuses(t *testing.T) {
	nan := math.NaN()
	for _, v := range []float64{
		Law{Alpha: 1}.Transmit(nan, 1), Law{Alpha: 1}.Transmit(1, nan), Law{Alpha: 1}.Transmit(1, -0.1),
		Law{Alpha: nan}.Transmit(1, 1), Law{}.Transmit(1, 1), Law{Alpha: 1}.OD(nan, 1), Law{Alpha: 1}.OD(0.5, -1),
	} {
		if !math.IsNaN(v) {
			t.Errorf("got %g, want NaN", v)
		}
	}
	if v := (Law{Alpha: 1}).Transmit(math.Inf(1), 2); v != 0 {
		t.Errorf("infinite density lets %g through", v)
	}
}

// TestPhotons: 87Rb is shifted by 7.54 kHz a photon, about 400 photons by Γ/2 (Steck,
// Rubidium 87 D line data: twice the recoil frequency 3.7710 kHz). Saturated atoms
// scatter Γ/2; push and blur are those of a uniform rate.
func TestPhotons(t *testing.T) {
	rb := must(LookupSpecies("87Rb"))(t)
	within(t, "Doppler shift of a photon", rb.DopplerShift(1), 2*3.7710e3, 0.5)
	within(t, "photons to half a linewidth", rb.Linewidth/(4*math.Pi)/rb.DopplerShift(1), 402, 1)
	law := Law{Alpha: 2, Detuning: 0.5}
	near(t, "saturated", law.PhotonsScattered(50e-6, 1e12, rb.Linewidth), 25e-6*rb.Linewidth, 1e-10)
	near(t, "half saturated", law.PhotonsScattered(50e-6, 4, rb.Linewidth), 12.5e-6*rb.Linewidth, 1e-14)
	// Kicks at a uniform rate, each moving the atom for the rest of the exposure: the mean
	// square over the exposure of a walk of rate r is v²r∫(∫(t−u)²/3 du)dt/τ with ⟨cos²⟩ = 1/3.
	const photons, exposure, steps = 300.0, 40e-6, 2000
	v, square, push := rb.RecoilVelocity(), 0.0, 0.0
	for i := range steps {
		at := (float64(i) + 0.5) / steps * exposure
		square += photons / exposure * v * v * at * at * at / 9 / steps
		push += photons / exposure * v * at * at / 2 / steps
	}
	near(t, "blur", rb.RecoilBlur(photons, exposure), math.Sqrt(square), 1e-5)
	at := exposure
	near(t, "push", rb.RecoilPush(photons, exposure), photons/exposure*v*at*at/2, 1e-14)
	near(t, "mean push", push, rb.RecoilPush(photons, exposure)/3, 1e-5)
}

func FuzzTransmit(f *testing.F) {
	f.Add(1.0, 0.5, 1.5)
	f.Add(-700.0, 1e-9, 1.0)
	f.Add(1e3, 1e5, 3.0)
	f.Fuzz(func(t *testing.T, od, s, alpha float64) {
		if !(math.Abs(od) <= 1e3 && s >= 0 && s <= 1e8 && alpha >= 0.1 && alpha <= 100) {
			return
		}
		tr := Law{Alpha: alpha}.Transmit(od, s)
		y := -math.Log(tr)
		if !(math.Abs(y) < 700) {
			return // no normal number
		}
		within(t, "law", alpha*y+s*(1-tr), od, 4e-16*((alpha+s*tr)*(1+math.Abs(y))+math.Abs(od)))
	})
}

func BenchmarkTransmitDeriv(b *testing.B) {
	law := Law{Alpha: 2, Stray: 0.01}
	ods := [8]float64{-0.1, 0, 0.05, 0.3, 1, 2, 4, 8}
	sum := 0.0
	for i := 0; b.Loop(); i++ {
		t, _, _ := law.TransmitDeriv(ods[i%8], 0.4)
		sum += t
	}
	_ = sum
}
