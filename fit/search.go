package fit

import (
	"context"
	"math"

	"gonum.org/v1/gonum/mat"

	"fallshadow/fit/lm"
	"fallshadow/model/bose"
	"fallshadow/model/numbers"
)

// kind says which parts a fit has and what it leaves free.
type kind struct {
	thermal, condensate bool
	free                bool // every width of its own; otherwise one T and one μ
	alpha               bool // fugacity free; otherwise 1
	angle               bool
	fixWidth            bool
	fixThermal          bool
	fixCondensate       bool
	fixRadius           bool
	fixCentre           bool
}

// tie is the map from the free numbers of a fit to the parameters: slot[i] is the place of
// parameter i, or -1 where it stays as it is.
type tie struct {
	slot [numParams]int
	n    int
}

func (k kind) tie() tie {
	t := tie{}
	for i := range t.slot {
		t.slot[i] = -1
	}
	add := func(on bool, list ...int) {
		if !on {
			return
		}
		for _, i := range list {
			t.slot[i] = t.n
		}
		t.n++
	}
	add(true, pLight)
	add(true, pLightX)
	add(true, pLightY)
	any := k.thermal || k.condensate
	add(any && !k.fixCentre, pX)
	add(any && !k.fixCentre, pY)
	add(any && k.angle, pAngle)
	add(k.thermal && !k.fixThermal, pThermal)
	add(k.condensate && !k.fixCondensate, pCondensate)
	if k.free {
		add(k.thermal && !k.fixWidth, pWidth1)
		add(k.thermal && !k.fixWidth, pWidth2)
		add(k.condensate && !k.fixRadius, pRadius1)
		add(k.condensate && !k.fixRadius, pRadius2)
	} else {
		add(k.thermal && !k.fixWidth, pWidth1, pWidth2)
		add(k.condensate && !k.fixRadius, pRadius1, pRadius2)
	}
	add(k.thermal && k.alpha, pAlpha)
	return t
}

// merged says whether a width or radius shares its place with that of the other axis.
func (t *tie) merged(i int) bool {
	if t == nil || t.slot[i] < 0 {
		return false
	}
	switch i {
	case pWidth1, pWidth2:
		return t.slot[pWidth1] == t.slot[pWidth2]
	case pRadius1, pRadius2:
		return t.slot[pRadius1] == t.slot[pRadius2]
	}
	return false
}

// search is one minimisation in normal form; it implements lm.Problem.
type search struct {
	*problem
	kind kind
	tie  tie
	base params
	h, g []float64
}

// Dim returns the number of free numbers.
func (s *search) Dim() int { return s.tie.n }

// Normal implements lm.Problem by folding the normal matrix of all parameters.
func (s *search) Normal(y []float64, h, g []float64) float64 {
	q := s.expand(y)
	if h == nil {
		return s.normal(&q, nil, nil) + s.pulled(&q, nil, nil)
	}
	clear(s.h)
	clear(s.g)
	f := s.normal(&q, s.h, s.g)
	f += s.pulled(&q, s.h, s.g)
	clear(h)
	clear(g)
	for i, a := range s.tie.slot {
		if a < 0 {
			continue
		}
		g[a] += s.g[i]
		for k, b := range s.tie.slot {
			if b >= 0 {
				h[a*s.tie.n+b] += s.h[i*numParams+k]
			}
		}
	}
	return f
}

func (s *search) pulled(q *params, h, g []float64) float64 {
	f := 0.0
	if s.pull != nil {
		f += s.pull.add(s, q, h, g)
	}
	if s.number != nil && s.kind.thermal {
		f += s.number.add(s, q, h, g)
	}
	return f
}

func (s *search) expand(y []float64) params {
	q := s.base
	for i, a := range s.tie.slot {
		if a >= 0 {
			q[i] = y[a]
		}
	}
	return q
}

// state is the end of a minimisation.
type state struct {
	kind       kind
	p          params
	chi2       float64
	reason     lm.Termination
	settled    bool // stalled with nothing left to gain
	iterations int
	tie        tie
	normal     []float64 // JᵀJ over the free numbers
	cov        []float64 // its inverse, held parameters zero; nil where singular
	atBound    []bool
}

func (s *state) used() bool { return s != nil && (s.reason.Usable() || s.settled) }

// variance returns the variance of parameter i, 0 for one that was not free.
func (s *state) variance(i int) float64 {
	a := s.tie.slot[i]
	if a < 0 || s.cov == nil {
		return 0
	}
	return s.cov[a*s.tie.n+a]
}

