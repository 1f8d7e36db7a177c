package curve

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"slices"
	"sync"

	"gonum.org/v1/gonum/floats"
	"gonum.org/v1/gonum/mat"

	"fallshadow/fit/lm"
)

// Estimate is a number with its errors, one standard deviation each. Err is statistical,
// times √(χ²/dof) where the points scatter by more than their errors. Cal is NaN where a
// calibration that moves the number has no stated uncertainty. A number whose minimum was not
// found has no value and an infinite Err.
type Estimate struct{ V, Err, Cal float64 }

func notFound() Estimate { return Estimate{math.NaN(), math.Inf(1), math.NaN()} }

// Found says that the search for the number came to its minimum.
func (e Estimate) Found() bool { return !math.IsInf(e.Err, 1) }

// Error returns both errors together, the statistical one alone where Cal is NaN.
func (e Estimate) Error() float64 {
	if math.IsNaN(e.Cal) {
		return e.Err
	}
	return math.Hypot(e.Err, e.Cal)
}

// power returns e to the power p, with errors by the delta method.
func (e Estimate) power(p float64) Estimate {
	if !e.Found() {
		return e
	}
	v := math.Pow(e.V, p)
	slope := math.Abs(p * v / e.V)
	return Estimate{v, slope * e.Err, slope * e.Cal}
}

// exp returns the number of which e is the logarithm, with errors by the delta method.
func (e Estimate) exp() Estimate {
	if !e.Found() {
		return e
	}
	v := math.Exp(e.V)
	return Estimate{v, v * e.Err, v * e.Cal}
}

// Quality is how well a law describes points. Chi2 is NaN where the minimum was not found.
type Quality struct {
	Points int
	Chi2   float64
	Dof    int
}

// PerDof returns χ² over the degrees of freedom, NaN without any.
func (q Quality) PerDof() float64 {
	if q.Dof < 1 {
		return math.NaN()
	}
	return q.Chi2 / float64(q.Dof)
}

// scale is the factor by which points scatter beyond their errors, at least 1.
func (q Quality) scale() float64 {
	if s := math.Sqrt(q.PerDof()); s > 1 {
		return s
	}
	return 1
}

// tolerance is the change under a calibration of unknown uncertainty beyond which an estimate
// has no calibration error: absolute, since the estimates are logarithms, and ratios and
// shares of the order of one; relative to those above 1.
const tolerance = 1e-4

// problem fits the parameters θ of a relation to points; the residuals are the signed
// distances of the points.
type problem struct {
	night      *Night
	gas        *scales
	points     []*Point
	relation   relation
	parameters int
	near       []near
	at         []float64 // θ of near
}

func (n *Night) problem(points []*Point, r relation) *problem {
	p := &problem{night: n, gas: n.Gas.scales(), points: points, relation: r, near: make([]near, len(points))}
	for i, pt := range points {
		p.near[i].latent = pt.Vector
	}
	return p
}

// fit returns the estimates of θ, found from a start; none of them is Found where the search
// did not come to a minimum. ignore names calibrations that take no part in the calibration
// errors.
func (p *problem) fit(ctx context.Context, start []float64, ignore ...string) ([]Estimate, Quality, error) {
	p.parameters = len(start)
	q := Quality{Points: len(p.points), Dof: len(p.points)*p.relation.size - len(start)}
	if q.Dof < 0 {
		return nil, q, fmt.Errorf("%d points cannot tell %d parameters", len(p.points), len(start))
	}
	found, err := lm.MinimizeDense(ctx, p, start, &lm.Settings{XTol: 1e-5, FTol: 1e-7})
	if err != nil && found.Reason != lm.StartOutside {
		return nil, q, err
	}
	q.Chi2 = found.F
	cov, told := p.minimum(&found, q)
	if !told {
		q.Chi2 = math.NaN()
		return slices.Repeat([]Estimate{notFound()}, len(start)), q, ctx.Err()
	}
	out := make([]Estimate, len(start))
	for a := range out {
		out[a] = Estimate{V: found.X[a], Err: math.Sqrt(cov[a*len(out)+a]) * q.scale()}
	}
	p.find(found.X)
	p.calibrate(found.X, cov, out, ignore)
	return out, q, nil
}

// minimum returns the covariance of θ, and says whether the search came to a minimum that
// determines all of θ. A search that stalled, as at a kink, did so where next to nothing was
// left to go.
func (p *problem) minimum(found *lm.Result, q Quality) (cov []float64, told bool) {
	cov = make([]float64, len(found.X)*len(found.X))
	if found.Reason == lm.StartOutside || found.Covariance(cov) != nil {
		return nil, false
	}
	scale := settled * q.scale()
	return cov, found.Reason.Usable() || p.left(found.X, cov) <= scale*scale
}

