package synth

import (
	"math/rand/v2"

	"gonum.org/v1/gonum/stat/distuv"
)

// directBelow is the mean below which arrivals are counted one by one. The rejection
// method above it never returns zero, which at this mean has a probability of 1e-13.
const directBelow = 30

// poisson returns a Poisson number of the given mean, exact in distribution at any mean.
func poisson(mean float64, rng *rand.Rand) float64 {
	if mean >= directBelow {
		return distuv.Poisson{Lambda: mean, Src: rng}.Rand()
	}
	n := 0.0
	for t := rng.ExpFloat64(); t < mean; t += rng.ExpFloat64() {
		n++
	}
	return n
}
