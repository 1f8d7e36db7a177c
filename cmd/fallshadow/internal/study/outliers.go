package study

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit/curve"
)

// The distances in statistical errors from which on a shot is named, and chi2 a shot up to
// which a law describes a night.
const (
	farAway   = 5
	describes = 3
)

// Outliers are the shots that are far from the law to which the middle one of all is nearest:
// a single shot can make another law that of least chi2, but not this one.
type Outliers struct {
	Law       curve.Law
	Places    []int     // in Chosen.Rows; none where most shots are far
	Distances []float64 // of these in their errors, signed
	// Without is the law of least chi2 a shot without them, and PerShot that chi2.
	Without curve.Law
	PerShot float64
}

// distances returns the signed distances of the shots to a law, NaN of those that tell none.
func (a *Analysis) distances(l curve.Law) []float64 {
	list := make([]float64, len(a.Curve.Points))
	for i := range list {
		list[i] = math.NaN()
		if p := &a.Curve.Points[i]; p.Comparable() {
			list[i] = a.Curve.Distance(a.Theory, l, p)
		}
	}
	return list
}

// findOutliers looks for shots that are far from the nearest law.
func (a *Analysis) findOutliers() Outliers {
	var all [][]float64
	near, least := -1, math.Inf(1)
	for i, c := range a.Comparisons {
		all = append(all, a.distances(c.Law))
		if m := middle(all[i]); m < least {
			near, least = i, m
		}
	}
	o := Outliers{PerShot: math.NaN()}
	if near < 0 || least > farAway {
		return o
	}
	o.Law = a.Comparisons[near].Law
	for i, d := range all[near] {
		if math.Abs(d) > farAway {
			o.Places, o.Distances = append(o.Places, i), append(o.Distances, d)
		}
	}
	for i, c := range a.Comparisons {
		if v := meanSquare(all[i], o.Places); !(v >= o.PerShot) {
			o.Without, o.PerShot = c.Law, v
		}
	}
	return o
}

// middle returns the median of the sizes of distances, NaN without any.
func middle(distances []float64) float64 {
	var list []float64
	for _, d := range distances {
		if !math.IsNaN(d) {
			list = append(list, math.Abs(d))
		}
	}
	if len(list) == 0 {
		return math.NaN()
	}
	slices.Sort(list)
	return list[len(list)/2]
}

// meanSquare returns that of the distances that there are, those at some places left out.
func meanSquare(distances []float64, out []int) float64 {
	sum, n := 0.0, 0.0
	for i, d := range distances {
		if _, left := slices.BinarySearch(out, i); !left && !math.IsNaN(d) {
			sum, n = sum+d*d, n+1
		}
	}
	return sum / n
}

// Describes says that the law of least chi2 is a fair one.
func (a *Analysis) Describes() bool {
	i := curve.Best(a.Comparisons)
	return i >= 0 && a.Comparisons[i].PerDof() <= describes
}

// doubts words what speaks against the comparison with the laws: that none of them fits, and
// which shots are far off, with their flags.
func (a *Analysis) doubts() (lines []string) {
	if i := curve.Best(a.Comparisons); i >= 0 && !a.Describes() {
		lines = append(lines, fmt.Sprintf("no law describes these shots: the least chi2 a shot is %.3g, where about 1 is expected", a.Comparisons[i].PerDof()))
	}
	o := &a.Outliers
	if len(o.Places) == 0 {
		return lines
	}
	const most = 8
	shown, more := cut(o.Places, most)
	var list []string
	for k, i := range shown {
		r := a.Chosen.Rows[i]
		list = append(list, fmt.Sprintf("%s (%s)", r.Shot, strings.Join(append([]string{sigmas(o.Distances[k])}, report.Flags(r)...), ", ")))
	}
	text := fmt.Sprintf("%s more than %d errors from %s, to which most are nearest: %s", count(len(o.Places), "shot"), farAway, o.Law.Title, strings.Join(list, ", "))
	if more > 0 {
		text += fmt.Sprintf(" and %d more", more)
	}
	return append(lines, fmt.Sprintf("%s; the rest has the least chi2, %.3g a shot, from %s", text, o.PerShot, o.Without.Title))
}
