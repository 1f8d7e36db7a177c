package study

import (
	"encoding/json"
	"io"
	"math"

	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit/curve"
)

// summary is the analysis as JSON.
type summary struct {
	Night       string       `json:"night"`
	Shots       int          `json:"shots"`
	LeftOut     []LeftOut    `json:"left_out"`
	Aside       []LeftOut    `json:"left_out_of_laws"`
	Laws        []compared   `json:"laws"`
	Best        string       `json:"least_chi2"`
	Outliers    []outlier    `json:"outliers"`
	Saturation  *located     `json:"saturation"`
	Unsaturated string       `json:"saturation_not_told,omitempty"`
	Onsets      []located    `json:"onsets"`
	Predictions []prediction `json:"predictions"`
	Atoms       *float64     `json:"predictions_for_atoms"`
	Slope       *number      `json:"mu_exponent"`
	MuRatio     *number      `json:"mu_over_mu_atoms"`
	Release     *number      `json:"release_over_expected"`
}

type compared struct {
	Law       string   `json:"law"`
	Note      string   `json:"note"`
	Shots     int      `json:"shots"`
	Chi2      *float64 `json:"chi2"`
	Deviation *number  `json:"mean_deviation"`
	Share     *number  `json:"share"`
}

// outlier is a shot that is far from the law to which most are nearest.
type outlier struct {
	Shot   string   `json:"shot"`
	Law    string   `json:"law"`
	Sigmas float64  `json:"sigmas"`
	Flags  []string `json:"flags"`
}

type located struct {
	Law   string   `json:"law,omitempty"`
	Ratio *number  `json:"tc_ratio"`
	Share *number  `json:"share_of_semi_ideal_excess,omitempty"`
	Shots int      `json:"shots"`
	Chi2  *float64 `json:"chi2"`
	Dof   int      `json:"dof"`
}

type prediction struct {
	Name  string  `json:"name"`
	Note  string  `json:"note"`
	Ratio float64 `json:"tc_over_tc0"`
}

// number is an estimate; null stands for what is not known, since JSON has no NaN.
type number struct {
	Value *float64 `json:"value"`
	Err   *float64 `json:"err"`
	Cal   *float64 `json:"cal"`
}

func jsonNumber(e curve.Estimate) *number { return &number{finite(e.V), finite(e.Err), finite(e.Cal)} }

func finite(v float64) *float64 {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return nil
	}
	return &v
}

// WriteJSON writes the numbers of the analysis as one JSON object.
func (a *Analysis) WriteJSON(w io.Writer) error {
	t := &a.Transition
	v := summary{Night: a.Night.Name, Shots: len(a.Chosen.Rows), LeftOut: a.Chosen.LeftOut, Aside: a.Aside, Atoms: finite(t.Atoms)}
	if a.Describes() {
		v.Best = a.Best().Name
	}
	for k, i := range a.Outliers.Places {
		r := a.Chosen.Rows[i]
		v.Outliers = append(v.Outliers, outlier{r.Shot, a.Outliers.Law.Name, a.Outliers.Distances[k], report.Flags(r)})
	}
	for _, c := range a.Comparisons {
		v.Laws = append(v.Laws, compared{c.Law.Name, c.Law.Note, c.Points, finite(c.Chi2), jsonNumber(c.Deviation), jsonNumber(c.Amplitude)})
	}
	if s := t.Saturation; s != nil {
		v.Saturation = &located{"", jsonNumber(s.Ratio), jsonNumber(s.Excess), s.Points, finite(s.Chi2), s.Dof}
	}
	v.Unsaturated = t.Unsaturated
	for _, o := range t.Onsets {
		v.Onsets = append(v.Onsets, located{o.Law.Name, jsonNumber(o.Ratio), nil, o.Points, finite(o.Chi2), o.Dof})
	}
	for _, p := range t.Predictions {
		v.Predictions = append(v.Predictions, prediction{p.Name, p.Note, p.Ratio})
	}
	if m := a.MeanField; m != nil {
		v.Slope, v.MuRatio = jsonNumber(m.Slope), jsonNumber(m.Ratio)
		if m.Release != nil {
			v.Release = jsonNumber(m.Release.Ratio)
		}
	}
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	return e.Encode(v)
}
