package curve

import (
	"context"
	"errors"
	"math"
	"slices"

	"fallshadow/model"
)

// The settings that a factor is looked for in.
const (
	Alpha            = "alpha"
	Magnification    = "magnification"
	ScatteringLength = "scattering_length_a0"
	Sight            = "sight_hz"
)

// suspects returns the settings that may be wrong: the frequency along the line of sight only
// where the points tell what it does to them, since that sets it apart from alpha.
func (n *Night) suspects() []string {
	list := []string{Alpha, Magnification, ScatteringLength}
	for _, c := range n.Calibrations {
		if c.Name == Sight && c.Step != 0 {
			list = append(list, Sight)
		}
	}
	return list
}

// exponents says with which power of a setting the measured numbers go where no calibration
// of a point tells it: a cross-section σ0/alpha, and lengths over the magnification.
var exponents = map[string]Vector{
	Alpha:            {1, 1, 0, 0},
	Magnification:    {-2, -2, -2, -2},
	ScatteringLength: {},
}

// Factor is a hypothesis on a night: the thermal part follows a law, and one setting is
// wrong by a factor.
type Factor struct {
	Law     string // Ideal: N_thermal is the saturated number; SemiIdeal: it has the excess
	Setting string // empty: none is wrong
	// Factor is what the setting is to be multiplied with.
	Factor Estimate
	Quality
	// Total is χ² where the other settings whose errors are known, alpha and the magnification
	// apart, may be off too, with a standard deviation of each for one of χ².
	Total float64
	// Far are the points that are more than five errors from the hypothesis.
	Far []*Point
}

// TotalPerDof returns Total over the degrees of freedom.
func (h *Factor) TotalPerDof() float64 {
	q := h.Quality
	q.Chi2 = h.Total
	return q.PerDof()
}

// extrapolated is the part of a correction by which it may be off because the powers of
// small changes bend over large ones: fits with alpha a tenth wrong came to 5 % of it.
const extrapolated = 0.05

// Error returns the error of the factor, all parts together: a twentieth of the correction
// is there for its extrapolation, which a second round with the corrected setting removes.
func (h *Factor) Error() float64 { return math.Hypot(h.Factor.Error(), extrapolated*(h.Factor.V-1)) }

// Factors are the hypotheses, the best one first, and how well they are told apart.
type Factors struct {
	List []Factor
	// Lead is by how much Total of the Rival, the second setting, is above that of the best one,
	// each with its better law, in units of the scatter (the best χ²/dof where that is above 1).
	// Two settings are told apart where it is above DecisiveLead. NaN where the minimum of one
	// was not found.
	Lead  float64
	Rival string
	// Twin is the frequency along the line of sight where alpha is best and the two are not
	// told apart, as after a long flight; it is no Rival then. Alpha, known less well as a
	// rule, comes first of them.
	Twin *Factor
	// Mu is the mean of μ from the radii over μ from N0, Saturated that of N_thermal over its
	// number by the law of the best hypothesis, both as measured.
	Mu, Saturated Estimate
}

// DecisiveLead is the Lead from which on a setting is named: two standard deviations.
const DecisiveLead = 4

// LeastParameter is the N0 a/ā from which on a condensate is Thomas-Fermi enough, to a few
// percent of μ (tf_vs_gp.csv in testdata/reference).
const LeastParameter = 30

// ErrNoFactor says that a night does not tell a number factor.
var ErrNoFactor = errors.New("a number factor needs at least three shots with a thermal part and a condensate, T known to a third and not computed from the number, and a repulsive gas whose condensate is large (N0 a over the oscillator length above 30)")

