package settings

import (
	"strings"

	"fallshadow/model"
)

// unit is a unit as the end of a key's name says it; factor brings it to the base of its
// dimension. Units of no dimension are known but convert to nothing.
type unit struct {
	name, dimension string
	factor          float64
}

// rad is a radian per second in Hz.
const rad = 0.15915494309189535

var units = []unit{
	{"hz", "frequency", 1}, {"khz", "frequency", 1e3}, {"mhz", "frequency", 1e6},
	{"rad_per_s", "frequency", rad}, {"rad_s", "frequency", rad}, {"rads", "frequency", rad}, {"omega", "frequency", rad},
	{"m", "length", 1}, {"cm", "length", 1e-2}, {"mm", "length", 1e-3}, {"um", "length", 1e-6}, {"nm", "length", 1e-9},
	{"a0", "length", model.A0},
	{"s", "time", 1}, {"sec", "time", 1}, {"ms", "time", 1e-3}, {"us", "time", 1e-6}, {"ns", "time", 1e-9},
	{"deg", "angle", 1}, {"rad", "angle", 57.29577951308232}, {"mrad", "angle", 0.05729577951308232},
	{"u", "mass", 1}, {"amu", "mass", 1}, {"kg", "mass", 1 / model.U},
	{"gamma", "", 0}, {"counts", "", 0}, {"adu", "", 0}, {"electrons", "", 0}, {"e", "", 0}, {"px", "", 0}, {"pixels", "", 0},
}

// splitUnit cuts a key's name into what it names and its unit; the unit is empty where
// the name ends in none.
func splitUnit(name string) (stem string, u unit) {
	lower := strings.ToLower(name)
	for _, one := range units {
		if strings.HasSuffix(lower, "_"+one.name) && len(one.name) > len(u.name) {
			u = one
		}
	}
	if u.name == "" {
		return lower, u
	}
	return lower[:len(lower)-len(u.name)-1], u
}

// convert brings a number from one unit to another of the same dimension.
func convert(x float64, from, to unit) (float64, bool) {
	if from.dimension == "" || from.dimension != to.dimension {
		return 0, false
	}
	return x * from.factor / to.factor, true
}
