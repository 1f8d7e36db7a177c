package synth

import (
	"fmt"
	"math"
	"math/rand/v2"
)

// Probe is the light that falls on the atoms, in electrons per pixel and exposure:
//
//	P exp(−2 r²/w²) · exp(c + a·r) · (1 + Σ_k C_k cos(k·x + φ_k))
//
// with r from the beam's centre, x from the centre of the first pixel; c, a and φ are
// drawn for each frame.
type Probe struct {
	Electrons float64 // P, at the centre of the beam; > 0
	X, Y      float64 // the beam's centre, px
	Waist     float64 // w, 1/e² radius, px; 0: flat
	SlopeX    float64 // mean of a, per px
	SlopeY    float64
	// PowerNoise is the rms of c, SlopeNoise that of each part of a, from frame to frame.
	PowerNoise float64
	SlopeNoise float64
	Fringes    []Fringe
}

// Fringe is one interference pattern on the probe.
type Fringe struct {
	Contrast float64 // C
	KX, KY   float64 // wave vector, rad per px
	Phase    float64 // mean phase, rad
	Wander   float64 // rms of the phase from shot to shot, rad
	Jitter   float64 // rms of the phase from frame to frame within a shot, rad
}

func (p Probe) check() error {
	if !(p.Electrons > 0) || math.IsInf(p.Electrons, 0) {
		return fmt.Errorf("probe: %g electrons per pixel; give a positive number", p.Electrons)
	}
	for _, v := range []float64{p.X, p.Y, p.Waist, p.SlopeX, p.SlopeY, p.PowerNoise, p.SlopeNoise} {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return fmt.Errorf("probe: a figure is %g; give finite numbers", v)
		}
	}
	if p.PowerNoise < 0 || p.SlopeNoise < 0 || p.Waist < 0 {
		return fmt.Errorf("probe: noise or waist below zero")
	}
	sum := 0.0
	for _, f := range p.Fringes {
		sum += math.Abs(f.Contrast)
	}
	if !(sum < 1) {
		return fmt.Errorf("probe: contrasts of the fringes add up to %g; keep the sum below 1", sum)
	}
	return nil
}

// settle returns the phases of this shot.
func (p Probe) settle(rng *rand.Rand) []float64 {
	phases := make([]float64, len(p.Fringes))
	for k, f := range p.Fringes {
		phases[k] = f.Phase + f.Wander*rng.NormFloat64()
	}
	return phases
}

// beam is the probe of one frame over the columns at xs. Envelope and fringes are products
// of a part of x and a part of y, so that a row costs no transcendental function a cell.
type beam struct {
	probe    Probe
	slopeY   float64
	envelope []float64
	cos, sin [][]float64 // of k_x x + φ, by fringe and column
}

// beam draws what differs in one frame of a shot with the given phases.
func (p Probe) beam(phases, xs []float64, rng *rand.Rand) beam {
	power := p.PowerNoise * rng.NormFloat64()
	slopeX := p.SlopeX + p.SlopeNoise*rng.NormFloat64()
	b := beam{probe: p, slopeY: p.SlopeY + p.SlopeNoise*rng.NormFloat64()}
	b.envelope = make([]float64, len(xs))
	for i, x := range xs {
		b.envelope[i] = p.Electrons * math.Exp(power+p.fall(x-p.X, slopeX))
	}
	for k, f := range p.Fringes {
		phase := phases[k] + f.Jitter*rng.NormFloat64()
		c, s := make([]float64, len(xs)), make([]float64, len(xs))
		for i, x := range xs {
			s[i], c[i] = math.Sincos(f.KX*x + phase)
		}
		b.cos, b.sin = append(b.cos, c), append(b.sin, s)
	}
	return b
}

// fall returns the exponent of the envelope along one axis at distance d of the centre.
func (p Probe) fall(d, slope float64) float64 {
	if p.Waist == 0 {
		return slope * d
	}
	return slope*d - 2*d*d/(p.Waist*p.Waist)
}

// row fills dst with the light at height y.
func (b beam) row(dst []float64, y float64) {
	for i := range dst {
		dst[i] = 1
	}
	for k, f := range b.probe.Fringes {
		s, c := math.Sincos(f.KY * y)
		s, c = s*f.Contrast, c*f.Contrast
		for i := range dst {
			dst[i] += c*b.cos[k][i] - s*b.sin[k][i]
		}
	}
	e := math.Exp(b.probe.fall(y-b.probe.Y, b.slopeY))
	for i := range dst {
		dst[i] *= e * b.envelope[i]
	}
}
