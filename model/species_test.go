package model

import (
	"math"
	"strings"
	"testing"
)

// TestSpeciesTable compares every column with species.csv and its derived columns, which
// have the digits printed there.
func TestSpeciesTable(t *testing.T) {
	rows := readTable(t, "species.csv")
	if len(rows) != len(SpeciesNames()) {
		t.Errorf("%d species, the table has %d", len(SpeciesNames()), len(rows))
	}
	for _, row := range rows {
		s, name := must(LookupSpecies(row["species"]))(t), row["species"]
		near(t, name+" mass", s.Mass/U, row.num(t, "mass_u"), 1e-15)
		near(t, name+" wavelength", s.Wavelength, row.num(t, "lambda_vac_nm")*1e-9, 1e-15)
		near(t, name+" linewidth", s.Linewidth, 2*math.Pi*1e6*row.num(t, "gamma_over_2pi_MHz"), 1e-15)
		near(t, name+" sigma0", s.Sigma0(), row.num(t, "sigma0_m2"), 5e-7)
		near(t, name+" Isat", s.SaturationIntensity()/10, row.num(t, "Isat_mW_cm2"), 5e-5)
		near(t, name+" recoil", s.RecoilVelocity()*1e3, row.num(t, "v_rec_mm_s"), 5e-5)
		if s.Tunable != (row["feshbach"] == "yes") {
			t.Errorf("%s: tunable is %v", name, s.Tunable)
		}
		if row["a_scatt_a0"] == "" {
			if !s.NeedsScatteringLength || !math.IsNaN(s.ScatteringLength) {
				t.Errorf("%s must be given a scattering length, has %g", name, s.ScatteringLength)
			}
			continue
		}
		near(t, name+" a", s.ScatteringLength/A0, row.num(t, "a_scatt_a0"), 1e-15)
	}
}

// TestSpeciesOutside: published Isat, σ0, recoil and scattering lengths (W10-W13, W27-W29;
// their sources stand in the table).
func TestSpeciesOutside(t *testing.T) {
	rb, na := must(LookupSpecies("87Rb"))(t), must(LookupSpecies("23Na"))(t)
	cs, he := must(LookupSpecies("133Cs"))(t), must(LookupSpecies("4He*"))(t)
	yb := must(LookupSpecies("174Yb"))(t)
	for id, got := range map[string]float64{
		"W10": rb.SaturationIntensity() / 10,
		"W11": rb.Sigma0() * 1e13,
		"W12": na.SaturationIntensity() / 10,
		"W13": cs.SaturationIntensity() / 10,
		"W27": rb.RecoilVelocity() * 1e3,
		"W28": he.ScatteringLength / A0,
		"W29": yb.ScatteringLength / A0,
	} {
		want, tol := workedExample(t, id)
		within(t, id, got, want, tol)
	}
}

func TestLookupSpecies(t *testing.T) {
	for _, name := range []string{"87Rb", "87rb", "Rb87", "rb-87", " RB 87 "} {
		if s := must(LookupSpecies(name))(t); s.Name != "87Rb" {
			t.Errorf("%q gives %s", name, s.Name)
		}
	}
	for _, name := range []string{"", "88Rb", "unobtainium"} {
		_, err := LookupSpecies(name)
		if err == nil || !strings.Contains(err.Error(), "87Rb, 133Cs") {
			t.Errorf("%q: error %v does not list the species", name, err)
		}
	}
}

// TestWithState: a of 87Rb in |2,2> and |2,1> from van Kempen et al. (2002) and Egorov et
// al. (2013), both from memory.
func TestWithState(t *testing.T) {
	rb := must(LookupSpecies("87Rb"))(t)
	for state, a := range map[string]float64{"|1,-1>": 100.4, "1,-1": 100.4, "|2,2>": 98.98, "2, +2": 98.98, "|2,1⟩": 95.44} {
		near(t, "87Rb "+state, must(rb.WithState(state))(t).ScatteringLength/A0, a, 1e-15)
	}
	if _, err := rb.WithState("|3,3>"); err == nil || !strings.Contains(err.Error(), "|1,-1>, |2,2>, |2,1>") {
		t.Errorf("unknown state: error %v does not list the states", err)
	}
	li := must(must(LookupSpecies("7Li"))(t).WithState("1,1"))(t)
	if !li.NeedsScatteringLength {
		t.Errorf("7Li in |1,1> must be given a scattering length, has %g", li.ScatteringLength)
	}
	if s := must(must(LookupSpecies("39K"))(t).WithState("|1,0>"))(t); s.State != "|1,0>" || !s.NeedsScatteringLength {
		t.Errorf("39K takes any state: got %+v", s)
	}
}
