package fit

import (
	"fmt"
	"math"

	"fallshadow/model"
)

// The parameters of a cloud in a picture. Lengths are in pixels; the logarithms scale the
// principal radii of the template that trap and flight give at T0 and Mu0.
const (
	pThermal = iota // peak of σ0 n of the thermal part
	pWidth1         // ln of the scale of its width along axis 1
	pWidth2
	pCondensate // peak of σ0 n of the condensate
	pRadius1    // ln of the scale of its radius along axis 1
	pRadius2
	pX     // centre
	pY     //
	pAngle // turn of both parts against the template, rad
	pAlpha // −ln z of the thermal part
	pLight // ln of the scale of the reference
	pLightX
	pLightY
	numParams
)

// firstLight is the first parameter of the light; those before it shape the density.
const firstLight = pLight

type params [numParams]float64

// The temperature and the chemical potential of a template, in K and J; any would do.
const (
	templateT  = 100e-9
	templateMu = 50e-9 * model.KB
)

// ellipse is a shape by its principal axes: squared half-axes in px² and the angle of the
// first axis.
type ellipse struct {
	square [2]float64
	angle  float64
}

func (e ellipse) shape() model.Shape {
	return model.Shape{XX: e.square[0], YY: e.square[1]}.Turn(e.angle)
}

// template holds what trap, flight and pixel say of a cloud: the shapes of both parts at
// templateT and templateMu. Widths grow as √T and radii as √μ.
type template struct {
	thermal, condensate ellipse
	angle               float64 // of trap axis 1 as the settings give it
	gaussian            bool    // the condensate of an attractive gas is a gaussian
	pixel               float64
	excess              *excess // of the thermal part beside a condensate; nil: none
}

// newTemplate projects the expanded shapes onto the picture. flight is in s. The condensate of
// an attractive gas takes the variational width of n0 atoms, at most of those that the trap can
// hold; n0 does not matter otherwise. It fails where the expansion does: a negative or
// non-finite flight, a trap that is none.
func newTemplate(lab *Lab, flight, n0 float64) (template, error) {
	t := template{pixel: lab.Optics.Pixel, angle: math.Atan2(lab.View[1][0], lab.View[0][0])}
	bt, err := model.ExpandThermal(lab.Trap, flight, lab.Release)
	if err != nil {
		return t, fmt.Errorf("expand the thermal part: %w", err)
	}
	px2 := t.pixel * t.pixel
	shape := lab.View.Project(model.ThermalVariances(templateT, lab.Species.Mass, lab.Trap, bt)).Scale(1 / px2)
	t.thermal = principal(shape, t.angle)
	if lab.Species.ScatteringLength < 0 {
		t.gaussian = true
		if shape, err = gaussianShape(lab, flight, n0); err != nil {
			return t, err
		}
		t.condensate = principal(shape.Scale(1/px2), t.angle)
		return t, nil
	}
	bc, err := model.ExpandCondensate(lab.Trap, flight, lab.Release)
	if err != nil {
		return t, fmt.Errorf("expand the condensate: %w", err)
	}
	var d [3]float64
	for i, r := range model.Radii(templateMu, lab.Species.Mass, lab.Trap) {
		d[i] = r * r * bc[i] * bc[i]
	}
	t.condensate = principal(lab.View.Project(d).Scale(1/px2), t.angle)
	return t, nil
}

// gaussianShape is the expanded shape (variances of the density, m²) of an attractive condensate.
func gaussianShape(lab *Lab, flight, n0 float64) (model.Shape, error) {
	sp := &lab.Species
	n0 = math.Min(n0, 0.999*model.GaussianCriticalNumber(lab.Trap, sp.Mass, sp.ScatteringLength))
	w, err := model.VariationalWidths(n0, sp.Mass, sp.ScatteringLength, lab.Trap)
	if err != nil {
		return model.Shape{}, fmt.Errorf("condensate: %w", err)
	}
	b, err := model.ExpandGaussian(n0, sp.Mass, sp.ScatteringLength, lab.Trap, flight, lab.Release)
	if err != nil {
		return model.Shape{}, fmt.Errorf("expand the condensate: %w", err)
	}
	return lab.View.Project(model.GaussianVariances(w, b)), nil
}

func principal(s model.Shape, near float64) ellipse {
	a, b, angle := s.Principal(near)
	return ellipse{[2]float64{a, b}, angle}
}

// scaled returns the ellipse of the parameters: squares times e^(2l), turned by angle.
func (e ellipse) scaled(l1, l2, turn float64) ellipse {
	return ellipse{[2]float64{e.square[0] * math.Exp(2*l1), e.square[1] * math.Exp(2*l2)}, e.angle + turn}
}

func (t *template) thermalOf(p *params) ellipse {
	return t.thermal.scaled(p[pWidth1], p[pWidth2], p[pAngle])
}

func (t *template) condensateOf(p *params) ellipse {
	return t.condensate.scaled(p[pRadius1], p[pRadius2], p[pAngle])
}

// temperature returns T in K of a width scale, mu the chemical potential in J of a radius scale.
func temperature(l float64) float64 { return templateT * math.Exp(2*l) }
func mu(l float64) float64          { return templateMu * math.Exp(2*l) }
