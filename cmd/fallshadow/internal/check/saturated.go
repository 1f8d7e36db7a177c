package check

import (
	"slices"

	"fallshadow/fit"
)

// From this ratio on, if it is as many errors above 1, more thermal atoms are there than an
// ideal gas holds beside a condensate.
const (
	mostSaturated = 1.3
	sureErrors    = 5
)

// judgeSaturation notes, and reports, that the trial fits of a repulsive gas as an ideal one
// have more thermal atoms than such a gas holds, in the median over those with a condensate.
func (v *visit) judgeSaturation() bool {
	if v.Settings.Fit.Thermal != "bose" || !(v.look.Lab.Species.ScatteringLength > 0) {
		return false
	}
	var ratios, errors []float64
	for i := range v.fitted {
		if r := v.fitted[i].facts.Fit; r.Model == fit.ModelBimodal {
			s := r.Numbers.ThermalOverSaturated
			ratios, errors = append(ratios, s.V), append(errors, (s.V-1)/s.Err)
		}
	}
	ratio := median(ratios)
	if !(ratio > mostSaturated && median(errors) > sureErrors) {
		return false
	}
	v.trouble.caution("", "Nth/Nsat is %.2f in the median of %s with a condensate, more thermal atoms than an ideal gas holds: they feel the condensate, and T comes out low; compare with thermal = \"semi-ideal\" in [fit]",
		ratio, plural(len(ratios), "trial fit"))
	return true
}

// withoutForm takes out the flag that says the same of single shots.
func withoutForm(list []raised) []raised {
	return slices.DeleteFunc(list, func(r raised) bool { return r.Name == fit.FlagForm })
}
