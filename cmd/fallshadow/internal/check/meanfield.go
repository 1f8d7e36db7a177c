package check

import (
	"math"

	"fallshadow/fit/curve"
)

// judgeMeanField notes that the trial fits agree on a mu from the radii that is not mu from
// N0, in the median over those with a large condensate. The flags of a single shot leave more
// room.
func (v *visit) judgeMeanField() {
	var ratios, errors []float64
	of := "errors, calibrations included,"
	for i := range v.fitted {
		if n := &v.fitted[i].facts.Fit.Numbers; n.ThomasFermiParameter.V > curve.LeastParameter {
			r, err := n.MuOverMuAtoms, n.MuOverMuAtoms.Err
			if math.IsNaN(r.Cal) {
				of = "statistical errors"
			} else {
				err = math.Hypot(err, r.Cal)
			}
			ratios, errors = append(ratios, r.V), append(errors, (r.V-1)/err)
		}
	}
	ratio, off := median(ratios), math.Abs(median(errors))
	if !(math.Abs(ratio-1) > curve.MuOff && off > curve.MuErrors) {
		return
	}
	v.trouble.caution("", "mu(R)/mu(N0) is %.3f in the median of %s with a large condensate, %.2g of its %s from 1: alpha, counts_per_isat, magnification, a trap frequency or the scattering length is off; once batch has run, fallshadow calibrate number says which factor would mend it",
		ratio, plural(len(ratios), "trial fit"), off, of)
}
