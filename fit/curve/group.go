package curve

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/stat"
)

// Group are points that belong together, by their places in order.
type Group struct {
	At     float64 // the common value, or the middle of the bin
	Places []int
}

// ByValue groups equal values; NaN is in no group. The groups stand in order of the value.
func ByValue(values []float64) []Group {
	return by(values, func(v float64) float64 { return v })
}

// ByWidth groups values into bins of the given width, whose middles are odd halves of it;
// NaN is in no group. Empty bins are left out.
func ByWidth(values []float64, width float64) []Group {
	return by(values, func(v float64) float64 { return (math.Floor(v/width) + 0.5) * width })
}

func by(values []float64, key func(float64) float64) []Group {
	var list []Group
	place := map[float64]int{}
	for i, v := range values {
		if math.IsNaN(v) {
			continue
		}
		k := key(v)
		at, known := place[k]
		if !known {
			at = len(list)
			place[k] = at
			list = append(list, Group{At: k})
		}
		list[at].Places = append(list[at].Places, i)
	}
	slices.SortFunc(list, func(a, b Group) int {
		if a.At < b.At {
			return -1
		}
		return 1
	})
	return list
}

// Mean is the mean of values, each weighted by 1/(err² + Own²): by 1/err² where the errors
// explain the scatter; else values that are small and have small errors for that would draw
// it down (the random effects of R. DerSimonian, N. Laird, Control. Clin. Trials 7, 177 (1986)).
type Mean struct {
	Count int // values that have an error
	// Err is 1/√Σ1/(err² + Own²): what the values scatter beyond their errors is in it.
	V, Err float64
	// Chi2 is the least Σ(v−V)²/err², of Count−1 degrees of freedom: above one each the values
	// scatter by more than their errors, so that the machine is the limit and not the camera.
	Chi2 float64
	// Spread is the standard deviation of the values, Own what of it the errors do not
	// explain, 0 where they explain all.
	Spread, Own float64
}

// Scatter returns the scatter over the expected errors, √(χ²/dof); NaN of a single value.
func (m Mean) Scatter() float64 {
	if m.Count < 2 {
		return math.NaN()
	}
	return math.Sqrt(m.Chi2 / float64(m.Count-1))
}

// MeanOf averages the values at the given places; those without a positive error do not
// count. Without any it is NaN.
func MeanOf(values, errs []float64, places []int) Mean {
	var v, squares []float64 // of the errors
	for _, i := range places {
		if errs[i] > 0 && !math.IsNaN(values[i]) {
			v, squares = append(v, values[i]), append(squares, errs[i]*errs[i])
		}
	}
	m := Mean{Count: len(v), V: math.NaN(), Err: math.NaN(), Spread: math.NaN(), Own: math.NaN()}
	if len(v) == 0 {
		return m
	}
	closest, _ := weighted(v, squares, 0)
	for i := range v {
		m.Chi2 += (v[i] - closest) * (v[i] - closest) / squares[i]
	}
	own := 0.0
	if len(v) > 1 {
		variance := stat.Variance(v, nil)
		own = math.Max(0, variance-stat.Mean(squares, nil))
		m.Spread, m.Own = math.Sqrt(variance), math.Sqrt(own)
	}
	m.V, m.Err = weighted(v, squares, own)
	return m
}

// weighted returns the mean with weights 1/(error² + own) and its error.
func weighted(v, squares []float64, own float64) (mean, err float64) {
	var w, wv float64
	for i := range v {
		k := 1 / (squares[i] + own)
		w, wv = w+k, wv+k*v[i]
	}
	return wv / w, 1 / math.Sqrt(w)
}