// settled is the part of an error that a search may have left to go and yet count as ended.
const settled = 0.1

// left returns gᵀ cov g with g = Jᵀr, the fall of χ² that a search has before it: the square
// of the way to the minimum in errors.
func (p *problem) left(theta, cov []float64) float64 {
	m, n := p.Size()
	j, r := mat.NewDense(m, n, nil), make([]float64, m)
	p.Jacobian(theta, j)
	p.Residuals(theta, r)
	var g, step mat.VecDense
	g.MulVec(j.T(), mat.NewVecDense(m, r))
	step.MulVec(mat.NewDense(n, n, cov), &g)
	return mat.Dot(&g, &step)
}

// quality returns χ² at fixed θ.
func (p *problem) quality(theta []float64) Quality {
	q := Quality{Points: len(p.points), Dof: len(p.points) * p.relation.size}
	p.find(theta)
	for i := range p.near {
		q.Chi2 += p.near[i].chi2()
	}
	return q
}

// far returns the points more than five errors from the relation, where it was last asked for.
func (p *problem) far() (list []*Point) {
	for i := range p.near {
		if p.near[i].chi2() > 25 {
			list = append(list, p.points[i])
		}
	}
	return list
}

// mean returns the mean of the relation's first value at the measured numbers.
func (p *problem) mean() Estimate {
	var e Estimate
	count := float64(len(p.points))
	for i, pt := range p.points {
		_, j := p.relation.linear(pt, p.gas, nil, &pt.Vector)
		for a := range numMeasured {
			for b := range numMeasured {
				e.Err += j[0][a] * pt.Cov[a][b] * j[0][b] / (count * count)
			}
		}
		var h [2]float64
		p.relation.eval(pt, &pt.Vector, p.gas, nil, h[:p.relation.size])
		e.V += h[0] / count
		p.near[i] = near{latent: pt.Vector, lower: [3]float64{1, 0, 0}}
	}
	e.Err = math.Sqrt(e.Err)
	sum := p.night.noCalibration()
	for c, calibration := range p.night.Calibrations {
		change := 0.0
		for _, d := range p.moved(c, nil) {
			change += d[0] / count
		}
		sum.add(calibration.Known, change, tolerance)
	}
	e.Cal = sum.root()
	return e
}

// calibrationSum adds up the changes of an estimate under calibrations.
type calibrationSum struct {
	squares float64
	any     bool // the night has calibrations
}

func (n *Night) noCalibration() calibrationSum {
	return calibrationSum{any: len(n.Calibrations) > 0}
}

// add takes a change; one of unknown uncertainty above the tolerance leaves no error.
func (s *calibrationSum) add(known bool, change, tolerance float64) {
	switch {
	case known:
		s.squares += change * change
	case !(math.Abs(change) <= tolerance):
		s.squares = math.NaN()
	}
}

// root returns the error, NaN without any calibration.
func (s *calibrationSum) root() float64 {
	if !s.any {
		return math.NaN()
	}
	return math.Sqrt(s.squares)
}

// Size returns the number of residuals and of parameters.
func (p *problem) Size() (m, n int) { return len(p.points) * p.relation.size, p.parameters }

// Residuals fills r with the distances.
func (p *problem) Residuals(theta, r []float64) {
	p.find(theta)
	k := p.relation.size
	for i := range p.near {
		copy(r[k*i:k*(i+1)], p.near[i].r[:k])
	}
}

// find fills near for θ, from where the last ones were.
func (p *problem) find(theta []float64) {
	if p.at != nil && slices.Equal(theta, p.at) {
		return
	}
	p.at = append([]float64{}, theta...)
	share(len(p.points), func(i int) {
		p.near[i] = p.relation.nearest(p.points[i], p.gas, theta, &p.near[i].latent)
	})
}

// share calls do for 0 to n-1, shared out to processors. Each call keeps to a place of its
// own, so that what comes out is the same for any number of them.
func share(n int, do func(i int)) {
	var workers sync.WaitGroup
	size := max(64, (n+runtime.GOMAXPROCS(0)-1)/runtime.GOMAXPROCS(0))
	for first := 0; first < n; first += size {
		workers.Go(func() {
			for i := first; i < min(first+size, n); i++ {
				do(i)
			}
		})
	}
	workers.Wait()
}

// Jacobian differentiates with the nearest points held: the distance is stationary there.
func (p *problem) Jacobian(theta []float64, j *mat.Dense) {
	k := p.relation.size
	p.find(theta)
	share(len(p.points), func(i int) {
		for a := range theta {
			w := p.slope(i, theta, a)
			for b := range k {
				j.Set(k*i+b, a, w[b])
			}
		}
	})
}

