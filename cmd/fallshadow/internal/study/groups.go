package study

import (
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
	"text/tabwriter"

	"fallshadow/fit/curve"
)

// Grouping says which shots belong together: equal values of a quantity, or bins of it.
type Grouping struct {
	Quantity string
	Width    float64 // 0: equal values
}

// UnmarshalText reads NAME or NAME:WIDTH.
func (g *Grouping) UnmarshalText(b []byte) error {
	name, width, bins := strings.Cut(string(b), ":")
	g.Quantity, g.Width = name, 0
	if !bins {
		return nil
	}
	w, err := strconv.ParseFloat(width, 64)
	if err != nil || !(w > 0) || math.IsInf(w, 0) {
		return fmt.Errorf("group %q: write NAME for equal values or NAME:WIDTH for bins, such as t_reduced:0.05", b)
	}
	g.Width = w
	return nil
}

func (g Grouping) String() string {
	if g.Width == 0 {
		return g.Quantity
	}
	return g.Quantity + ":" + strconv.FormatFloat(g.Width, 'g', -1, 64)
}

// Groups groups the chosen shots.
func (a *Analysis) Groups(g Grouping) ([]curve.Group, error) {
	q, err := a.Night.Quantity(g.Quantity)
	if err != nil {
		return nil, err
	}
	values := a.Night.values(a.Chosen, q)
	if g.Width == 0 {
		return curve.ByValue(values), nil
	}
	return curve.ByWidth(values, g.Width), nil
}

// mean averages a series over places. Where a value has no error, as the fraction of a shot
// without a condensate has none, it is the plain mean, so that every shot counts; its error
// is that of the values that have one and of what all scatter beyond, NaN without either.
func (s series) mean(places []int) curve.Mean {
	squares, all := 0.0, true
	for _, i := range places {
		switch e := s.err[i]; {
		case e > 0:
			squares += e * e
		case !math.IsNaN(s.v[i]):
			all = false
		}
	}
	if all {
		return curve.MeanOf(s.v, s.err, places)
	}
	ones := slices.Repeat([]float64{1}, len(s.v))
	m := curve.MeanOf(s.v, ones, places)
	m.Err, m.Chi2, m.Own = math.NaN(), math.NaN(), math.NaN()
	variance := squares // of the sum
	if m.Count > 1 {
		variance = math.Max(squares, float64(m.Count)*m.Spread*m.Spread)
	}
	if variance > 0 {
		m.Err = math.Sqrt(variance) / float64(m.Count)
	}
	return m
}

// grouped are the quantities of the table of groups.
var grouped = []struct{ name, head string }{{"atoms", "N"}, {"fraction", "N0/N"}, {"T_nK", "T/nK"}}

// WriteGroups writes the weighted means of groups and how the scatter of shots compares
// with their errors: in a group of like shots a ratio near 1 says that the camera is the
// limit, a larger one that the machine varies.
func (a *Analysis) WriteGroups(w io.Writer, by Grouping) error {
	groups, err := a.Groups(by)
	if err != nil {
		return err
	}
	fmt.Fprintf(w, "\ngroups by %s: weighted means, what shots scatter beyond their errors in the error of the mean; scatter of the shots over what their errors let expect\n", by)
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprint(t, "at\tshots\t")
	var all []series
	for _, q := range grouped {
		fmt.Fprintf(t, "%s\tscatter\t", q.head)
		quantity, err := a.Night.Quantity(q.name)
		if err != nil {
			return err
		}
		all = append(all, a.Night.series(a.Chosen, quantity))
	}
	fmt.Fprintln(t, "f - law, scatter")
	pooled := make([]pool, len(all))
	for _, g := range groups {
		fmt.Fprintf(t, "%.6g\t%d\t", g.At, len(g.Places))
		for k, s := range all {
			m := s.mean(g.Places)
			pooled[k].add(m)
			fmt.Fprintf(t, "%s\t%s\t", plusMinus(m), ratio(m.Scatter()))
		}
		fmt.Fprintln(t, ratio(a.scatterOfLaw(g.Places)))
	}
	if err := t.Flush(); err != nil {
		return err
	}
	for k, q := range grouped {
		pooled[k].write(w, q.head)
	}
	return nil
}

// scatterOfLaw returns the root mean square distance of shots to the best law in errors,
// which the trend inside a bin does not widen.
func (a *Analysis) scatterOfLaw(places []int) float64 {
	sum, n := 0.0, 0.0
	for _, i := range places {
		if p := &a.Curve.Points[i]; p.Comparable() {
			d := a.Curve.Distance(a.Theory, a.Best(), p)
			sum, n = sum+d*d, n+1
		}
	}
	return math.Sqrt(sum / n)
}

// pool adds up groups.
type pool struct{ chi2, dof, own, mean, groups float64 }

func (p *pool) add(m curve.Mean) {
	if m.Count < 2 || math.IsNaN(m.Chi2) {
		return
	}
	n := float64(m.Count - 1)
	p.chi2, p.dof = p.chi2+m.Chi2, p.dof+n
	p.own, p.mean, p.groups = p.own+n*m.Own*m.Own, p.mean+n*m.V, p.groups+1
}

// write says who limits a quantity: scatter within a tenth and two of its own errors of 1
// is the camera.
func (p *pool) write(w io.Writer, name string) {
	if p.groups == 0 {
		return
	}
	scatter := math.Sqrt(p.chi2 / p.dof)
	if scatter < 1.1+2/math.Sqrt(2*p.dof) {
		fmt.Fprintf(w, "%s scatters %.2g times its errors inside groups: the camera is the limit\n", name, scatter)
		return
	}
	fmt.Fprintf(w, "%s scatters %.2g times its errors inside groups: the machine, or a trend inside the groups, varies it by %.2g (%.2g %%)\n",
		name, scatter, math.Sqrt(p.own/p.dof), 100*math.Sqrt(p.own/p.dof)/math.Abs(p.mean/p.dof))
}

func plusMinus(m curve.Mean) string {
	if m.Count == 0 {
		return ""
	}
	if math.IsNaN(m.Err) {
		return strconv.FormatFloat(m.V, 'g', 4, 64)
	}
	decimals := min(max(1-int(math.Floor(math.Log10(m.Err))), 0), 12)
	return strconv.FormatFloat(m.V, 'f', decimals, 64) + digits(m.Err, decimals)
}

func ratio(v float64) string {
	if math.IsNaN(v) {
		return "-"
	}
	return strconv.FormatFloat(v, 'f', 2, 64)
}
