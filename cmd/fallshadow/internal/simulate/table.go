package simulate

import (
	"bytes"
	"encoding/csv"
	"math"
	"strconv"

	"fallshadow/model"
)

// TruthFile is the name of the table of truths in a simulated night.
const TruthFile = "truth.csv"

// columns of the table of truths; the unit stands in the name, an empty cell has no value.
var columns = []struct {
	name string
	of   func(Truth) float64
}{
	{"flight_ms", func(t Truth) float64 { return t.Flight * 1e3 }},
	{"scan", func(t Truth) float64 { return t.Scan }},
	{"N", func(t Truth) float64 { return t.N }},
	{"N0", func(t Truth) float64 { return t.N0 }},
	{"N_thermal", func(t Truth) float64 { return t.Thermal }},
	{"fraction", func(t Truth) float64 { return t.N0 / t.N }},
	{"T_nK", func(t Truth) float64 { return t.T * 1e9 }},
	{"mu_nK", func(t Truth) float64 { return t.Mu / model.KB * 1e9 }},
	{"fugacity", func(t Truth) float64 { return math.Exp(-t.Alpha) }},
	{"Tc0_nK", func(t Truth) float64 { return t.Tc0 * 1e9 }},
	{"t_reduced", func(t Truth) float64 { return t.T / t.Tc0 }},
	{"width1_um", func(t Truth) float64 { return t.Width[0] * 1e6 }},
	{"width2_um", func(t Truth) float64 { return t.Width[1] * 1e6 }},
	{"radius1_um", func(t Truth) float64 { return t.Radius[0] * 1e6 }},
	{"radius2_um", func(t Truth) float64 { return t.Radius[1] * 1e6 }},
	{"x_px", func(t Truth) float64 { return t.X }},
	{"y_px", func(t Truth) float64 { return t.Y }},
	{"angle_deg", func(t Truth) float64 { return t.Angle * 180 / math.Pi }},
	{"peak_od", func(t Truth) float64 { return t.PeakOD }},
}

// table returns the truths as CSV: shot, the columns, damage.
func table(truths []Truth) ([]byte, error) {
	var buf bytes.Buffer
	w := csv.NewWriter(&buf)
	header := []string{"shot"}
	for _, c := range columns {
		header = append(header, c.name)
	}
	rows := [][]string{append(header, "damage")}
	for _, t := range truths {
		row := []string{t.Shot}
		for _, c := range columns {
			row = append(row, cell(c.of(t)))
		}
		rows = append(rows, append(row, t.Damage))
	}
	err := w.WriteAll(rows)
	return buf.Bytes(), err
}

// cell writes a number to twelve digits: beyond them stands only the rounding of units.
func cell(v float64) string {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return ""
	}
	return strconv.FormatFloat(v, 'g', 12, 64)
}
