package predict

import (
	"math"

	"fallshadow/model"
)

// Push is what the probe does to the atoms while it shines, at the centre without other
// atoms in front.
type Push struct {
	Photons float64 // scattered by an atom
	Doppler float64 // shift at the end of the pulse over the full width Γ
	Blur    float64 // rms of the random recoil, m
	Along   float64 // way along the beam, m
}

// Push returns the effect of an exposure of so many s.
func (p *Plan) Push(exposure float64) Push {
	e := &p.Experiment
	law := model.Law{Alpha: e.Optics.Alpha, Detuning: e.Optics.Detuning}
	n := law.PhotonsScattered(exposure, p.Saturation(), e.Species.Linewidth)
	return Push{
		Photons: n,
		Doppler: e.Species.DopplerShift(n) * 2 * math.Pi / e.Species.Linewidth,
		Blur:    e.Species.RecoilBlur(n, exposure),
		Along:   e.Species.RecoilPush(n, exposure),
	}
}
