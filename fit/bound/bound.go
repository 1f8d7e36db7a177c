// Package bound computes the Cramer-Rao bound: the smallest statistical errors that any
// unbiased fit of a cloud can have in a picture with given noise. It knows nothing of the
// fit: it differentiates the profiles of package model numerically, so that it can judge
// the fit's errors and say what a planned experiment will measure.
package bound

import (
	"context"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Errors are one standard deviation each, NaN of what the cloud does not have.
type Errors struct {
	T          float64 // K
	Thermal    float64 // atoms
	Condensate float64 // atoms
	Atoms      float64 // both parts
	Fraction   float64
	Mu         float64 // J
	// Free lists the parameters in the order of Covariance, which has their units.
	Free       []Parameter
	Covariance *mat.SymDense
}

// Bound returns the Cramer-Rao bound (Σ J Jᵀ/V)⁻¹ of a cloud in an experiment, the sum
// over pixels, J the derivatives of the expected counts M = κL of the atoms frame and V the
// variance of the residual A − κR of atoms frame A and reference R:
//
//	V = M + read² + κ² v_R + v_D,
//
// v_R = LightShot L + LightRead for the light L, v_D = (1−κ)² Dark for a shared dark and
// (1+κ²) Dark for two. The light of each pixel is
// thereby profiled out. What the variance itself tells of the cloud, one part in twice the
// counts, is left out. A picture of density has J of σ0 n and V = DensitySigma².
//
// The error says which setting is out of its domain, which parameter the picture does not
// tell, or that ctx was done. H. Cramér, Mathematical Methods of Statistics (Princeton
// 1946), chapter 32.
func Bound(ctx context.Context, e Experiment, c Cloud) (Errors, error) {
	if err := e.validate(); err != nil {
		return Errors{}, err
	}
	if err := c.validate(e.attractive()); err != nil {
		return Errors{}, err
	}
	f := free(&e, &c)
	info, err := fisher(ctx, &e, &c, f)
	if err != nil {
		return Errors{}, err
	}
	cov, err := invert(info, f)
	if err != nil {
		return Errors{}, err
	}
	return errorsOf(&c, f, cov), nil
}

// errorsOf propagates the covariance to the numbers by the delta method.
func errorsOf(c *Cloud, f []Parameter, cov *mat.SymDense) Errors {
	sigma := func(gradient values) float64 {
		g := mat.NewVecDense(len(f), nil)
		for i, p := range f {
			g.SetVec(i, gradient[p])
		}
		if v := mat.Inner(g, cov, g); v > 0 {
			return math.Sqrt(v)
		}
		return math.NaN()
	}
	n := c.ThermalAtoms + c.CondensateAtoms
	return Errors{
		T:          sigma(values{T: 1}),
		Thermal:    sigma(values{Thermal: 1}),
		Condensate: sigma(values{Condensate: 1}),
		Atoms:      sigma(values{Thermal: 1, Condensate: 1}),
		Fraction:   sigma(values{Thermal: -c.CondensateAtoms / (n * n), Condensate: c.ThermalAtoms / (n * n)}),
		Mu:         sigma(values{Mu: 1}),
		Free:       f,
		Covariance: cov,
	}
}
