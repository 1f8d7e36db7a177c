// Package lm minimises sums of squares, F(x) = Σρᵢ(x)², by the Levenberg-Marquardt
// method: each step minimises |ρ + J d|² + λ|D d|², where J is the Jacobian, D holds its
// largest column norms so far, and λ keeps |D d| within a radius that follows the ratio of
// the decrease that came to the one predicted; near the minimum λ is 0.
// Parameters may be fixed, bounded, tied linearly (Tied) and limited in their step.
//
// A problem comes in one of two forms. In normal form (Problem) it hands over JᵀJ and Jᵀρ,
// summed in one pass over its data; that suits pictures. In dense form (Residuals) it
// fills a Jacobian, which is solved by QR; that suits few data and parameters that hang
// together closely, since QR loses half the digits that the normal equations lose.
//
// Sources: K. Levenberg, Q. Appl. Math. 2, 164 (1944); D. Marquardt, J. SIAM 11, 431
// (1963); J. J. Moré, Lecture Notes in Mathematics 630, 105 (1978).
package lm

import "gonum.org/v1/gonum/mat"

// Problem is a least-squares problem in normal form: F = Σρ², H = JᵀJ, G = Jᵀρ, so that
// the gradient of F is 2G.
type Problem interface {
	// Dim is the number n of parameters.
	Dim() int
	// Normal evaluates F at x and, where h and g are not nil, fills h (n×n, row-major, both
	// triangles) and g (n). It returns +Inf or NaN where x is outside the model's domain.
	// It must not change or keep x.
	Normal(x []float64, h, g []float64) float64
}

// Residuals is a least-squares problem in dense form with m residuals of n parameters.
type Residuals interface {
	Size() (m, n int)
	// Residuals fills r (m) with ρ(x); a NaN or Inf says that x is outside the domain.
	Residuals(x, r []float64)
	// Jacobian fills j (m×n) with ∂ρᵢ/∂xⱼ at x.
	Jacobian(x []float64, j *mat.Dense)
}

// Settings steer a minimisation. Slices have one entry a parameter; nil means no bound, no
// fixed parameter, no limit. The zero value, and nil, are the defaults.
type Settings struct {
	Lower, Upper []float64 // bounds, ±Inf for none; the start must lie within
	Fixed        []bool

	// MaxStep is the largest |change| of a parameter in one step, RelStep the largest
	// relative to |x| (not asked where x = 0); 0 is no limit. The whole step is shortened.
	MaxStep, RelStep []float64

	// The minimisation ends when the Gauss-Newton step d is small, |D d| ≤ XTol |D x|; when
	// the decrease of F that it promises is small, ≤ FTol F or ≤ PredictTol; or when every
	// free column of J stands upright on ρ, |Gⱼ| ≤ GTol |Jⱼ||ρ|. Zero means XTol 1e-10, FTol
	// 1e-12, GTol 0, PredictTol 0; a negative number switches a test off. A decrease that
	// rounding hides always ends it.
	XTol, FTol, GTol, PredictTol float64

	// AcceptPredicted takes the last step on its prediction, without evaluating there:
	// Result.F is then the predicted one and Result.H that of the point before.
	AcceptPredicted bool

	MaxIterations int     // steps tried; 0 means 200
	Lambda        float64 // damping λ of the first step; 0 is a Gauss-Newton step
}

// Result is what a minimisation found. X, H and AtBound belong to the Workspace and hold
// until its next use.
type Result struct {
	X           []float64
	F           float64
	Reason      Termination
	Iterations  int       // steps tried
	Evaluations int       // of F
	Lambda      float64   // of the last step
	H           []float64 // JᵀJ at X over all parameters, n×n row-major
	AtBound     []bool    // held at a bound by the gradient
	fixed       []bool
	factor      []float64 // upper triangle R with H = RᵀR where QR gave it
}
