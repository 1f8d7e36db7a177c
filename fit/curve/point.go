package curve

import "math"

// The places of the measured numbers in a Vector.
const (
	Thermal    = iota // atoms of the thermal part
	Condensate        // atoms of the condensate
	T                 // K, from the widths
	Mu                // J, from the radii
	numMeasured
)

// Vector holds the measured numbers of a cloud. NaN stands for what a cloud does not tell.
type Vector [numMeasured]float64

// Atoms returns N of both parts.
func (v *Vector) Atoms() float64 { return v[Thermal] + v[Condensate] }

// Fraction returns N0/N.
func (v *Vector) Fraction() float64 { return v[Condensate] / v.Atoms() }

// Point is one cloud.
type Point struct {
	Name   string
	Flight float64 // s
	Vector
	// Cov is the statistical covariance in the order of Vector; rows of what is absent are 0.
	Cov [numMeasured][numMeasured]float64
	// Shifts holds the change of the numbers when a calibration of the night moves up by one
	// standard deviation, in the order of Night.Calibrations; NaN where it is not known.
	Shifts []Vector
	// ByNumber says that T was computed from the number of a saturated thermal part.
	ByNumber bool
}

// Independent says that T and the number of the thermal part were measured apart from each
// other. Where T follows from the number, all that is said of the two together holds by
// itself, with next to no variance.
func (p *Point) Independent() bool {
	const whole = 1 - 1e-6 // of a squared correlation
	c := p.Cov[Thermal][T]
	return !p.ByNumber && !(c*c > 0 && c*c >= whole*p.Cov[Thermal][Thermal]*p.Cov[T][T])
}

// Condensed says that the point has both parts, with an error of each and of T.
func (p *Point) Condensed() bool {
	return p.Vector[Condensate] > 0 && p.Vector[Thermal] > 0 && p.Vector[T] > 0 &&
		p.Cov[Condensate][Condensate] > 0 && p.Cov[Thermal][Thermal] > 0 && p.Cov[T][T] > 0
}

// radii says that the point tells μ from its radii.
func (p *Point) radii() bool { return p.Vector[Mu] > 0 && p.Cov[Mu][Mu] > 0 }

// relative returns the standard deviation of a number over its value.
func (p *Point) relative(i int) float64 { return math.Sqrt(p.Cov[i][i]) / math.Abs(p.Vector[i]) }

// logChange returns the logarithm of what calibration c makes of a number, over the number. A
// change that would take more than half of it goes on as its logarithm begins there, since a
// step that is linear in c may lead below 0.
func (p *Point) logChange(c, i int) float64 {
	const half = 0.5
	if d := p.Shifts[c][i] / p.Vector[i]; d < -half {
		return math.Log1p(-half) + (d+half)/(1-half)
	} else {
		return math.Log1p(d)
	}
}

// shifted returns numbers near those of the point as calibration c makes them.
func (p *Point) shifted(c int, v Vector) Vector {
	for i := range v {
		if p.Vector[i] > 0 {
			v[i] *= math.Exp(p.logChange(c, i))
		} else {
			v[i] += p.Shifts[c][i]
		}
	}
	return v
}

func (p *Point) condensate() float64 { return p.Vector[Condensate] }

// geometricMean returns that of a number of points, NaN of none.
func geometricMean(points []*Point, number func(*Point) float64) float64 {
	sum := 0.0
	for _, p := range points {
		sum += math.Log(number(p))
	}
	return math.Exp(sum / float64(len(points)))
}

// Calibration is a setting that could be wrong: the gas with it moved up by one standard
// deviation. Known is false where nobody stated the uncertainty; Step is the relative move,
// ln(moved/set), of a setting that is a factor, 0 of any other.
type Calibration struct {
	Name  string
	Known bool
	Gas   Gas
	Step  float64
}

// Night is a series of clouds of one gas.
type Night struct {
	Gas          Gas
	Points       []Point
	Calibrations []Calibration
}

// pick returns the points that a test wants, in their order.
func (n *Night) pick(want func(*Point) bool) []*Point {
	var list []*Point
	for i := range n.Points {
		if want(&n.Points[i]) {
			list = append(list, &n.Points[i])
		}
	}
	return list
}

// Shifted says that the change of every number under every calibration is known.
func (p *Point) Shifted() bool {
	for _, s := range p.Shifts {
		for _, d := range s {
			if math.IsNaN(d) {
				return false
			}
		}
	}
	return true
}

// Comparable says that the point has both parts, T and their numbers apart, and that errors
// which it shares with the night are known.
func (p *Point) Comparable() bool { return p.Condensed() && p.Independent() && p.Shifted() }

// condensed returns the points with both parts that tell a law.
func (n *Night) condensed() []*Point { return n.pick((*Point).Comparable) }
