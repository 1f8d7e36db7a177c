package study

import (
	"fmt"
	"math"

	"fallshadow/fit/curve"
)

// numberOff says that mu from the radii is not mu from N0 over the night, "" where it is.
func (a *Analysis) numberOff() string {
	if a.MeanField == nil {
		return ""
	}
	r, of := a.MeanField.Ratio, "errors"
	if math.IsNaN(r.Cal) {
		of = "statistical errors"
	}
	off := math.Abs(r.V-1) / r.Error()
	if !(math.Abs(r.V-1) > curve.MuOff && off > curve.MuErrors) {
		return ""
	}
	return fmt.Sprintf("mu from the radii over mu from N0 is %.2g of its %s from 1: alpha, counts_per_isat, magnification, a trap frequency or the scattering length is off, and N, Tc0 and the laws with it; calibrate number says which factor would mend it", off, of)
}
