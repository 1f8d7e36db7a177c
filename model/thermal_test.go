package model

import (
	"math"
	"testing"

	"fallshadow/model/bose"
)

// TestThermalCloud takes the table's cloud: 87Rb, 200 nK, 30, 80, 120 Hz, 15 ms; 10 printed
// digits, the peak column verified there by a sum over phase space.
func TestThermalCloud(t *testing.T) {
	rb := must(LookupSpecies("87Rb"))(t)
	trap, temperature, flight := TrapHz(30, 80, 120), 200e-9, 0.015
	b := must(ExpandThermal(trap, flight, Release{}))(t)
	v := ThermalVariances(temperature, rb.Mass, trap, b)
	for _, row := range readTable(t, "thermal_cloud.csv") {
		what := "z=" + row["z"]
		alpha := -math.Log(row.num(t, "z"))
		n := ThermalNumber(temperature, alpha, trap)
		near(t, what+" number", n, row.num(t, "N"), 1e-9)
		for i, axis := range []string{"1", "2", "3"} {
			near(t, what+" sigma"+axis, math.Sqrt(v[i]), row.num(t, "sigma"+axis+"_um")*1e-6, 1e-9)
		}
		s := View(0, 0, 0).Project(v)
		near(t, what+" column", ThermalPeakColumn(n, alpha, s), row.num(t, "n2_0_per_um2")*1e12, 1e-9)
		near(t, what+" line", ThermalPeakLine(n, alpha, v[0]), row.num(t, "n1_0_per_um")*1e6, 1e-9)
		within(t, what+" alpha from the number", ThermalAlpha(n, temperature, trap), alpha, 1e-14)
	}
}

// TestThermalColumn integrates a tilted cloud; its variance is that of the shape times
// g_4/g_3, by term-wise integration of the series.
func TestThermalColumn(t *testing.T) {
	s := Shape{XX: 1.3, XY: -0.4, YY: 0.8}
	for _, alpha := range []float64{0.05, 1, 4} {
		n, xx, xy := moments(10, 250, func(x, y float64) float64 { return ThermalColumn(5e3, alpha, s, x, y) })
		ratio := bose.G4(alpha) / bose.G3(alpha)
		near(t, "integral", n, 5e3, 1e-6)
		near(t, "xx", xx, s.XX*ratio, 1e-6)
		near(t, "xy", xy, s.XY*ratio, 1e-6)
		near(t, "peak", ThermalColumn(5e3, alpha, s, 0, 0), ThermalPeakColumn(5e3, alpha, s), 1e-15)
	}
}

func TestSaturatedCloud(t *testing.T) {
	trap := TrapHz(20, 120, 120)
	saturated := ThermalNumber(1e-7, 0, trap)
	if a := ThermalAlpha(1.001*saturated, 1e-7, trap); !math.IsNaN(a) {
		t.Errorf("alpha above saturation is %g, want NaN", a)
	}
	if a := ThermalAlpha(saturated*(1-1e-9), 1e-7, trap); !(a >= 0 && a < 1e-8) {
		t.Errorf("alpha at saturation is %g", a)
	}
}
