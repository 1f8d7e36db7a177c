package simulate

import (
	"math"
	"math/rand/v2"

	"fallshadow/imageio/synth"
)

// Streams of random numbers, apart from each other so that a change of the camera leaves
// the clouds as they were: one for the night, three a shot.
const (
	nightStream  = 0
	firstOfShots = 1
)

func (s Scenario) random(stream uint64) *rand.Rand { return rand.New(rand.NewPCG(s.Seed, stream)) }

// The sources of shot i, counted from 0.
func (s Scenario) cloudRandom(i int) *rand.Rand      { return s.random(firstOfShots + 3*uint64(i)) }
func (s Scenario) frameRandom(i int) *rand.Rand      { return s.random(firstOfShots + 3*uint64(i) + 1) }
func (s Scenario) secondDarkRandom(i int) *rand.Rand { return s.random(firstOfShots + 3*uint64(i) + 2) }

// waves draws the fringes of the night.
func (s Scenario) waves() []synth.Fringe {
	rng := s.random(nightStream)
	waves := make([]synth.Fringe, s.Fringes.Count)
	for i := range waves {
		period := s.Fringes.Period[0] * math.Pow(s.Fringes.Period[1]/s.Fringes.Period[0], rng.Float64())
		sin, cos := math.Sincos(2 * math.Pi * rng.Float64())
		k := 2 * math.Pi / period
		waves[i] = synth.Fringe{
			Contrast: s.Fringes.Contrast, KX: k * cos, KY: k * sin,
			Phase: 2 * math.Pi * rng.Float64(), Wander: s.Fringes.Wander, Jitter: s.Fringes.Jitter,
		}
	}
	return waves
}
