package study

import (
	"context"
	"fmt"
	"math"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/fit/curve"
	"fallshadow/model"
)

// Analysis is what the chosen shots of a night say together.
type Analysis struct {
	Night       *Night
	Chosen      *Chosen
	Curve       *curve.Night
	Theory      *curve.Theory
	Aside       []LeftOut          // that tell no law and no transition, and why
	Comparisons []curve.Comparison // none with fewer than three shots of both parts
	Outliers    Outliers
	Transition  curve.Transition
	MeanField   *curve.MeanField
	Attractive  *Attractive
}

// Analyse reads the chosen shots. It fails where none is left.
func (n *Night) Analyse(ctx context.Context, c *Chosen) (*Analysis, error) {
	if len(c.Rows) == 0 {
		return nil, fmt.Errorf("none of the %d shots of %s takes part%s", len(n.Rows), n.Name, firstReason(c))
	}
	a := &Analysis{Night: n, Chosen: c, Curve: n.curveNight(c.Rows)}
	low, high := math.Inf(1), 0.0
	for i := range a.Curve.Points {
		if atoms := a.Curve.Points[i].Atoms(); atoms > 0 {
			low, high = math.Min(low, atoms), math.Max(high, atoms)
		}
	}
	if high == 0 {
		return nil, fmt.Errorf("none of the %s that take part, %s the first, has atoms", count(len(c.Rows), "shot"), c.Rows[0].Shot)
	}
	a.Aside = aside(a.Curve)
	a.Theory = curve.NewTheory(a.Curve.Gas, low, high)
	var err error
	if a.Comparisons, err = a.Curve.Compare(ctx, a.Theory); err != nil {
		return nil, fmt.Errorf("compare with the laws: %w", err)
	}
	a.Outliers = a.findOutliers()
	if a.Transition, err = a.Curve.Locate(ctx, a.Theory); err != nil {
		return nil, fmt.Errorf("locate the transition: %w", err)
	}
	if a.MeanField, err = a.Curve.CheckMeanField(ctx); err != nil {
		return nil, fmt.Errorf("check the mean field: %w", err)
	}
	a.Attractive = n.attractive(c.Rows)
	return a, ctx.Err()
}

func firstReason(c *Chosen) string {
	if len(c.LeftOut) == 0 {
		return ": run batch first"
	}
	return ": " + mostLeft(c.LeftOut)
}

// Best returns the law with the least χ², the ideal one where none was compared.
func (a *Analysis) Best() curve.Law {
	if i := curve.Best(a.Comparisons); i >= 0 {
		return a.Comparisons[i].Law
	}
	return a.Theory.Laws()[0]
}

// Attractive is how near an attractive gas comes to its collapse.
type Attractive struct {
	Largest     float64 // N0 over the critical number, of the shot nearest to it
	Shot        string
	Critical    float64 // in this trap
	Isotropic   float64 // 0.575 ā/|a|
	Variational float64
}

// attractive returns nil for a gas that is not.
func (n *Night) attractive(rows []*ledger.Row) *Attractive {
	mass, a := n.lab.Species.Mass, n.lab.Species.ScatteringLength
	if !(a < 0) {
		return nil
	}
	const isotropic = 0.574966 // gp_attractive_critical.csv; 0.575 in P. A. Ruprecht et al., Phys. Rev. A 51, 4704 (1995)
	t := &Attractive{
		Critical:    model.CriticalNumber(n.lab.Trap, mass, a),
		Variational: model.GaussianCriticalNumber(n.lab.Trap, mass, a),
		Isotropic:   isotropic * n.lab.Trap.Length(mass) / -a,
	}
	for _, r := range rows {
		if v := r.Number("collapse"); v > t.Largest {
			t.Largest, t.Shot = v, r.Shot
		}
	}
	return t
}
