package bound

import "testing"

// What the test against the fit needs, which stands outside the package.
var (
	Evap      = evap
	ReadTable = readTable
)

// Expected draws the expected counts of the atoms frame and those without atoms.
func Expected(t testing.TB, e *Experiment, c *Cloud) (atoms, light []float64) {
	at, _ := truth(e, c)
	for i := range e.Width * e.Height {
		light = append(light, e.Light(float64(i%e.Width), float64(i/e.Width)))
	}
	return expected(t, e, &at), light
}
