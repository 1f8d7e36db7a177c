package bound

import (
	"errors"
	"math"
)

// Cloud is the truth that the picture is taken of. A part without atoms is absent, and so
// are its parameters.
type Cloud struct {
	T               float64 // K, of the thermal part
	ThermalAtoms    float64
	CondensateAtoms float64
	Mu              float64 // J, sets the radii of the condensate; of no meaning for an attractive gas
	Alpha           float64 // −ln z of a thermal part alone, ≥ 0; beside a condensate it counts as 0
}

func (c *Cloud) validate(attractive bool) error {
	settings := []setting{{"number of thermal atoms", c.ThermalAtoms, true}, {"number of condensed atoms", c.CondensateAtoms, true}}
	if !(c.ThermalAtoms > 0) {
		settings[1].zero = false
	} else {
		settings = append(settings, setting{"temperature", c.T, false})
	}
	if c.CondensateAtoms > 0 && !attractive {
		settings = append(settings, setting{"chemical potential", c.Mu, false})
	}
	if c.ThermalAtoms > 0 && c.CondensateAtoms == 0 {
		settings = append(settings, setting{"−ln z", c.Alpha, true})
	}
	if math.IsInf(c.ThermalAtoms+c.CondensateAtoms, 1) {
		return errors.New("number of atoms is infinite")
	}
	return validateAll(settings)
}
