package curve

import "math"

// relation is what the true numbers of a cloud obey: it fills h with values that vanish
// there. θ are its parameters.
type relation struct {
	size int  // values, 1 or 2
	mu   bool // they hang on μ too
	// ends says that the first value rises with T up to the end of a law, and does not change
	// above it.
	ends bool
	// eval is asked for numbers v that the point p may truly have.
	eval func(p *Point, v *Vector, g *scales, theta, h []float64)
}

// near is the point on a relation that is nearest to a measured one in the metric of its
// covariance.
type near struct {
	latent Vector
	r      [2]float64 // signed distance, whitened: χ² is the sum of its squares
	lower  [3]float64 // Cholesky factor of J C Jᵀ: l11, l21, l22
	flat   bool       // the first value does not change along T there
	// settled says that the search came to rest.
	settled bool
}

// nearest returns the nearest point, found from a start. Where a law ends below the measured
// T, or nearly so, the cloud may truly have been colder, which no slope there tells: the search
// ends above the law or not at all, and is made from where the law holds the measured
// fraction too.
func (r *relation) nearest(p *Point, g *scales, theta []float64, start *Vector) near {
	best := r.descend(p, g, theta, start)
	if r.ends && best.r[0] > 0 && (best.flat || !best.settled) {
		from := r.colder(p, g, theta)
		if n := r.descend(p, g, theta, &from); n.chi2() < best.chi2() {
			best = n
		}
	}
	return best
}

// colder returns the measured numbers with the T below the measured one at which the first
// value vanishes.
func (r *relation) colder(p *Point, g *scales, theta []float64) Vector {
	var h [2]float64
	low, high := 0.0, p.Vector[T]
	at := p.Vector
	for range 40 {
		at[T] = (low + high) / 2
		if r.eval(p, &at, g, theta, h[:r.size]); h[0] > 0 {
			high = at[T]
		} else {
			low = at[T]
		}
	}
	return at
}

// descend minimises (v − v*)ᵀC⁻¹(v − v*) over v* with h(v*) = 0 by repeated linearisation,
//
//	v* ← v − C Jᵀ (J C Jᵀ)⁻¹ (h + J (v − v*)),   J = ∂h/∂v at v*,
//
// so that a curved relation is met where the cloud truly was and not where its error put
// it. A step beyond the end of a law is halved. NaN where the relation has no value there.
func (r *relation) descend(p *Point, g *scales, theta []float64, start *Vector) near {
	at, before, sloped := *start, *start, false
	var n near
	for range 30 {
		v, j := r.linear(p, g, theta, &at)
		if r.ends && sloped && j[0][T] == 0 {
			at = between(&before, &at)
			continue
		}
		sloped, before = j[0][T] != 0, at
		n.flat = !sloped
		if n.settled = !r.step(p, &v, &j, &n, &at); n.settled {
			break
		}
	}
	return n
}

// step moves to the point nearest to the measured one on the relation as it is linearised at
// the given numbers, and says whether it has moved by what matters.
func (r *relation) step(p *Point, v *[2]float64, j *[2]Vector, n *near, at *Vector) bool {
	var c [2]Vector // C Jᵀ, by value of h
	for k := range r.size {
		for a := range numMeasured {
			for b := range numMeasured {
				c[k][a] += p.Cov[a][b] * j[k][b]
			}
		}
	}
	n.lower = r.factor(j, &c)
	n.r = n.whiten(*v)
	multiplier := n.unwhiten(n.r)
	moved := 0.0
	for a := range at {
		if p.Cov[a][a] == 0 {
			continue
		}
		next := p.Vector[a]
		for k := range r.size {
			next -= c[k][a] * multiplier[k]
		}
		next = math.Max(next, 0.2*at[a]) // numbers, T and μ are positive
		d := next - at[a]
		moved = math.Max(moved, d*d/p.Cov[a][a])
		at[a] = next
	}
	n.latent = *at
	return moved > restful
}

func between(a, b *Vector) (v Vector) {
	for i := range v {
		v[i] = (a[i] + b[i]) / 2
	}
	return v
}

// chi2 is the square of the distance.
func (n *near) chi2() float64 { return n.r[0]*n.r[0] + n.r[1]*n.r[1] }

// restful is the square of the last step, a thousandth of an error: it is of the second
// order in the steps before.
const restful = 1e-6

// linear returns h + J (v − at) and J at the given numbers, by central differences over a
// fiftieth of an error.
func (r *relation) linear(p *Point, g *scales, theta []float64, at *Vector) (v [2]float64, j [2]Vector) {
	var h, up, down [2]float64
	r.eval(p, at, g, theta, h[:r.size])
	v = h
	for a := range numMeasured {
		step := math.Sqrt(p.Cov[a][a]) / 50
		if step == 0 || a == Mu && !r.mu {
			continue
		}
		step = math.Min(step, at[a]/20)
		moved := *at
		moved[a] = at[a] + step
		r.eval(p, &moved, g, theta, up[:r.size])
		moved[a] = at[a] - step
		r.eval(p, &moved, g, theta, down[:r.size])
		for k := range r.size {
			j[k][a] = (up[k] - down[k]) / (2 * step)
			v[k] += j[k][a] * (p.Vector[a] - at[a])
		}
	}
	return v, j
}

// factor returns the Cholesky factor of J C Jᵀ.
func (r *relation) factor(j, c *[2]Vector) (l [3]float64) {
	dot := func(a, b *Vector) (sum float64) {
		for i := range a {
			sum += a[i] * b[i]
		}
		return sum
	}
	l[0] = math.Sqrt(dot(&j[0], &c[0]))
	if r.size == 2 {
		l[1] = dot(&j[0], &c[1]) / l[0]
		l[2] = math.Sqrt(dot(&j[1], &c[1]) - l[1]*l[1])
	}
	return l
}

// whiten returns L⁻¹v.
func (n *near) whiten(v [2]float64) (w [2]float64) {
	w[0] = v[0] / n.lower[0]
	if n.lower[2] != 0 {
		w[1] = (v[1] - n.lower[1]*w[0]) / n.lower[2]
	}
	return w
}

// unwhiten returns L⁻ᵀw.
func (n *near) unwhiten(w [2]float64) (v [2]float64) {
	if n.lower[2] != 0 {
		v[1] = w[1] / n.lower[2]
	}
	v[0] = (w[0] - n.lower[1]*v[1]) / n.lower[0]
	return v
}
