package curve

import (
	"math"
	"slices"
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

// Mean is the mean of values, each weighted by 1/err².
type Mean struct {
	Count  int     // values that have an error
	V, Err float64 // Err from the errors alone
	// Chi2 is Σ(v−V)²/err² of Count−1 degrees of freedom: above one each the values scatter
	// by more than their errors, so that the machine is the limit and not the camera.
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
	m := Mean{V: math.NaN(), Err: math.NaN(), Spread: math.NaN(), Own: math.NaN()}
	var w, wv, sum, noise float64
	good := func(i int) bool { return errs[i] > 0 && !math.IsNaN(values[i]) }
	for _, i := range places {
		if good(i) {
			k := 1 / (errs[i] * errs[i])
			m.Count++
			w, wv, sum, noise = w+k, wv+k*values[i], sum+values[i], noise+errs[i]*errs[i]
		}
	}
	if m.Count == 0 {
		return m
	}
	m.V, m.Err = wv/w, 1/math.Sqrt(w)
	plain, squares := sum/float64(m.Count), 0.0
	for _, i := range places {
		if good(i) {
			d, e := values[i]-m.V, values[i]-plain
			m.Chi2 += d * d / (errs[i] * errs[i])
			squares += e * e
		}
	}
	if m.Count > 1 {
		variance := squares / float64(m.Count-1)
		m.Spread = math.Sqrt(variance)
		m.Own = math.Sqrt(math.Max(0, variance-noise/float64(m.Count)))
	}
	return m
}