// slope returns the derivative of the distance of point i by parameter a.
func (p *problem) slope(i int, theta []float64, a int) [2]float64 {
	var up, down [2]float64
	k, at := p.relation.size, &p.near[i]
	moved := slices.Clone(theta)
	step := 1e-4 * math.Max(math.Abs(theta[a]), 0.01)
	moved[a] = theta[a] + step
	p.relation.eval(p.points[i], &at.latent, p.gas, moved, up[:k])
	moved[a] = theta[a] - step
	p.relation.eval(p.points[i], &at.latent, p.gas, moved, down[:k])
	return at.whiten([2]float64{(up[0] - down[0]) / (2 * step), (up[1] - down[1]) / (2 * step)})
}

// calibrate fills in the calibration errors: when a calibration moves the residuals by Δr
// the estimates move by −cov JᵀΔr.
func (p *problem) calibrate(theta, cov []float64, out []Estimate, ignore []string) {
	n := len(out)
	slopes := make([][2]float64, len(p.points)*n)
	share(len(p.points), func(i int) {
		for a := range n {
			slopes[i*n+a] = p.slope(i, theta, a)
		}
	})
	sums := slices.Repeat([]calibrationSum{p.night.noCalibration()}, n)
	for c, calibration := range p.night.Calibrations {
		if slices.Contains(ignore, calibration.Name) {
			continue
		}
		g := make([]float64, n)
		for i, d := range p.moved(c, theta) {
			for a := range n {
				g[a] += slopes[i*n+a][0]*d[0] + slopes[i*n+a][1]*d[1]
			}
		}
		for a := range n {
			change := 0.0
			for b := range n {
				change -= cov[a*n+b] * g[b]
			}
			sums[a].add(calibration.Known, change, tolerance*math.Max(1, math.Abs(out[a].V)))
		}
	}
	for a := range out {
		out[a].Cal = sums[a].root()
	}
}

// moved returns the changes of the distances under calibration c, which makes the gas another.
func (p *problem) moved(c int, theta []float64) [][2]float64 {
	changes, gas := make([][2]float64, len(p.points)), p.night.Calibrations[c].Gas.scales()
	share(len(p.points), func(i int) {
		var rest, h [2]float64
		k, at := p.relation.size, &p.near[i]
		p.relation.eval(p.points[i], &at.latent, p.gas, theta, rest[:k])
		v := p.points[i].shifted(c, at.latent)
		p.relation.eval(p.points[i], &v, gas, theta, h[:k])
		changes[i] = at.whiten([2]float64{h[0] - rest[0], h[1] - rest[1]})
	})
	return changes
}

// total returns χ² about θ where θ, and the settings whose errors are known, apart from ignored
// ones, are free: the least |r + Jδ + Dν|² + |ν|² over δ and ν, where D holds the changes of
// the distances under each. It is asked for after fit or quality.
func (p *problem) total(theta []float64, ignore []string) float64 {
	p.parameters = len(theta)
	m, n := p.Size()
	r := make([]float64, m)
	p.Residuals(theta, r)
	columns := p.columns(theta, ignore)
	gradient, normal := mat.NewVecDense(len(columns)+1, nil), mat.NewSymDense(len(columns)+1, nil)
	normal.SetSym(len(columns), len(columns), 1) // of nothing, so that there is a matrix
	for a, x := range columns {
		gradient.SetVec(a, floats.Dot(x, r))
		for b, y := range columns[:a+1] {
			normal.SetSym(a, b, floats.Dot(x, y))
		}
		if a >= n {
			normal.SetSym(a, a, 1+normal.At(a, a))
		}
	}
	var c mat.Cholesky
	var step mat.VecDense
	if !c.Factorize(normal) || c.SolveVecTo(&step, gradient) != nil {
		return math.NaN()
	}
	return floats.Dot(r, r) - mat.Dot(gradient, &step)
}

// columns returns the changes of the distances with each parameter, then with each setting
// whose error is known and that is not ignored.
func (p *problem) columns(theta []float64, ignore []string) (list [][]float64) {
	m, n := p.Size()
	if n > 0 {
		j := mat.NewDense(m, n, nil)
		p.Jacobian(theta, j)
		for a := range n {
			list = append(list, mat.Col(nil, a, j))
		}
	}
	for c, calibration := range p.night.Calibrations {
		if !calibration.Known || slices.Contains(ignore, calibration.Name) {
			continue
		}
		x := make([]float64, 0, m)
		for _, d := range p.moved(c, theta) {
			x = append(x, d[:p.relation.size]...)
		}
		list = append(list, x)
	}
	return list
}
