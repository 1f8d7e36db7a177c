package study

import (
	"encoding/csv"
	"io"
	"math"
	"strconv"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/fit/curve"
	"fallshadow/model"
)

// PointColumn is a column of the table of a curve.
type PointColumn struct {
	Name, Unit, Meaning string

	cell func(a *Analysis, r *ledger.Row, p *curve.Point) string // p is nil of a shot that takes no part
}

// PointColumns is the one table of the columns of curve.csv.
var PointColumns = append([]PointColumn{
	{"shot", "", "path of the shot in the night", func(_ *Analysis, r *ledger.Row, _ *curve.Point) string { return r.Shot }},
	{"left_out", "", "why the shot takes no part, empty where it does", func(a *Analysis, r *ledger.Row, p *curve.Point) string {
		if p != nil && whyAside(p) != "" {
			return "of laws and transition: " + whyAside(p)
		}
		return a.Chosen.why[r.Shot]
	}},
	cell("T_nK"), cell("T_nK_err"), cell("T_nK_cal"),
	cell("atoms"), cell("atoms_err"), cell("atoms_cal"),
	cell("t_reduced"), cell("t_reduced_err"), cell("t_reduced_cal"),
	cell("fraction"), cell("fraction_err"), cell("fraction_cal"),
	{"sigmas", "", "signed distance to the law of least chi2 in statistical errors, with the full covariance", distance},
	{"entropy_ideal", "k", "entropy per atom of the ideal gas at T/Tc0", entropy(func(_ *Analysis, t, _ float64) float64 { return model.IdealEntropy(t) })},
	{"entropy_semi_ideal", "k", "entropy per atom of the semi-ideal gas at T/Tc0 and N", entropy(func(a *Analysis, t, n float64) float64 { return a.Theory.Entropy(t, n) })},
	cell("thomas_fermi_parameter"), cell("collapse"),
}, lawColumns()...)

// cell takes a column over from the table of results.
func cell(name string) PointColumn {
	return PointColumn{name, "", "as in results.csv", func(_ *Analysis, r *ledger.Row, _ *curve.Point) string { return decimal(r.Number(name)) }}
}

func lawColumns() (list []PointColumn) {
	for _, l := range curve.Laws {
		list = append(list, PointColumn{"fraction_" + l.Name, "", "condensate fraction by the law at the shot's T/Tc0 and N: " + l.Note,
			func(a *Analysis, _ *ledger.Row, p *curve.Point) string {
				if p == nil || !(p.Atoms() > 0) {
					return ""
				}
				return decimal(a.Theory.Fraction(l, a.Curve.Gas.Reduced(p.Vector[curve.T], p.Atoms()), p.Atoms()))
			}})
	}
	return list
}

func distance(a *Analysis, _ *ledger.Row, p *curve.Point) string {
	if p == nil || !p.Comparable() {
		return ""
	}
	return decimal(a.Curve.Distance(a.Theory, a.Best(), p))
}

func entropy(of func(a *Analysis, t, n float64) float64) func(*Analysis, *ledger.Row, *curve.Point) string {
	return func(a *Analysis, _ *ledger.Row, p *curve.Point) string {
		if p == nil || !(p.Atoms() > 0) {
			return ""
		}
		return decimal(of(a, a.Curve.Gas.Reduced(p.Vector[curve.T], p.Atoms()), p.Atoms()))
	}
}

// decimal writes a number with the digits that give it back, nothing for what is not finite.
func decimal(v float64) string {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return ""
	}
	return strconv.FormatFloat(v, 'g', -1, 64)
}

// WriteTable writes every shot of the night as a line of comma-separated values (RFC 4180),
// those that take no part with the reason.
func (a *Analysis) WriteTable(w io.Writer) error {
	out := csv.NewWriter(w)
	out.UseCRLF = true
	line := make([]string, len(PointColumns))
	for i, c := range PointColumns {
		line[i] = c.Name
	}
	out.Write(line)
	place := map[string]int{}
	for i, r := range a.Chosen.Rows {
		place[r.Shot] = i
	}
	for i := range a.Night.Rows {
		r := &a.Night.Rows[i]
		var p *curve.Point
		if k, ok := place[r.Shot]; ok {
			p = &a.Curve.Points[k]
		}
		for k, c := range PointColumns {
			line[k] = c.cell(a, r, p)
		}
		out.Write(line)
	}
	out.Flush()
	return out.Error()
}