// FindFactor fits one common factor of a setting to the night: with it μ from the radii and μ
// from N0 agree, and N_thermal and the number that T lets it have,
//
//	ln μ = ln μ_TF(N0),   ln N_thermal = ln N_sat(T) [+ ln(1 + e(μ/kT)) in a semi-ideal gas].
//
// N goes with alpha and both lengths squared, T and μ with lengths squared, so that alpha
// moves the two ratios by powers −2/5 and 1, the magnification by −6/5 and 4: near enough
// to one another that weak data cannot tell them apart, see Lead. The scattering length moves
// them by −2/5 and 0, a frequency along the line of sight as alpha does, but for what it does
// to the expansion in a short flight. The calibration error leaves out the setting itself.
func (n *Night) FindFactor(ctx context.Context) (Factors, error) {
	points := n.pick(func(p *Point) bool {
		return p.Comparable() && p.radii() && p.relative(T) < 1./3 &&
			p.Vector[Condensate]*n.Gas.ScatteringLength/n.Gas.Trap.Length(n.Gas.Mass) > LeastParameter
	})
	if len(points) < 3 {
		return Factors{}, ErrNoFactor
	}
	var f Factors
	for _, law := range []string{Ideal, SemiIdeal} {
		for _, setting := range append([]string{""}, n.suspects()...) {
			h, err := n.factor(ctx, points, law, setting)
			if err != nil {
				return Factors{}, err
			}
			f.insert(h)
		}
	}
	f.lead()
	var err error
	f.Mu, f.Saturated, err = n.ratios(ctx, points, f.List[0].Law)
	return f, err
}

// insert keeps the list in order of Total, those whose minimum was not found behind.
func (f *Factors) insert(h Factor) {
	at := len(f.List)
	for at > 0 && !(h.Total >= f.List[at-1].Total || math.IsNaN(h.Total)) {
		at--
	}
	f.List = append(f.List, Factor{})
	copy(f.List[at+1:], f.List[at:])
	f.List[at] = h
}

// lead finds the Twin and the Rival of the best hypothesis.
func (f *Factors) lead() {
	f.Lead = math.NaN()
	for _, h := range f.List {
		if !h.Factor.Found() {
			return
		}
	}
	f.pair()
	best := f.List[0]
	for _, h := range f.List {
		if h.Setting != best.Setting && h.Setting != "" && (f.Twin == nil || h.Setting != f.Twin.Setting) {
			f.Lead, f.Rival = (h.Total-best.Total)/best.unit(), h.Setting
			return
		}
	}
}

// unit is the scatter in which a Lead is told.
func (q Quality) unit() float64 { return q.scale() * q.scale() }

// pair puts alpha first, with its Twin, where one of the two is best and they are not told
// apart.
func (f *Factors) pair() {
	of := func(setting string) int {
		return slices.IndexFunc(f.List, func(h Factor) bool { return h.Setting == setting })
	}
	alpha, sight := of(Alpha), of(Sight)
	if min(alpha, sight) != 0 || math.Abs(f.List[alpha].Total-f.List[sight].Total) >= DecisiveLead*f.List[0].unit() {
		return
	}
	h, twin := f.List[alpha], f.List[sight]
	f.List = slices.Insert(slices.Delete(f.List, alpha, alpha+1), 0, h)
	f.Twin = &twin
}

func (n *Night) factor(ctx context.Context, points []*Point, law, setting string) (Factor, error) {
	h := Factor{Law: law, Setting: setting, Factor: Estimate{1, 0, 0}}
	if setting == "" {
		p := n.ratioProblem(points, law, unchanged)
		h.Quality = p.quality(nil)
		h.Far = p.far()
		h.Total = p.total(nil, []string{Alpha, Magnification})
		return h, nil
	}
	p := n.ratioProblem(points, law, n.corrected(points, setting))
	e, q, err := p.fit(ctx, []float64{0}, setting)
	if err != nil {
		return h, err
	}
	h.Factor, h.Quality, h.Total = e[0].exp(), q, math.NaN()
	if e[0].Found() {
		h.Far = p.far()
		h.Total = p.total([]float64{e[0].V}, []string{Alpha, Magnification, setting})
	}
	return h, nil
}

