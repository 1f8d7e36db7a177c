package fit

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"fallshadow/model/numbers"
)

// shifts returns by how much the answer of a fit moves when each calibration moves up by one
// standard deviation, and the laboratory as it then is. The picture stays: with the gradient
// Jᵀρ of the moved laboratory at the old parameters, the parameters move by −(JᵀJ)⁻¹Jᵀρ.
func (s *session) shifts(st *state, m numbers.Measured) ([]numbers.Shift, error) {
	var out []numbers.Shift
	rest, err := s.answer(st, s.lab, s.flight)
	if err != nil {
		return nil, err
	}
	for _, c := range s.lab.Calibration {
		lab, flight := c.Apply(*s.lab, s.flight, 1)
		sh := numbers.Shift{Name: c.Name, Known: c.Known, Lab: s.numbersLab(&lab)}
		moved, err := s.answer(st, &lab, flight)
		if err != nil {
			return nil, err
		}
		sh.Delta = numbers.Measured{
			ThermalSum: moved.ThermalSum - rest.ThermalSum, CondensateSum: moved.CondensateSum - rest.CondensateSum,
			T: moved.T - rest.T, Mu: moved.Mu - rest.Mu, Alpha: moved.Alpha - rest.Alpha,
		}
		out = append(out, sh)
	}
	return out, nil
}

// answer takes one Gauss-Newton step from st in another laboratory, on the level of choices.
func (s *session) answer(st *state, lab *Lab, flight float64) (numbers.Measured, error) {
	tmpl, err := newTemplate(lab, flight, s.condensed)
	if err != nil {
		return numbers.Measured{}, err
	}
	tmpl.excess = s.tmpl.excess
	p := s.problem(s.work, &st.p, st.kind)
	level := *p.level
	level.saturate = lab.Optics.perElectron()
	level.own, level.lit = &s.ws.moved, box{} // another blur has another beam
	if p.number != nil {
		p.number = lab.numberTie(s.tmpl.excess)
	}
	p.level, p.fine, p.tmpl, p.law, p.blur = &level, &level, &tmpl, newLaw(&lab.Optics), lab.Optics.Blur/lab.Optics.Pixel
	q := st.p
	// The same cloud in pixels: only what the shapes do not share with the template is left
	// to the step.
	for i := range 2 {
		q[pWidth1+i] += 0.5 * math.Log(s.tmpl.thermal.square[i]/tmpl.thermal.square[i])
		if !st.kind.fixRadius {
			q[pRadius1+i] += 0.5 * math.Log(s.tmpl.condensate.square[i]/tmpl.condensate.square[i])
		}
	}
	if st.kind.angle {
		q[pAngle] += s.tmpl.thermal.angle - tmpl.thermal.angle
	}
	if !st.kind.free {
		q[pWidth1] = (q[pWidth1] + q[pWidth2]) / 2
		q[pRadius1] = (q[pRadius1] + q[pRadius2]) / 2
		q[pWidth2], q[pRadius2] = q[pWidth1], q[pRadius1]
	}
	sr := &search{problem: p, kind: st.kind, tie: st.tie, base: q, h: s.ws.h[:], g: s.ws.g[:]}
	p.ties = &sr.tie
	y := make([]float64, st.tie.n)
	for i, a := range st.tie.slot {
		if a >= 0 {
			y[a] = q[i]
		}
	}
	h, g := make([]float64, len(y)*len(y)), make([]float64, len(y))
	sr.Normal(y, h, g)
	if !st.step(y, h, g) {
		nan := math.NaN()
		return numbers.Measured{ThermalSum: nan, CondensateSum: nan, T: nan, Mu: nan, Alpha: nan}, nil
	}
	q = sr.expand(y)
	q[pThermal], q[pCondensate] = math.Max(0, q[pThermal]), math.Max(0, q[pCondensate])
	q[pAlpha] = math.Max(0, q[pAlpha])
	m, _ := tmpl.measured(&q, st.kind)
	return m, nil
}

// step takes −H⁻¹g from y over the parameters that no bound held; false where H is singular.
// H is that of the level that g is of: the full picture's would not lead to its minimum.
func (s *state) step(y, h, g []float64) bool {
	n := len(y)
	var free []int
	for a := range n {
		if s.cov[a*n+a] > 0 {
			free = append(free, a)
		}
	}
	if len(free) == 0 {
		return true
	}
	normal, down := mat.NewSymDense(len(free), nil), mat.NewVecDense(len(free), nil)
	for i, a := range free {
		for k, b := range free[:i+1] {
			normal.SetSym(i, k, h[a*n+b])
		}
		down.SetVec(i, g[a])
	}
	var c mat.Cholesky
	if !c.Factorize(normal) || c.SolveVecTo(down, down) != nil {
		return false
	}
	for i, a := range free {
		y[a] -= down.AtVec(i)
	}
	return true
}
