package model

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"fallshadow/model/bose"
)

const semiIdealT = 150e-9

// semiIdealTrap has its line of sight between its axes, so that every step of the
// projection counts.
var semiIdealTrap, semiIdealView = TrapHz(20, 120, 90), View(0.07, 0.4, 0.3)

func semiIdealCloud(t testing.TB, y, flight float64) *SemiIdealCloud {
	t.Helper()
	return must(NewSemiIdealCloud(semiIdealT, y*KB*semiIdealT, rubidium, semiIdealTrap, semiIdealView, flight, Release{}))(t)
}

// TestSemiIdealColumnWithoutCondensate: the quadrature at μ → 0 gives the closed form of
// the saturated ideal gas; the peak has a weak root in μ.
func TestSemiIdealColumnWithoutCondensate(t *testing.T) {
	for _, flight := range []float64{0.0016, 0.005, 0.02, 0.1} {
		c, ideal := semiIdealCloud(t, 1e-9, flight), semiIdealCloud(t, 0, flight)
		s1, s2 := math.Sqrt(c.ideal.XX), math.Sqrt(c.ideal.YY)
		near(t, "peak", c.Column(0, 0), ideal.Column(0, 0), 2e-4)
		for _, x := range []float64{0.5, 1.1, 2.3, 4} {
			near(t, fmt.Sprintf("at %g, flight %g", x, flight), c.Column(x*s1, -x*s2), ideal.Column(x*s1, -x*s2), 1e-6)
		}
	}
	above := semiIdealCloud(t, -0.5, 0.02)
	near(t, "above Tc", above.Column(0, 0), ThermalPeakColumn(ThermalNumber(semiIdealT, 0.5, semiIdealTrap), 0.5, above.ideal), 1e-12)
}

// TestSemiIdealColumnHoldsAllAtoms: the integral of the column density is N_th.
func TestSemiIdealColumnHoldsAllAtoms(t *testing.T) {
	for _, y := range []float64{0.1, 0.7, 3} {
		c := semiIdealCloud(t, y, 0.008)
		s1, s2 := math.Sqrt(c.ideal.XX), math.Sqrt(c.ideal.YY)
		line := func(y float64) float64 {
			return quad.Fixed(func(x float64) float64 { return c.Column(x*s1, y*s2) }, 0, 7, 24, nil, 0) +
				quad.Fixed(func(x float64) float64 { return c.Column(-x*s1, y*s2) }, 0, 7, 24, nil, 0)
		}
		got := 2 * quad.Fixed(line, 0, 7, 24, nil, 0) * s1 * s2
		gas := must(SemiIdealAt(semiIdealT, y*KB*semiIdealT, rubidium, 5e-9, semiIdealTrap))(t)
		near(t, fmt.Sprint("N_th at μ/kT = ", y), got, gas.Thermal, 1e-3)
	}
}

// TestSemiIdealColumnFarAway: after a long flight the picture is the momentum
// distribution, ∝ ∫ √v g_{1/2}(e^{−|v−μ/kT|−q}) dv.
func TestSemiIdealColumnFarAway(t *testing.T) {
	const flight, y = 2., 0.8
	c := semiIdealCloud(t, y, flight)
	spread := flight * math.Sqrt(KB*semiIdealT/rubidium)
	for _, x := range []float64{0.4, 1, 2.5} {
		momenta := semiIdealIntegral(y, func(alpha float64) float64 { return bose.G12(alpha + x*x/2) })
		want := thermalUnit(semiIdealT, semiIdealTrap) * momenta / (2 * math.Pi * spread * spread)
		near(t, fmt.Sprint("at ", x), c.Column(x*spread, 0), want, 1e-4)
	}
}

// TestSemiIdealColumnAgainstAtoms lets atoms drawn from the phase space fly and counts them
// in boxes. The ideal form of the same number must fail it.
func TestSemiIdealColumnAgainstAtoms(t *testing.T) {
	const flight, y, atoms = 0.008, 1.2, 400000
	c := semiIdealCloud(t, y, flight)
	s1, s2 := math.Sqrt(c.ideal.XX), math.Sqrt(c.ideal.YY)
	number := thermalUnit(semiIdealT, semiIdealTrap) * semiIdealIntegral(y, bose.G32)
	boxes := [][2]float64{{0, 0}, {0.8, 0}, {0, 0.8}, {0.8, -0.8}, {1.6, 0.8}}
	const half = 0.3
	counts := make([]float64, len(boxes))
	flyAtoms(y, flight, atoms, func(a, b float64) {
		for i, box := range boxes {
			if math.Abs(a/s1-box[0]) < half && math.Abs(b/s2-box[1]) < half {
				counts[i]++
			}
		}
	})
	inBox := func(box [2]float64, column func(a, b float64) float64) float64 {
		return atoms / number * s1 * s2 * quad.Fixed(func(a float64) float64 {
			return quad.Fixed(func(b float64) float64 { return column(a*s1, b*s2) }, box[1]-half, box[1]+half, 6, nil, 0)
		}, box[0]-half, box[0]+half, 6, nil, 0)
	}
	ideal := func(a, b float64) float64 { return ThermalColumn(number, 0, c.ideal, a, b) }
	worst := 0.
	for i, box := range boxes {
		within(t, fmt.Sprint("atoms in box ", box), counts[i], inBox(box, c.Column), 4*math.Sqrt(counts[i]))
		worst = math.Max(worst, math.Abs(counts[i]-inBox(box, ideal))/math.Sqrt(counts[i]))
	}
	if !(worst > 10) {
		t.Errorf("the ideal form is only %.1f standard deviations off: the test sees nothing", worst)
	}
}