// correction returns the numbers of a point as another setting would show them, and the
// logarithms of the factors on μ_TF and N_sat.
type correction func(p *Point, theta []float64, v Vector) (c Vector, mu, saturated float64)

func unchanged(_ *Point, _ []float64, v Vector) (Vector, float64, float64) { return v, 0, 0 }

// scaling says with which powers of a setting μ_TF and N_sat go, (N0 a)^(2/5) ω̄^(6/5) and ω̄^−3.
var scaling = map[string][2]float64{ScatteringLength: {0.4, 0}, Sight: {0.4, -1}}

// corrected returns the correction by e^θ of a setting.
func (n *Night) corrected(points []*Point, setting string) correction {
	power, by := n.exponents(points, setting), scaling[setting]
	return func(p *Point, theta []float64, v Vector) (Vector, float64, float64) {
		for i, k := range power[p] {
			if setting == Alpha {
				// σ0 n = alpha ln(I0/I) + (I0−I)/Isat is a straight line in alpha.
				v[i] *= 1 + k*math.Expm1(theta[0])
			} else {
				v[i] *= math.Exp(theta[0] * k)
			}
		}
		return v, by[0] * theta[0], by[1] * theta[0]
	}
}

// ratioProblem is that of the two relations after a correction of the measured numbers.
func (n *Night) ratioProblem(points []*Point, law string, correct correction) *problem {
	return n.problem(points, relation{size: 2, mu: true, eval: func(p *Point, v *Vector, g *scales, theta, h []float64) {
		c, mu, saturated := correct(p, theta, *v)
		h[0] = math.Log(c[Mu]/g.mu(c[Condensate])) - mu
		h[1] = math.Log(c[Thermal]/g.saturated(c[T])) - saturated - excessOf(law, &c)
	}})
}

// excessOf returns the logarithm of what a law lets the thermal part have above saturation.
func excessOf(law string, v *Vector) float64 {
	if law != SemiIdeal {
		return 0
	}
	return math.Log1p(Excess(v[Mu] / (model.KB * v[T])))
}

// exponents returns the powers with which the numbers of each point go with a small change
// of a setting: as its own calibration says, since a strong probe and a poor wing both bend
// them, or as geometry says.
func (n *Night) exponents(points []*Point, setting string) map[*Point]Vector {
	powers := make(map[*Point]Vector, len(points))
	for _, p := range points {
		powers[p] = exponents[setting]
	}
	for c, calibration := range n.Calibrations {
		if calibration.Name != setting || calibration.Step == 0 {
			continue
		}
		for _, p := range points {
			var own Vector
			for i := range own {
				own[i] = p.Shifts[c][i] / p.Vector[i] / math.Expm1(calibration.Step)
				if setting != Alpha {
					own[i] = p.logChange(c, i) / calibration.Step
				}
			}
			powers[p] = own
		}
	}
	return powers
}

// ratios returns the means of the two ratios as measured.
func (n *Night) ratios(ctx context.Context, points []*Point, law string) (mu, saturated Estimate, err error) {
	for i, into := range []*Estimate{&mu, &saturated} {
		p := n.ratioProblem(points, law, unchanged)
		both := p.relation.eval
		p.relation = relation{size: 1, mu: true, eval: func(p *Point, v *Vector, g *scales, theta, h []float64) {
			var two [2]float64
			both(p, v, g, theta, two[:])
			h[0] = two[i] - theta[0]
		}}
		e, _, err := p.fit(ctx, []float64{0})
		if err != nil {
			return mu, saturated, err
		}
		*into = e[0].exp()
	}
	return mu, saturated, nil
}

// Wrong says that a night asks for a factor: the best hypothesis has one, and it is more
// than two of its errors from 1, those of the other calibrations with it.
func (f *Factors) Wrong() bool {
	best := f.List[0]
	return best.Setting != "" && math.Abs(best.Factor.V-1) > 2*best.Error()
}

// Decided says that the setting of the best hypothesis is told from the others.
func (f *Factors) Decided() bool { return f.Lead >= DecisiveLead }
