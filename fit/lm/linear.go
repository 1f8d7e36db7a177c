package lm

// linear is a problem near one point, its centre: F(x+d) ≈ |ρ + J d|². The loop knows
// a problem only through it, so that one loop serves the normal and the dense form.
type linear interface {
	// try evaluates F at x, which need not lie in the domain.
	try(x []float64) float64
	// accept makes the point tried last the centre. It refuses, and keeps the old centre,
	// where the derivatives are not finite.
	accept() bool
	// gradient is Jᵀρ at the centre.
	gradient() []float64
	// norms fills dst with the squared column norms of J at the centre.
	norms(dst []float64)
	// solve fills the free entries of d with the minimiser of |ρ + J d|² + λ Σ scaleⱼ dⱼ²,
	// the other entries staying as they are. It fails where the free columns depend on each
	// other to rounding.
	solve(d []float64, free []bool, lambda float64, scale []float64) bool
	// decrease is F − |ρ + J d|² at the centre.
	decrease(d []float64) float64
	// normal fills h with JᵀJ at the centre.
	normal(h []float64)
}
