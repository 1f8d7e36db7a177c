package study

import (
	"math"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/fit"
	"fallshadow/fit/curve"
	"fallshadow/model"
)

// measured are the numbers of a point as columns, and as the numbers of a shift in the
// ledger; the columns are in units of perSI.
var measured = [...]struct {
	column, number string
	perSI          float64
}{
	curve.Thermal:    {"thermal", "thermal", 1},
	curve.Condensate: {"condensate", "condensate", 1},
	curve.T:          {"T_nK", "T", 1e9},
	curve.Mu:         {"mu_nK", "mu", 1e9 / model.KB},
}

// correlations are the columns that hold one, by the places of the two numbers.
var correlations = []struct {
	column string
	i, j   int
}{
	{"corr_thermal_condensate", curve.Thermal, curve.Condensate},
	{"corr_thermal_T", curve.Thermal, curve.T},
	{"corr_thermal_mu", curve.Thermal, curve.Mu},
	{"corr_condensate_T", curve.Condensate, curve.T},
	{"corr_condensate_mu", curve.Condensate, curve.Mu},
	{"corr_T_mu", curve.T, curve.Mu},
}

// curveNight returns the points of rows, in their order.
func (n *Night) curveNight(rows []*ledger.Row) *curve.Night {
	c := &curve.Night{Gas: Gas(&n.lab), Calibrations: calibrations(&n.lab)}
	for _, r := range rows {
		c.Points = append(c.Points, point(r, c.Calibrations))
	}
	return c
}

// calibrations returns the settings that carry an uncertainty, with what each does to the
// gas.
func calibrations(lab *fit.Lab) []curve.Calibration {
	var list []curve.Calibration
	for _, c := range lab.Calibration {
		moved, _ := c.Apply(*lab, 0, 1)
		step := 0.0
		switch c.Name {
		case curve.Alpha:
			step = math.Log(moved.Optics.Alpha / lab.Optics.Alpha)
		case curve.Magnification:
			step = math.Log(lab.Optics.Pixel / moved.Optics.Pixel)
		case curve.Sight:
			step = 3 * math.Log(moved.Trap.GeometricMean()/lab.Trap.GeometricMean())
		}
		list = append(list, curve.Calibration{Name: c.Name, Known: c.Known, Gas: Gas(&moved), Step: step})
	}
	return list
}

// point returns a row as a point. A cloud of one part has 0 atoms in the other, in its row too.
func point(r *ledger.Row, calibrations []curve.Calibration) curve.Point {
	p := curve.Point{Name: r.Shot, Flight: r.Number("flight_ms") * 1e-3, ByNumber: byNumber(r)}
	var sigma curve.Vector
	for i, m := range measured {
		p.Vector[i] = r.Number(m.column) / m.perSI
		if e := r.Number(m.column+"_err") / m.perSI; e > 0 {
			sigma[i] = e
			p.Cov[i][i] = e * e
		}
	}
	for _, c := range correlations {
		if v := r.Number(c.column); !math.IsNaN(v) {
			v *= sigma[c.i] * sigma[c.j]
			p.Cov[c.i][c.j], p.Cov[c.j][c.i] = v, v
		}
	}
	p.Shifts = make([]curve.Vector, len(calibrations))
	for k, c := range calibrations {
		for i, m := range measured {
			change, known := r.Shifts[c.Name].Change[m.number]
			if !known && p.Cov[i][i] > 0 {
				change = math.NaN()
			}
			p.Shifts[k][i] = change
		}
	}
	return p
}

// lacksCorrelations says that a row is of a program that did not keep them yet.
func lacksCorrelations(r *ledger.Row) bool {
	return r.Words["model"] == fit.ModelBimodal && math.IsNaN(r.Number("corr_thermal_T"))
}
