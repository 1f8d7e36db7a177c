package curve

import (
	"math"
	"sync"

	"gonum.org/v1/gonum/interp"

	"fallshadow/model"
	"fallshadow/model/bose"
)

// Excess returns by how much of the saturated number the thermal part of a semi-ideal gas
// exceeds it at y = μ/kT,
//
//	(4/√π ζ(3)) ∫ x² g_{3/2}(e^{−|y−x²|}) dx − 1 = [ζ(2)/ζ(3)] y + O(y^{3/2}),
//
// since the condensate pushes thermal atoms out to where there is more room. It does not
// depend on the gas; above y = 36 it is held. Source: model.SemiIdealAt.
func Excess(y float64) float64 {
	if !(y > 0) {
		return 0 * y
	}
	y = math.Min(y, excessEnd*excessEnd)
	return y * excessOverY().Predict(math.Sqrt(y))
}

const excessEnd = 6 // √y

var excessOverY = sync.OnceValue(func() *interp.FritschButland {
	trap := model.TrapHz(100, 100, 100)
	const mass, a, nodes = model.U, 1e-9, 241
	kT := model.HBar * trap.GeometricMean() * 100
	temperature := kT / model.KB
	x, f := make([]float64, nodes), make([]float64, nodes)
	for i := range nodes {
		x[i] = excessEnd * float64(i) / (nodes - 1)
		m, _ := model.SemiIdealAt(temperature, x[i]*x[i]*kT, mass, a, trap)
		f[i] = (m.Thermal/(1e6*bose.Zeta3) - 1) / (x[i] * x[i])
	}
	f[0] = bose.Zeta2 / bose.Zeta3
	var c interp.FritschButland
	c.Fit(x, f)
	return &c
})
