package fit

import (
	"math"

	"fallshadow/model"
)

// measuredShape is what a picture shows whatever the settings say: widths and radii along the
// axes in px², and the sums of σ0 n.
type measuredShape struct {
	thermal, condensate   bool
	width, radius         [2]float64 // squares
	thermalSum, condenSum float64
	alpha                 float64    // −ln z of the thermal part
	fugacity              bool       // fitted
	errs                  [4]float64 // relative errors of the ratios below
}

// The ratios that are 1 when every setting is right.
const (
	ratioT   = iota // T along axis 1 over axis 2
	ratioMu         // μ likewise
	ratioMuN        // μ from the radii over μ from N0
	ratioSat        // N_thermal over what T and fugacity hold, the saturated number beside a condensate
	numRatios
)

// ratios returns the logarithms under a laboratory and a flight, NaN for those that do not
// exist. That of the saturated number is the distance from what interactions allow: from the
// ideal gas's 1 up to the semi-ideal value.
func (m *measuredShape) ratios(lab *Lab, flight, number float64) [numRatios]float64 {
	nan := math.NaN()
	r := [numRatios]float64{nan, nan, nan, nan}
	t, err := newTemplate(lab, flight, 0)
	if err != nil {
		return r
	}
	perSum := t.pixel * t.pixel / lab.Species.Sigma0() * number
	temp, mu := nan, nan
	if m.thermal {
		a, b := m.width[0]/t.thermal.square[0], m.width[1]/t.thermal.square[1]
		r[ratioT], temp = math.Log(a/b), templateT*math.Sqrt(a*b)
	}
	if m.condensate && !t.gaussian {
		a, b := m.radius[0]/t.condensate.square[0], m.radius[1]/t.condensate.square[1]
		r[ratioMu], mu = math.Log(a/b), templateMu*math.Sqrt(a*b)
		if n, err := model.Mu(m.condenSum*perSum, lab.Species.Mass, lab.Species.ScatteringLength, lab.Trap); err == nil {
			r[ratioMuN] = math.Log(mu / n)
		}
	}
	if m.thermal {
		r[ratioSat] = m.surplus(math.Log(m.thermalSum*perSum), temp, mu, lab)
	}
	return r
}

// surplus is the logarithm of the thermal number, given by its own, over what T and the fugacity
// hold, as far as it is beyond what interactions allow; NaN where the fugacity is not fitted.
func (m *measuredShape) surplus(number, temp, mu float64, lab *Lab) float64 {
	alpha, most := 0.0, thermalSurplus
	switch {
	case m.condensate:
		most = 0
		if mix, err := model.SemiIdealAt(temp, mu, lab.Species.Mass, lab.Species.ScatteringLength, lab.Trap); err == nil {
			most = math.Log(mix.Thermal / model.ThermalNumber(temp, 0, lab.Trap))
		}
	case m.fugacity:
		alpha = m.alpha
	default:
		return math.NaN()
	}
	over := number - math.Log(model.ThermalNumber(temp, alpha, lab.Trap))
	if !m.condensate && alpha < steepAlpha && over < 0 {
		return math.NaN() // a fugacity at the end of its range may be any smaller one
	}
	return over - math.Max(0, math.Min(most, over))
}

// thermalSurplus is the logarithm of what interactions may add to a thermal cloud near the transition.
const thermalSurplus = 0.05

// score is Σ(ratio/its error)², the error widened by three percent for what no fit knows.
func (m *measuredShape) score(lab *Lab, flight, number float64) float64 {
	return m.scoreBut(lab, flight, number, -1)
}

// scoreBut is score without one of the ratios.
func (m *measuredShape) scoreBut(lab *Lab, flight, number float64, but int) float64 {
	sum := 0.0
	for i, v := range m.ratios(lab, flight, number) {
		if i != but && !math.IsNaN(v) {
			sum += v * v / (m.errs[i]*m.errs[i] + 0.03*0.03)
		}
	}
	return sum
}

// slip is one way in which a setting can be wrong: with a factor f it returns the laboratory
// that would then be right.
type slip struct {
	flag    string
	factors []float64 // tried in turn; empty: any factor, found by search
	cost    float64   // what the slip must gain over a likelier one
	mend    func(lab Lab, flight, f float64) (Lab, float64, float64)
}

func axisSlip(flag string, axis int) slip {
	return slip{flag: flag, cost: 2, mend: func(lab Lab, flight, f float64) (Lab, float64, float64) {
		lab.Trap.Omega[axis] *= f
		return lab, flight, 1
	}}
}

func exchange(i, j int) slip {
	return slip{flag: FlagAxes, factors: []float64{1}, cost: 1, mend: func(lab Lab, flight, _ float64) (Lab, float64, float64) {
		w := &lab.Trap.Omega
		w[i], w[j] = w[j], w[i]
		return lab, flight, 1
	}}
}

