package study

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/imageio"
	"fallshadow/model"
)

// Quantity is what can stand on an axis, in a condition or in a group: a column of the table
// of results, a scan variable, or a number that follows from them.
type Quantity struct {
	Name  string
	Label string // for an axis, as figure.Markup takes it; empty where Name is to be shown as it is
	Unit  string // empty: a pure number, or unknown

	// number is that of the shot in the night.
	get func(n *Night, r *ledger.Row, number int) float64
}

// value returns the quantity of a row, NaN where there is none.
func (q *Quantity) value(n *Night, r *ledger.Row, number int) float64 { return q.get(n, r, number) }

// labels are what the usual axes are called.
var labels = map[string]string{
	"t_reduced":              "*T* / *T*_{c}^{0}",
	"t_reduced_corrected":    "*T* / *T*_{c}  (finite size and mean field)",
	"fraction":               "condensate fraction  *N*_{0} / *N*",
	"atoms":                  "atom number  *N*",
	"condensate":             "condensate number  *N*_{0}",
	"thermal":                "thermal atoms  *N*_{th}",
	"T_nK":                   "temperature  *T*  (nK)",
	"Tc0_nK":                 "*T*_{c}^{0}  (nK)",
	"mu_nK":                  "chemical potential  *μ* / *k*  (nK)",
	"mu_from_atoms_nK":       "*μ* / *k* from *N*_{0}  (nK)",
	"phase_space_density":    "peak phase-space density  *nλ*^{3}",
	"peak_density_um3":       "peak density  (1/µm^{3})",
	"entropy_per_atom":       "entropy  *S* / *Nk*  (points: ideal gas with *N*_{th})",
	"thermal_over_saturated": "*N*_{th} / *N*_{sat}",
	"mu_over_mu_atoms":       "*μ* from radius / *μ* from *N*_{0}",
	"flight_ms":              "flight  (ms)",
	"peak_od":                "peak *σ*_{0}*n*",
}

// derived are the quantities that are no columns.
var derived = []Quantity{
	{"number", "shot number", "", func(_ *Night, _ *ledger.Row, number int) float64 { return float64(number) }},
	{"atoms_over_saturated", "*N* / *N*_{sat}(*T*)", "", func(n *Night, r *ledger.Row, _ int) float64 {
		return r.Number("atoms") / n.saturated(r)
	}},
	{"condensate_over_saturated", "*N*_{0} / *N*_{sat}(*T*)", "", func(n *Night, r *ledger.Row, _ int) float64 {
		return r.Number("condensate") / n.saturated(r)
	}},
	{"mu_over_kT", "*μ* / *kT*,  *μ* from *N*_{0}", "", func(_ *Night, r *ledger.Row, _ int) float64 {
		return r.Number("mu_from_atoms_nK") / r.Number("T_nK")
	}},
}

func (n *Night) saturated(r *ledger.Row) float64 {
	return model.ThermalNumber(r.Number("T_nK")*1e-9, 0, n.lab.Trap)
}

// Quantity finds a quantity by name; the error lists the names.
func (n *Night) Quantity(name string) (*Quantity, error) {
	if q := n.find(name); q != nil {
		return q, nil
	}
	var names []string
	for _, q := range derived {
		names = append(names, q.Name)
	}
	for _, c := range report.Columns {
		if c.IsNumber() && !isDetail(c.Name) {
			names = append(names, c.Name)
		}
	}
	return nil, fmt.Errorf("no quantity is called %q: there are %s", name, strings.Join(append(names, n.Settings.Shots.Scan...), ", "))
}

// isDetail says that a column is an error or a correlation, which lists leave out.
func isDetail(column string) bool {
	i := strings.LastIndexByte(column, '_')
	return strings.HasPrefix(column, "corr_") || i >= 0 && slices.Contains([]string{"_err", "_cal", "_low", "_high"}, column[i:])
}

func (n *Night) find(name string) *Quantity {
	for i := range derived {
		if derived[i].Name == name {
			return &derived[i]
		}
	}
	for i := range report.Columns {
		if c := &report.Columns[i]; c.Name == name && c.IsNumber() {
			return &Quantity{name, labels[name], c.Unit, func(_ *Night, r *ledger.Row, _ int) float64 { return r.Number(name) }}
		}
	}
	if slices.Contains(n.Settings.Shots.Scan, name) {
		return &Quantity{name, "", "", func(_ *Night, r *ledger.Row, _ int) float64 {
			v, err := imageio.Metadata(r.Meta).Number(name)
			if err != nil {
				return math.NaN()
			}
			return v
		}}
	}
	return nil
}

// values returns a quantity over the chosen rows, NaN where there is none.
func (n *Night) values(c *Chosen, q *Quantity) []float64 {
	list := make([]float64, len(c.Rows))
	for i, r := range c.Rows {
		list[i] = q.value(n, r, c.Numbers[i])
	}
	return list
}

// series are the values of a quantity over the chosen rows with their statistical and
// calibration errors, NaN where there is none.
type series struct{ v, err, cal, low, high []float64 }

func (n *Night) series(c *Chosen, q *Quantity) series {
	cells := func(ending string) []float64 {
		name, list := q.Name+ending, make([]float64, len(c.Rows))
		for i, r := range c.Rows {
			list[i] = r.Number(name)
		}
		return list
	}
	return series{n.values(c, q), cells("_err"), cells("_cal"), cells("_low"), cells("_high")}
}
