package settings

import (
	"math"

	"fallshadow/fit"
	"fallshadow/model"
)

// nominal is the part of itself by which a setting of unknown uncertainty is moved, only
// to find the numbers that need it.
const nominal = 0.01

// mover moves a laboratory and a flight (s) by a step in the unit of its key.
type mover func(lab fit.Lab, flight, step float64) (fit.Lab, float64)

// calibrated pairs a key with what its error moves. A setting of unknown uncertainty is
// moved by least at least, in its unit: it may be 0.
type calibrated struct {
	table, name string
	least       float64
	move        mover
}

// calibrations returns the settings whose errors the numbers carry, in a fixed order. A
// setting that is exact (stated, or by nature while nothing is stated) is left out, and
// so is one that has no part in this night: counts_per_isat of a weak probe, the light in
// a density image.
func (s *Settings) calibrations() []fit.Calibration {
	var out []fit.Calibration
	for _, c := range s.movers() {
		k := lookup([]string{c.table}, c.name)
		q := *k.field(s).(*Quantity)
		if !s.carries(k, q) {
			continue
		}
		step := q.Err
		if !q.Known {
			step = math.Max(nominal*math.Abs(q.Value), c.least)
		}
		move := c.move
		out = append(out, fit.Calibration{
			Name:  c.name,
			Known: q.Known,
			Apply: func(lab fit.Lab, flight, n float64) (fit.Lab, float64) { return move(lab, flight, n*step) },
		})
	}
	return out
}

// carries reports whether an error of the setting reaches the numbers.
func (s *Settings) carries(k *key, q Quantity) bool {
	density := s.Shots.Layout == "density"
	switch {
	case q.Known && q.Err == 0:
		return false
	case !q.Known && (k.unstated == exact || k.unstated == exactAtZero && q.Value == 0):
		return false
	case k.name == "counts_per_isat":
		return q.Given && !density
	case k.name == "stray_fraction":
		return !density
	case k.name == "alpha", k.name == "detuning_gamma":
		return !density || s.Shots.DensityUnit == "log_ratio"
	}
	return true
}

func (s *Settings) movers() []calibrated {
	hertz := func(axis int) mover {
		return func(lab fit.Lab, flight, step float64) (fit.Lab, float64) {
			lab.Trap.Omega[axis] += 2 * math.Pi * step
			return lab, flight
		}
	}
	turn := func(angle, tilt float64) mover {
		return func(lab fit.Lab, flight, step float64) (fit.Lab, float64) {
			lab.View = s.view(angle*step, tilt*step)
			return lab, flight
		}
	}
	optics := func(change func(o *fit.Optics, step float64)) mover {
		return func(lab fit.Lab, flight, step float64) (fit.Lab, float64) {
			change(&lab.Optics, step)
			return lab, flight
		}
	}
	c, p := s.Camera, s.Probe
	return []calibrated{
		{"atom", "scattering_length_a0", 0.01, func(lab fit.Lab, flight, step float64) (fit.Lab, float64) {
			lab.Species.ScatteringLength += step * model.A0
			return lab, flight
		}},
		{"trap", "axis1_hz", 0, hertz(0)},
		{"trap", "axis2_hz", 0, hertz(1)},
		{"trap", "sight_hz", 0, hertz(2)},
		{"trap", "angle_deg", 0, turn(1, 0)},
		{"trap", "tilt_deg", 0, turn(0, 1)},
		{"camera", "pixel_um", 0, optics(func(o *fit.Optics, step float64) { o.Pixel *= 1 + step/c.PixelUm.Value })},
		{"camera", "magnification", 0, optics(func(o *fit.Optics, step float64) { o.Pixel /= 1 + step/c.Magnification.Value })},
		{"camera", "resolution_um", 1e5 * s.ObjectPixel(), optics(func(o *fit.Optics, step float64) { o.Blur = math.Max(0, o.Blur+step*1e-6) })},
		{"probe", "alpha", 0, optics(func(o *fit.Optics, step float64) { o.Alpha += step })},
		{"probe", "detuning_gamma", 0, optics(func(o *fit.Optics, step float64) { o.Detuning += step })},
		{"probe", "counts_per_isat", 0, optics(func(o *fit.Optics, step float64) { o.Saturation *= 1 + step/p.CountsPerIsat.Value })},
		{"probe", "stray_fraction", 0, optics(func(o *fit.Optics, step float64) { o.Stray = math.Max(0, o.Stray+step) })},
		{"flight", "zero_ms", 0.01, func(lab fit.Lab, flight, step float64) (fit.Lab, float64) {
			return lab, math.Max(0, flight+step*1e-3)
		}},
	}
}

// Unstated returns the settings whose uncertainty nobody stated and that the calibration
// errors need, as table.key; while it is not empty some cells ending in _cal stay empty.
func (s *Settings) Unstated() []string {
	var names []string
	for _, c := range s.movers() {
		k := lookup([]string{c.table}, c.name)
		if q := *k.field(s).(*Quantity); !q.Known && s.carries(k, q) {
			names = append(names, k.full())
		}
	}
	return names
}
