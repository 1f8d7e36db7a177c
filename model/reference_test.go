package model

import "math"

const rubidium = 86.909180529 * U

// unitTrap has ω̄ = 1/s and the ratios of the given frequencies.
func unitTrap(w1, w2, w3 float64) Trap {
	mean := math.Cbrt(w1 * w2 * w3)
	return Trap{[3]float64{w1 / mean, w2 / mean, w3 / mean}}
}