// ended says that a free fugacity is at an end of its range, or so close to 1 that the slopes in
// −ln z, which diverge there, say little.
func (s *state) ended() bool {
	a := s.tie.slot[pAlpha]
	return a >= 0 && (s.atBound[a] || s.p[pAlpha] < steepAlpha)
}

const steepAlpha = 0.01

// unboundError is the standard deviation of parameter i as if no bound held it.
func (s *state) unboundError(i int) float64 {
	n := s.tie.n
	var chol mat.Cholesky
	if a := s.tie.slot[i]; a >= 0 && chol.Factorize(mat.NewSymDense(n, append([]float64(nil), s.normal...))) {
		var inv mat.SymDense
		if chol.InverseTo(&inv) == nil {
			return math.Sqrt(inv.At(a, a))
		}
	}
	return math.NaN()
}

// spread maps the covariance by a Jacobian over all parameters: J C Jᵀ.
func (s *state) spread(j [][numParams]float64) [][]float64 {
	n := s.tie.n
	y := make([][]float64, len(j))
	for i := range j {
		y[i] = make([]float64, n)
		for k, a := range s.tie.slot {
			if a >= 0 {
				y[i][a] += j[i][k]
			}
		}
	}
	out := make([][]float64, len(j))
	for i := range out {
		out[i] = make([]float64, len(j))
		for k := range out {
			for a := range n {
				for b := range n {
					out[i][k] += y[i][a] * s.cov[a*n+b] * y[k][b]
				}
			}
		}
	}
	return out
}

// bound tables: the least and the largest size of a cloud in pixels, and of −ln z.
const (
	leastSize = 0.6
	alphaMost = 7
)

// iterations is how many steps a minimisation may take: few for a first look.
func iterations(tol float64) int {
	if tol > 0.2 {
		return 10
	}
	return 60
}

// minimize runs one fit at p from start. tol is the decrease of χ² below which it ends.
func (w *Workspace) minimize(ctx context.Context, p *problem, k kind, start params, tol float64) (*state, error) {
	s := &search{problem: p, kind: k, tie: k.tie(), base: start, h: w.h[:], g: w.g[:]}
	p.ties = &s.tie
	y0 := make([]float64, s.tie.n)
	set := lm.Settings{
		Lower: make([]float64, s.tie.n), Upper: make([]float64, s.tie.n), MaxStep: make([]float64, s.tie.n),
		PredictTol: tol, AcceptPredicted: true, MaxIterations: iterations(tol), Lambda: 1e-3,
	}
	lower, upper, step := limits(p, &start)
	for i, a := range s.tie.slot {
		if a >= 0 {
			set.Lower[a], set.Upper[a], set.MaxStep[a] = lower[i], upper[i], step[i]
			y0[a] = math.Min(math.Max(start[i], lower[i]), upper[i])
		}
	}
	r, err := lm.Minimize(ctx, s, y0, &set, &w.lm)
	if err != nil {
		return nil, err
	}
	st := &state{
		kind: k, p: s.expand(r.X), chi2: r.F, reason: r.Reason, iterations: r.Iterations, tie: s.tie,
		normal: append([]float64(nil), r.H...), cov: make([]float64, s.tie.n*s.tie.n),
		atBound: append([]bool(nil), r.AtBound...),
	}
	if r.Covariance(st.cov) != nil {
		st.cov = nil
	}
	// The edge of a condensate is a kink to a search: where it cannot go on although next to
	// nothing is to be gained, the minimum is found.
	st.settled = r.Reason == lm.Stalled && r.F-w.promise(s, r.X) < kinkGain
	return st, nil
}

// kinkGain is the decrease of χ² that a stalled search may leave: a tenth of a standard
// deviation of one parameter.
const kinkGain = 0.01

// promise returns the χ² that one Gauss-Newton step from y promises, free of bounds:
// F − gᵀ(JᵀJ)⁻¹g, or F where JᵀJ is singular.
func (w *Workspace) promise(s *search, y []float64) float64 {
	n := len(y)
	h, g := make([]float64, n*n), make([]float64, n)
	f := s.Normal(y, h, g)
	var chol mat.Cholesky
	var step mat.VecDense
	if !chol.Factorize(mat.NewSymDense(n, h)) || chol.SolveVecTo(&step, mat.NewVecDense(n, g)) != nil {
		return f
	}
	return f - mat.Dot(&step, mat.NewVecDense(n, g))
}

