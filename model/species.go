package model

import (
	"fmt"
	"math"
	"strings"
)

// Species is an atom as far as its shadow and its condensate need to know it, in SI
// units. The zero value is no atom.
type Species struct {
	Name       string
	Mass       float64 // kg
	Wavelength float64 // of the imaging line in vacuum, m
	Linewidth  float64 // Γ, natural full width, rad/s
	// ScatteringLength is the s-wave scattering length in m, NaN where the user must
	// give it.
	ScatteringLength      float64
	State                 string // internal state that ScatteringLength holds for
	Source                string // where line and scattering length come from, and how well that is known
	NeedsScatteringLength bool   // ScatteringLength is NaN because a field sets it
	Tunable               bool   // ScatteringLength depends on the magnetic field: ask the user
	Dipolar               bool   // magnetic dipoles act beside the contact interaction, Thomas-Fermi is approximate
}

// Sigma0 returns the resonant cross-section 3λ²/2π of a closed two-level transition in m².
func (s Species) Sigma0() float64 {
	return 3 * s.Wavelength * s.Wavelength / (2 * math.Pi)
}

// SaturationIntensity returns πhcΓ/3λ³ of a closed two-level transition in W/m²
// (divide by 10 for mW/cm²).
func (s Species) SaturationIntensity() float64 {
	return math.Pi * H * C * s.Linewidth / (3 * s.Wavelength * s.Wavelength * s.Wavelength)
}

// RecoilVelocity returns h/mλ in m/s.
func (s Species) RecoilVelocity() float64 { return H / (s.Mass * s.Wavelength) }

// LookupSpecies finds a species by name: mass number and symbol in either order, in any
// case, such as 87Rb, rb87 or 4He*. The error lists the known names.
func LookupSpecies(name string) (Species, error) {
	want := speciesKey(name)
	for _, row := range speciesTable {
		if speciesKey(row.name) == want {
			return row.species(), nil
		}
	}
	return Species{}, fmt.Errorf("unknown species %q: known are %s; or give mass, wavelength, linewidth and scattering length",
		name, strings.Join(SpeciesNames(), ", "))
}

// SpeciesNames returns the known names in order of mass.
func SpeciesNames() []string {
	names := make([]string, len(speciesTable))
	for i, row := range speciesTable {
		names[i] = row.name
	}
	return names
}

// WithState returns the species with the scattering length of another internal state,
// written as |F,mF> or F,mF. A species whose scattering length the user must give takes
// any state. The error lists the known states.
func (s Species) WithState(state string) (Species, error) {
	want, known := stateKey(state), ""
	if want == stateKey(s.State) {
		return s, nil
	}
	for _, row := range stateTable {
		if row.name != s.Name {
			continue
		}
		if stateKey(row.state) == want {
			s.State, s.Source = row.state, row.source
			s.setScatteringLength(row.a)
			return s, nil
		}
		known += ", " + row.state
	}
	if s.NeedsScatteringLength {
		s.State = state
		return s, nil
	}
	return Species{}, fmt.Errorf("no scattering length known for %s in state %q: known are %s%s; or give the scattering length",
		s.Name, state, s.State, known)
}

func (s *Species) setScatteringLength(bohr float64) {
	s.ScatteringLength = bohr * A0
	s.NeedsScatteringLength = math.IsNaN(bohr)
}

func (row speciesRow) species() Species {
	s := Species{
		Name:       row.name,
		Mass:       row.mass * U,
		Wavelength: row.wavelength * 1e-9,
		Linewidth:  2 * math.Pi * row.linewidth * 1e6,
		State:      row.state,
		Source:     row.source,
		Tunable:    row.tunable,
		Dipolar:    row.dipolar,
	}
	s.setScatteringLength(row.a)
	return s
}

// speciesKey brings rb87, Rb-87 and 87Rb to one form: digits, then lower-case letters.
func speciesKey(name string) string {
	var digits, letters strings.Builder
	for _, r := range strings.ToLower(name) {
		switch {
		case r >= '0' && r <= '9':
			digits.WriteRune(r)
		case r >= 'a' && r <= 'z':
			letters.WriteRune(r)
		}
	}
	return digits.String() + letters.String()
}

// stateKey drops the brackets and spaces of a state.
func stateKey(state string) string {
	return strings.NewReplacer("|", "", ">", "", "⟩", "", " ", "", "+", "").Replace(strings.ToLower(state))
}
