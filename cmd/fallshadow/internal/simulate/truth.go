package simulate

import (
	"fmt"
	"math"

	"fallshadow/model"
)

// Truth is what a shot shows, in SI units but for the centre. Mu and the radii are NaN
// without a condensate.
type Truth struct {
	Shot   string  // name of the shot, its path in the night without ending
	Flight float64 // s, from the start of the release
	Scan   float64 // the scan variable

	N, N0, Thermal float64 // atoms, in the condensate, in the thermal part
	T              float64 // K
	Mu             float64 // J
	Alpha          float64 // −ln z, 0 below the transition
	Tc0            float64 // K, of the ideal gas of N atoms

	X, Y   float64    // centre, px
	Width  [2]float64 // rms of the thermal part along the picture's axes named after trap axes 1 and 2, m
	Radius [2]float64 // of the condensate, likewise, m
	Angle  float64    // of trap axis 1 from +x towards +y, rad
	PeakOD float64    // σ0 n of both parts at the centre
	Damage string     // how the shot was broken, empty where it was not
}

// shotName is that of shot i, counted from 0.
func (s *Scenario) shotName(i int) string { return fmt.Sprintf("%s_%04d", s.Name, i+1) }

// Truth returns what shot i shows, counted from 0, but for PeakOD, which Draw adds. It
// follows from settings, scenario and i alone.
func (n *Night) Truth(i int) (Truth, error) {
	s, m := n.Scenario, n.machine
	rng := s.cloudRandom(i)
	t := Truth{Shot: s.shotName(i), Angle: m.angle, Damage: s.Damage.of(i + 1)}
	t.Flight = n.flight(i)
	along := 0.0
	if s.Shots > 1 {
		along = float64(i) / float64(s.Shots-1)
	}
	t.Scan = between(s.Path.Scan, along)
	t.N = s.Path.Atoms[0] * math.Pow(s.Path.Atoms[1]/s.Path.Atoms[0], along) * math.Exp(s.Path.AtomsJitter*rng.NormFloat64())
	t.X = s.Picture.X + s.Picture.Jitter*rng.NormFloat64()
	t.Y = s.Picture.Y + s.Picture.Jitter*rng.NormFloat64()
	if t.Damage == empty {
		return t.vacant(), nil
	}
	t.Tc0 = model.CriticalTemperature(t.N, m.trap)
	t.T = between(s.Path.TnK, along) * 1e-9
	if s.Path.TReduced != [2]float64{} {
		t.T = between(s.Path.TReduced, along) * t.Tc0
	}
	if err := t.condense(s.Gas.Law, m); err != nil {
		return t, fmt.Errorf("shot %s: %w", t.Shot, err)
	}
	return t, nil
}

// vacant returns the truth of a picture without atoms.
func (t Truth) vacant() Truth {
	nan := math.NaN()
	t.N, t.T, t.Mu, t.Alpha, t.Tc0 = 0, nan, nan, nan, nan
	t.Width, t.Radius = [2]float64{nan, nan}, [2]float64{nan, nan}
	return t
}

func between(ends [2]float64, along float64) float64 { return ends[0] + (ends[1]-ends[0])*along }

// flight returns the time of flight of shot i in s.
func (n *Night) flight(i int) float64 {
	if f := n.Settings.Clock; f.FixedMs.Given {
		return (f.FixedMs.Value + f.ZeroMs.Value) * 1e-3
	}
	return n.Scenario.Flight.Ms[i%len(n.Scenario.Flight.Ms)] * 1e-3
}

// condense shares N out at T by the law of the gas.
func (t *Truth) condense(law string, m machine) error {
	reduced := t.T / t.Tc0
	t.Mu = math.NaN()
	switch law {
	case "finite":
		t.N0 = t.N * model.FiniteSizeFraction(reduced, t.N, m.trap)
	case "semi-ideal":
		gas, err := model.SolveSemiIdeal(t.N, t.T, m.species.Mass, m.species.ScatteringLength, m.trap)
		if err != nil {
			return err
		}
		t.N0 = gas.Condensate
	default:
		t.N0 = t.N * model.IdealFraction(reduced)
	}
	t.Thermal = t.N - t.N0
	if t.N0 == 0 {
		// Just above the finite-size transition there are more atoms than an ideal gas of
		// infinite size can hold: they sit at its saturation.
		t.Alpha = model.ThermalAlpha(t.N, t.T, m.trap)
		if math.IsNaN(t.Alpha) {
			t.Alpha = 0
		}
		return nil
	}
	return t.setMu(m)
}

func (t *Truth) setMu(m machine) (err error) {
	a := m.species.ScatteringLength
	if a > 0 {
		t.Mu, err = model.Mu(t.N0, m.species.Mass, a, m.trap)
		return err
	}
	w, err := model.VariationalWidths(t.N0, m.species.Mass, a, m.trap)
	if err == nil {
		_, t.Mu = model.VariationalEnergy(w, t.N0, m.species.Mass, a, m.trap)
	}
	return err
}
