package closure

import (
	"fmt"
	"math"

	"fallshadow/fit"
	"fallshadow/model/numbers"
)

// quantity is a number that is held against its bound.
type quantity struct {
	name  string
	truth func(*shot) float64
	value func(*numbers.Result) numbers.Value
	bound func(*shot) float64
	// poorly is the ratio of bound and truth from which on a shot does not count: such
	// errors are not symmetric and no single number holds them.
	poorly float64
}

var quantities = []quantity{
	{"N", func(s *shot) float64 { return s.truth.N }, func(n *numbers.Result) numbers.Value { return n.Atoms },
		func(s *shot) float64 { return s.limit.Atoms }, math.Inf(1)},
	{"T", func(s *shot) float64 { return s.truth.T }, func(n *numbers.Result) numbers.Value { return n.T },
		func(s *shot) float64 { return s.limit.T }, 0.2},
	{"N0", func(s *shot) float64 { return s.truth.N0 }, func(n *numbers.Result) numbers.Value { return n.Condensate },
		func(s *shot) float64 { return s.limit.Condensate }, 0.2},
	{"mu", func(s *shot) float64 { return s.truth.Mu }, func(n *numbers.Result) numbers.Value { return n.Mu },
		func(s *shot) float64 { return s.limit.Mu }, 0.2},
}

// spread gathers how far values lie from the truth in units of something.
type spread struct{ n, sum, square float64 }

func (s *spread) add(z float64) {
	s.n++
	s.sum += z
	s.square += z * z
}

func (s spread) mean() float64 { return s.sum / s.n }
func (s spread) rms() float64  { return math.Sqrt(s.square / s.n) }

// scatter is the standard deviation about the mean.
func (s spread) scatter() float64 { return math.Sqrt(math.Max(0, s.square/s.n-s.mean()*s.mean())) }

// score is how one quantity of a night came out.
type score struct {
	bounds   spread // (value - truth)/bound
	pulls    spread // (value - truth)/error
	relative spread // (value - truth)/truth
	poor     int    // shots whose bound is too large a part of the truth
	missed   int    // shots that count but have no value: the part was not found
	worst    float64
	worstAt  string
}

func scoreOf(q quantity, shots []shot) (s score) {
	for i := range shots {
		truth, bound := q.truth(&shots[i]), q.bound(&shots[i])
		if !(truth > 0) || math.IsNaN(bound) {
			continue // the cloud has none
		}
		if !(bound < q.poorly*truth) {
			s.poor++
			continue
		}
		v := q.value(&shots[i].fit.Numbers)
		if !found(q, shots[i].fit) || math.IsNaN(v.V) {
			s.missed++
			continue
		}
		s.bounds.add((v.V - truth) / bound)
		s.pulls.add((v.V - truth) / v.Err)
		s.relative.add((v.V - truth) / truth)
		if z := math.Abs(v.V-truth) / bound; z > s.worst {
			s.worst, s.worstAt = z, shots[i].truth.Shot
		}
	}
	return s
}

// found says whether a fit has the part that a quantity belongs to.
func found(q quantity, r *fit.Result) bool {
	switch q.name {
	case "T":
		return r.Model == fit.ModelThermal || r.Model == fit.ModelBimodal
	case "N0", "mu":
		return r.Model == fit.ModelCondensate || r.Model == fit.ModelBimodal
	}
	return r.Model != fit.ModelNone && r.Model != ""
}

// head and line make the table.
const head = "night             of  shots  rms   mean  pulls  poor  missed  worst"

func (s score) line(night, of string) string {
	return fmt.Sprintf("%-17s %-3s %4.0f  %5.3f  %+.3f  %5.3f  %4d  %6d  %.1f %s",
		night, of, s.bounds.n, s.bounds.rms(), s.bounds.mean(), s.pulls.rms(), s.poor, s.missed, s.worst, s.worstAt)
}