// pixelSlip is a pixel wrong by a binning, which is forgotten more often than a magnification is
// wrong by as much.
func pixelSlip(cost float64, factors ...float64) slip {
	return slip{FlagPixel, factors, cost, func(lab Lab, flight, f float64) (Lab, float64, float64) {
		lab.Optics.Pixel *= f
		return lab, flight, 1
	}}
}

// slips is the table of what goes wrong in laboratories (common practice), the plainest first.
var slips = []slip{
	{FlagFrequencyUnit, []float64{1 / (2 * math.Pi), 2 * math.Pi}, 1, func(lab Lab, flight, f float64) (Lab, float64, float64) {
		for i := range lab.Trap.Omega {
			lab.Trap.Omega[i] *= f
		}
		return lab, flight, 1
	}},
	exchange(0, 1), exchange(0, 2), exchange(1, 2),
	pixelSlip(1.5, 0.25, 0.5, 2, 4), pixelSlip(3),
	{FlagNumber, nil, 1.5, func(lab Lab, flight, f float64) (Lab, float64, float64) { return lab, flight, f }},
	{FlagFlight, nil, 1.5, func(lab Lab, flight, f float64) (Lab, float64, float64) { return lab, flight * f, 1 }},
	axisSlip(FlagSight, 2), axisSlip(FlagAxis1, 0), axisSlip(FlagAxis2, 1),
}

// bestScore returns the least score that a slip can reach.
func (m *measuredShape) bestScore(s *slip, lab *Lab, flight float64) float64 {
	at := func(f float64) float64 {
		l, t, n := s.mend(*lab, flight, f)
		return m.score(&l, t, n)
	}
	best := math.Inf(1)
	for _, f := range s.factors {
		best = math.Min(best, at(f))
	}
	if len(s.factors) > 0 {
		return best
	}
	const steps, most = 48, 1.6 // factors from 1/5 to 5
	where := 0.0
	for i := -steps; i <= steps; i++ {
		x := most * float64(i) / steps
		if v := at(math.Exp(x)); v < best {
			best, where = v, x
		}
	}
	for h := most / steps / 2; h > 1e-4; h /= 2 {
		for _, x := range [2]float64{where - h, where + h} {
			if v := at(math.Exp(x)); v < best {
				best, where = v, x
			}
		}
	}
	return best
}

// The score at which the ratios are believed to be off, and below which a slip explains them;
// where they are very far off the fit itself suffers, and a thirtieth of the score will do.
const (
	scoreOff  = 25
	scoreFine = 14
)

// suspects names the setting that would mend the ratios, or says that they disagree.
func (s *session) suspects(r *Result) []string {
	m := s.shown
	if m == nil {
		return nil
	}
	untied := r.Checks.TiedOverFree > untiedChi2*math.Max(1, nanLow(r.ChiCloud))
	before := m.score(s.lab, s.flight, 1)
	if !(before > scoreOff) {
		if untied {
			return []string{FlagWidths}
		}
		return nil
	}
	name, best := s.formSuspect(m), math.Inf(1)
	if name != "" {
		best = m.scoreBut(s.lab, s.flight, 1, ratioSat) + formCost
	}
	for i := range slips {
		v := m.bestScore(&slips[i], s.lab, s.flight)
		if v+slips[i].cost < best {
			name, best = slips[i].flag, v+slips[i].cost
		}
	}
	var f []string
	if a := m.ratios(s.lab, s.flight, 1); untied || math.Abs(zeroNaN(a[ratioT])) > 0.1 || math.Abs(zeroNaN(a[ratioMu])) > 0.05 {
		f = append(f, FlagWidths)
	}
	// Two widths of a thermal cloud alone cannot tell one setting from another.
	if name == "" || best > math.Max(scoreFine, before/30) || best > before/2 || !m.condensate {
		if len(f) == 0 {
			f = append(f, FlagRatios)
		}
		return f
	}
	return append(f, name)
}

// untiedChi2 is the χ², times that of the residuals under the cloud, by which widths of their own
// are better than tied ones where the ties do not hold: 1 in 2e5 for two of them.
const untiedChi2 = 25

// The cost of the thermal form as an explanation, which is likelier than any slip, and the most
// that it explains.
const (
	formCost = 0.5
	formMost = 3
)

// formSuspect names the thermal form where the other one can explain the number of thermal atoms: the
// plain form reads T low, and so holds too few, where a repulsive condensate pushed them aside; the
// semi-ideal form reads T high where none did.
func (s *session) formSuspect(m *measuredShape) string {
	sat := m.ratios(s.lab, s.flight, 1)[ratioSat]
	if s.opt.MeanField {
		sat = -sat
	}
	if !(s.lab.Species.ScatteringLength > 0) || !(sat > 0 && sat < math.Log(formMost)) {
		return ""
	}
	return FlagForm
}

func zeroNaN(x float64) float64 {
	if math.IsNaN(x) {
		return 0
	}
	return x
}