// limits returns the bounds and the largest step of every parameter.
func limits(p *problem, q *params) (lower, upper, step params) {
	for i := range numParams {
		lower[i], upper[i] = math.Inf(-1), math.Inf(1)
	}
	most := 3 * float64(max(p.level.fullW, p.level.fullH))
	lower[pThermal], lower[pCondensate] = 0, 0
	for i, e := range [2]ellipse{p.tmpl.thermal, p.tmpl.condensate} {
		for a := range 2 {
			at := [2]int{pWidth1, pRadius1}[i] + a
			size := math.Sqrt(e.square[a])
			lower[at], upper[at] = math.Log(leastSize/size), math.Log(most/size)
			step[at] = 0.4
		}
	}
	// A tie holds both axes within the bounds of each.
	for _, at := range [2]int{pWidth1, pRadius1} {
		lo, hi := math.Max(lower[at], lower[at+1]), math.Min(upper[at], upper[at+1])
		lower[at], lower[at+1], upper[at], upper[at+1] = lo, lo, hi, hi
	}
	lower[pX], upper[pX] = -0.2*float64(p.level.fullW), 1.2*float64(p.level.fullW)
	lower[pY], upper[pY] = -0.2*float64(p.level.fullH), 1.2*float64(p.level.fullH)
	t := p.tmpl.thermalOf(q)
	size := 0.5 * math.Sqrt(math.Min(t.square[0], t.square[1]))
	step[pX], step[pY] = math.Max(1, size), math.Max(1, size)
	lower[pAngle], upper[pAngle], step[pAngle] = -math.Pi, math.Pi, 0.2
	lower[pAlpha], upper[pAlpha], step[pAlpha] = alphaFloor, alphaMost, 0.5
	step[pLight], step[pLightX], step[pLightY] = 0.3, 0.3, 0.3
	return lower, upper, step
}

// measured returns what the parameters say of the cloud, and the derivatives of that.
func (t *template) measured(q *params, k kind) (numbers.Measured, [numbers.NumMeasured][numParams]float64) {
	var m numbers.Measured
	var j [numbers.NumMeasured][numParams]float64
	m.T, m.Mu = math.NaN(), math.NaN()
	if k.thermal && q[pThermal] > 0 {
		e := t.thermalOf(q)
		m.Alpha = q[pAlpha]
		g1, g2, g3 := bose.G1(math.Max(m.Alpha, alphaFloor)), bose.G2(m.Alpha), bose.G3(m.Alpha)
		area := 2 * math.Pi * math.Sqrt(e.square[0]*e.square[1]) * g3 / g2
		m.ThermalSum = q[pThermal] * area
		m.T = temperature(0.5 * (q[pWidth1] + q[pWidth2]))
		j[0][pThermal], j[0][pWidth1], j[0][pWidth2] = area, m.ThermalSum, m.ThermalSum
		j[0][pAlpha] = m.ThermalSum * (g1/g2 - g2/g3)
		j[2][pWidth1], j[2][pWidth2] = m.T, m.T
		j[4][pAlpha] = 1
	}
	if k.condensate && q[pCondensate] > 0 {
		e := t.condensateOf(q)
		area := t.condensateArea() * math.Sqrt(e.square[0]*e.square[1])
		m.CondensateSum = q[pCondensate] * area
		j[1][pCondensate], j[1][pRadius1], j[1][pRadius2] = area, m.CondensateSum, m.CondensateSum
		if !t.gaussian {
			m.Mu = mu(0.5 * (q[pRadius1] + q[pRadius2]))
			j[3][pRadius1], j[3][pRadius2] = m.Mu, m.Mu
		}
	}
	return m, j
}

// condensateArea is the integral of the condensate's profile of unit peak over an ellipse of
// unit half-axes: 2π/5 for the Thomas-Fermi column, 2π for a gaussian.
func (t *template) condensateArea() float64 {
	if t.gaussian {
		return 2 * math.Pi
	}
	return 2 * math.Pi / 5
}

// stateError wraps a minimisation that ended without a minimum.
func stateError(what string, s *state) error {
	return &noMinimumError{what + ": " + s.reason.Sentence()}
}

// noMinimumError says in words how a search ended.
type noMinimumError struct{ sentence string }

func (e *noMinimumError) Error() string { return e.sentence }

func (e *noMinimumError) Is(target error) bool { return target == errNoMinimum }
