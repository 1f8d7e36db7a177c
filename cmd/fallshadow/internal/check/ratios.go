package check

import (
	"fmt"
	"math"

	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit"
)

// writeRatios holds two routes to one number against each other, shot by shot.
func (v *visit) writeRatios() {
	if len(v.fitted) == 0 {
		return
	}
	v.page.title("Trial fits: ratios that are 1 when all settings are right")
	lines := [][]string{{"shot", "model", "T1/T2", "mu1/mu2", "mu(R)/mu(N0)", "Nth/Nsat", "aspect", "predicted"}}
	var names []string
	for _, f := range v.fitted {
		names = append(names, v.look.Shots[f.shot].Name)
	}
	names = brief(names, 16)
	for i := range v.fitted {
		f := &v.fitted[i]
		row := []string{names[i], f.facts.Fit.Model}
		for _, c := range []string{"T_axes_ratio", "mu_axes_ratio", "mu_over_mu_atoms"} {
			row = append(row, report.Concise(&f.row, c))
		}
		saturated := ""
		if f.facts.Fit.Model == fit.ModelBimodal {
			saturated = report.Concise(&f.row, "thermal_over_saturated")
		}
		measured, predicted := v.aspect(f.facts.Fit)
		lines = append(lines, append(row, saturated, measured, predicted))
	}
	v.page.table(lines, false)
	v.page.hang("  ", 2, "T1/T2, mu1/mu2: temperature and chemical potential along axis 1 over axis 2; mu(R)/mu(N0): from the radii over from the condensate's number; "+
		"Nth/Nsat: thermal atoms over zeta(3)(kT/hbar w)^3, somewhat above 1 with interactions; aspect: size along axis 1 over axis 2, of the condensate where there is one.")
}

// aspect returns the ratio of the sizes along the two axes as a free fit measures it, and
// as trap and flight predict it.
func (v *visit) aspect(r *fit.Result) (measured, predicted string) {
	ratio, err, size := r.Checks.MuRatio, r.Checks.MuRatioErr, r.Radius
	if math.IsNaN(ratio) {
		ratio, err, size = r.Checks.TRatio, r.Checks.TRatioErr, r.Width
	}
	// Both widths of a tied fit follow from one number, and go with its square root.
	x := size[0] / size[1]
	if math.IsNaN(x) || math.IsNaN(ratio) {
		return "", ""
	}
	free := x * math.Sqrt(ratio)
	if v.Settings.Fit.Tie == "free" {
		x, free = x/math.Sqrt(ratio), x
	}
	return withError(free, free*err/(2*ratio)), fmt.Sprintf("%.4g", x)
}
