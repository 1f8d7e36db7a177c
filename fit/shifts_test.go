package fit

import (
	"math"
	"testing"

	"fallshadow/model"
	"fallshadow/model/numbers"
)

// TestShifts refits a picture in a laboratory that is moved by a calibration: the numbers
// must move as the fit said, although it looked at a coarser level than the picture. For
// thin parts the law itself says that N goes with alpha as alpha/(alpha + I/Isat).
func TestShifts(t *testing.T) {
	for name, opt := range map[string]Options{"default": {}, "free": {Free: true}, "number": {Fugacity: FugacityNumber}, "angle": {FreeAngle: true}} {
		t.Run(name, func(t *testing.T) { testShifts(t, opt) })
	}
}

func testShifts(t *testing.T, opt Options) {
	sc := standardScene(t, 90e-9, 6e4, 3)
	sc.w, sc.h, sc.x, sc.y = 256, 256, 127, 130
	sc.lab.Optics.Saturation, sc.electrons = 9000, 3000
	sc.withoutNoise = true
	const step = 0.01
	sc.lab.Calibration = []Calibration{
		{"alpha", true, func(l Lab, f, k float64) (Lab, float64) { l.Optics.Alpha *= 1 + step*k; return l, f }},
		{"magnification", true, func(l Lab, f, k float64) (Lab, float64) { l.Optics.Pixel /= 1 + step*k; return l, f }},
		{"axis1_hz", true, func(l Lab, f, k float64) (Lab, float64) { l.Trap.Omega[0] *= 1 + step*k; return l, f }},
		{"zero_ms", true, func(l Lab, f, k float64) (Lab, float64) { return l, f + 1e-4*k }},
	}
	if opt.FreeAngle { // a held angle moves the numbers in second order only
		sc.lab.Calibration = append(sc.lab.Calibration, Calibration{"angle_deg", true, func(l Lab, f, k float64) (Lab, float64) {
			l.View = turned(l.View, step*k)
			return l, f
		}})
	}
	pic := sc.draw(t)
	rest := mustFit(t, sc, pic, opt)
	if len(rest.Numbers.Shifts) != len(sc.lab.Calibration) {
		t.Fatalf("%d shifts", len(rest.Numbers.Shifts))
	}
	for i, c := range sc.lab.Calibration {
		moved := *sc
		lab, flight := c.Apply(*sc.lab, sc.flight, 1)
		moved.lab, moved.flight = &lab, flight
		again := mustFit(t, &moved, pic, opt)
		change := rest.Numbers.Shifts[i].Change
		for _, q := range []struct {
			name string
			said float64
			pick func(*numbers.Result) *numbers.Value
		}{
			{"thermal", change.Thermal, func(n *numbers.Result) *numbers.Value { return &n.Thermal }},
			{"condensate", change.Condensate, func(n *numbers.Result) *numbers.Value { return &n.Condensate }},
			{"T", change.T, func(n *numbers.Result) *numbers.Value { return &n.T }},
			{"mu", change.Mu, func(n *numbers.Result) *numbers.Value { return &n.Mu }},
		} {
			v := q.pick(&rest.Numbers).V
			came := (q.pick(&again.Numbers).V - v) / v
			within(t, c.Name+" moves "+q.name, q.said/v, came, 0.04*math.Abs(came)+4e-4)
		}
		if c.Name == "alpha" && opt == (Options{}) {
			a, s := sc.lab.Optics.Alpha, sc.electrons/sc.lab.Optics.Saturation
			within(t, "power of alpha", change.Thermal/rest.Numbers.Thermal.V/step, a/(a+s), 0.02)
		}
	}
}

// turned is a view whose picture is turned.
func turned(v model.Rotation, by float64) model.Rotation {
	sin, cos := math.Sincos(by)
	for i := range v[0] {
		v[0][i], v[1][i] = cos*v[0][i]-sin*v[1][i], sin*v[0][i]+cos*v[1][i]
	}
	return v
}
