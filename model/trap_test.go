package model

import (
	"math"
	"testing"
)

func TestConstants(t *testing.T) {
	have := map[string]float64{"h": H, "hbar": HBar, "kB": KB, "c": C, "a0": A0, "u": U, "muB": MuB, "gn": G0}
	seen := 0
	for _, row := range readTable(t, "constants.csv") {
		if v, ok := have[row["symbol"]]; ok {
			near(t, row["symbol"], v, row.num(t, "value"), 1e-15)
			seen++
		}
	}
	if seen != len(have) {
		t.Errorf("%d of %d constants stand in the table", seen, len(have))
	}
}

// TestTrap: ω̄ is the number that makes ω̄³ the product, ā² mω̄ = ħ; W26 is the sag g/ω²
// at 20 Hz.
func TestTrap(t *testing.T) {
	trap := TrapHz(20, 50, 110)
	w := trap.GeometricMean()
	near(t, "geometric mean", w*w*w, 8*math.Pow(math.Pi, 3)*20*50*110, 1e-14)
	near(t, "arithmetic mean", trap.ArithmeticMean(), 2*math.Pi*60, 1e-15)
	l := trap.Length(3e-26)
	near(t, "length", l*l*3e-26*w, HBar, 1e-14)
	sag, tol := workedExample(t, "W26")
	within(t, "W26", G0/(trap.Omega[0]*trap.Omega[0])*1e6, sag, tol)
	if err := trap.Validate(); err != nil {
		t.Error(err)
	}
	for _, bad := range []Trap{{}, TrapHz(1, -1, 1), TrapHz(1, 1, math.NaN()), TrapHz(math.Inf(1), 1, 1)} {
		if bad.Validate() == nil {
			t.Errorf("%v is accepted", bad)
		}
	}
}