// flyAtoms draws places and momenta of thermal atoms of a semi-ideal gas and calls see
// with their offsets in the picture.
func flyAtoms(y, flight float64, atoms int, see func(a, b float64)) {
	random := rand.New(rand.NewPCG(7, 11))
	const cells, end = 20000, 25.
	cumulated := make([]float64, cells+1)
	for i := range cells {
		v := (float64(i) + 0.5) / cells * end
		cumulated[i+1] = cumulated[i] + math.Sqrt(v)*bose.G32(math.Abs(v-y))
	}
	for range atoms {
		target, low, high := random.Float64()*cumulated[cells], 0, cells
		for high-low > 1 {
			if mid := (low + high) / 2; cumulated[mid] <= target {
				low = mid
			} else {
				high = mid
			}
		}
		v := (float64(low) + random.Float64()) / cells * end
		place, alpha := direction(random), math.Abs(v-y)
		// The Bose distribution of a momentum is a mixture of gaussians of variance 1/k.
		k, rest := 1, random.Float64()*bose.G32(alpha)
		for ; k < 1e5; k++ {
			if rest -= math.Exp(-float64(k)*alpha) / math.Pow(float64(k), 1.5); rest <= 0 {
				break
			}
		}
		speed := math.Sqrt(KB * semiIdealT / rubidium)
		var at [2]float64
		for i, omega := range semiIdealTrap.Omega {
			r := math.Sqrt(2*v)*place[i]*speed/omega + random.NormFloat64()/math.Sqrt(float64(k))*speed*flight
			at[0] += semiIdealView[0][i] * r
			at[1] += semiIdealView[1][i] * r
		}
		see(at[0], at[1])
	}
}

func direction(random *rand.Rand) (n [3]float64) {
	for i := range n {
		n[i] = random.NormFloat64()
	}
	norm := math.Sqrt(n[0]*n[0] + n[1]*n[1] + n[2]*n[2])
	for i := range n {
		n[i] /= norm
	}
	return n
}

func TestSightKernel(t *testing.T) {
	for _, w := range []float64{0.011, 0.3, 1.03, 2.2, 2.99} {
		for _, p := range []float64{0.012, 0.26, 0.9, 3.3, 6.3} {
			tol := 1e-4
			if w*w < 0.05 || p*p < 0.05 {
				tol = 1e-3
			}
			within(t, fmt.Sprint("w, p = ", w, p), sightKernel(w*w, p*p)*math.Exp(p*p)/sqrtPi, sightIntegral(w, p)*math.Exp(p*p)/sqrtPi, tol)
		}
	}
	for _, q := range []float64{1e-3, 0.1, 5} {
		near(t, "across the edge", sightKernel(1e-12, q), sightKernel(-1e-12, q), 1e-4)
	}
}

func TestSemiIdealCloudRefuses(t *testing.T) {
	for _, bad := range []struct{ T, y, flight float64 }{{0, 1, 0.01}, {1e-7, 9.5, 0.01}, {1e-7, math.NaN(), 0.01}, {1e-7, 1, 1e-5}, {1e-7, 1, 0}, {1e-7, 1, -1}} {
		if _, err := NewSemiIdealCloud(bad.T, bad.y*KB*bad.T, rubidium, semiIdealTrap, semiIdealView, bad.flight, Release{}); err == nil {
			t.Errorf("no error for %v", bad)
		}
	}
	if _, err := NewSemiIdealCloud(1e-7, KB*1e-7, rubidium, semiIdealTrap, semiIdealView, 0.02, Release{Ramp: "linear", Duration: 1e-3}); err != nil {
		t.Errorf("a ramp: %v", err)
	}
}

func BenchmarkSemiIdealColumn(b *testing.B) {
	c := semiIdealCloud(b, 0.8, 0.02)
	for b.Loop() {
		c.Column(1e-5, 2e-5)
	}
}
