package numbers

import "math"

// tolerance is the relative change under an unstated calibration that leaves a number
// without a calibration error.
const tolerance = 1e-4

// Compute returns every number that follows from a measurement, with its errors.
//
// Err is the delta method, √(∇ᵀ cov ∇), with the full covariance of m in the order of
// its fields; a part that is absent has zero rows. Where a standard deviation exceeds
// its value the slope is a secant over one standard deviation upwards, since the local
// slope says little (that of the density in α diverges at 0). Cal is the root of the
// summed squares of the changes under the known shifts: NaN where a shift that is not
// Known moves the number by more than 1e-4 of itself, and where no shift is given. A
// number that no measured error reaches, such as the fugacity below Tc, is fixed by the
// model and has neither error. Low and High are NaN.
func Compute(m Measured, cov [NumMeasured][NumMeasured]float64, shifts []Shift, lab Lab) Result {
	r := Result{Correlation: correlation(cov)}
	value := Derive(m, lab)
	slopes := gradient(m, cov, lab)
	for _, s := range shifts {
		moved := Derive(m.plus(s.Delta), s.Lab)
		r.Shifts = append(r.Shifts, Effect{s.Name, s.Known, moved.minus(value)})
	}
	for _, q := range quantities {
		v := Value{*q.derived(&value), math.NaN(), math.NaN(), math.NaN(), math.NaN()}
		if variance := q.variance(slopes, cov); variance != 0 && !math.IsNaN(v.V) {
			v.Err = math.Sqrt(variance)
			v.Cal = q.calibration(v.V, r.Shifts)
		}
		*q.result(&r) = v
	}
	return r
}

func correlation(cov [NumMeasured][NumMeasured]float64) (r [NumMeasured][NumMeasured]float64) {
	for i := range r {
		for j := range r {
			if scale := math.Sqrt(cov[i][i] * cov[j][j]); scale > 0 {
				r[i][j] = cov[i][j] / scale
			}
		}
	}
	return r
}

// gradient returns the derivatives of the numbers by each component of m that has a
// variance, by the five-point rule.
func gradient(m Measured, cov [NumMeasured][NumMeasured]float64, lab Lab) (slopes [NumMeasured]Derived) {
	for i := range slopes {
		sigma, x := math.Sqrt(cov[i][i]), *m.at(i)
		if sigma == 0 {
			continue
		}
		at := func(step float64) Derived {
			moved := m
			*moved.at(i) += step
			return Derive(moved, lab)
		}
		if sigma > math.Abs(x) {
			slopes[i] = at(sigma).minus(at(0)).times(1 / sigma)
			continue
		}
		h := 1e-3 * math.Abs(x)
		near, far := at(h).minus(at(-h)), at(2*h).minus(at(-2*h))
		slopes[i] = near.times(8).minus(far).times(1 / (12 * h))
	}
	return slopes
}

// variance returns ∇ᵀ cov ∇ of one number; components without a variance take no part.
func (q quantity) variance(slopes [NumMeasured]Derived, cov [NumMeasured][NumMeasured]float64) float64 {
	sum := 0.
	for i := range slopes {
		for j := range slopes {
			if cov[i][i] != 0 && cov[j][j] != 0 {
				sum += *q.derived(&slopes[i]) * cov[i][j] * *q.derived(&slopes[j])
			}
		}
	}
	return sum
}

// calibration returns the calibration error of a number of the given value.
func (q quantity) calibration(value float64, effects []Effect) float64 {
	if len(effects) == 0 {
		return math.NaN()
	}
	sum := 0.
	for i := range effects {
		change := *q.derived(&effects[i].Change)
		switch {
		case effects[i].Known:
			sum += change * change
		case !(math.Abs(change) <= tolerance*math.Abs(value)):
			return math.NaN()
		}
	}
	return math.Sqrt(sum)
}

// at returns the place of component i in the order of the fields.
func (m *Measured) at(i int) *float64 {
	return [NumMeasured]*float64{&m.ThermalSum, &m.CondensateSum, &m.T, &m.Mu, &m.Alpha}[i]
}

func (m Measured) plus(d Measured) Measured {
	for i := range NumMeasured {
		*m.at(i) += *d.at(i)
	}
	return m
}

func (d Derived) minus(e Derived) Derived {
	for _, q := range quantities {
		*q.derived(&d) -= *q.derived(&e)
	}
	return d
}

func (d Derived) times(f float64) Derived {
	for _, q := range quantities {
		*q.derived(&d) *= f
	}
	return d
}
