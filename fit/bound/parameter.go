package bound

import "math"

// Parameter is one of the numbers that the tied form of a cloud leaves free: all widths
// follow from T and all radii from Mu through trap and flight, Mu does not depend on the
// number of atoms. The condensate of an attractive gas has the variational width of its
// atoms, and no Mu.
type Parameter int

// The parameters of a picture.
const (
	Thermal    Parameter = iota // atoms of the thermal part
	T                           // K
	Alpha                       // −ln z, of a thermal part alone
	Condensate                  // atoms
	Mu                          // J
	X                           // px
	Y                           // px
	Angle                       // rad
	Light                       // ln of the scale of the light; background in σ0 n of a picture of density
	LightX                      // its change over the width of the picture
	LightY                      // and over the height
	numParameters
)

var parameterNames = [numParameters]string{
	"thermal", "T", "alpha", "condensate", "mu", "x", "y", "angle", "light", "light_x", "light_y",
}

func (p Parameter) String() string {
	if p < 0 || p >= numParameters {
		return "unknown"
	}
	return parameterNames[p]
}

// values holds a number for each parameter.
type values [numParameters]float64

// free lists the parameters of a cloud in an experiment.
func free(e *Experiment, c *Cloud) []Parameter {
	var f []Parameter
	if c.ThermalAtoms > 0 {
		f = append(f, Thermal, T)
	}
	if c.CondensateAtoms == 0 {
		f = append(f, Alpha)
	} else {
		f = append(f, Condensate)
		if !e.attractive() {
			f = append(f, Mu)
		}
	}
	f = append(f, X, Y)
	if e.FreeAngle {
		f = append(f, Angle)
	}
	return append(f, Light, LightX, LightY)
}

// saturated is the −ln z of a thermal part at the transition: at 0 its derivative diverges.
const saturated = 1e-6

// truth returns the parameters of a cloud and the step that differentiates each.
func truth(e *Experiment, c *Cloud) (at, steps values) {
	at = values{Thermal: c.ThermalAtoms, T: c.T, Condensate: c.CondensateAtoms, Mu: c.Mu, X: e.X, Y: e.Y}
	if c.CondensateAtoms == 0 {
		at[Alpha] = math.Max(c.Alpha, saturated)
	}
	for i, v := range at {
		steps[i] = 2e-3 * v
	}
	steps[X], steps[Y], steps[Angle] = 0.02, 0.02, 2e-3
	return at, steps
}
