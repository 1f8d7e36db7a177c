package model

import (
	"errors"
	"math"
)

const (
	rkStages   = 12
	odeMaxDim  = 9
	odeMaxStep = 20000
)

var errTooManySteps = errors.New("equations of motion need too many steps")

type (
	odeState [odeMaxDim]float64
	odeRight func(t float64, y, dy *odeState)
)

// integrate advances the first dim components of y from t0 to t1 ≥ t0 by the method of
// Dormand and Prince of order 8 with step control on the combined estimate of order 5
// and 3 (Hairer, Nørsett, Wanner, section II.10). The estimate of a step stays below tol
// times max(1, |y|) in the rms over the components, which should be scaled to be of order
// 1; the true local error is far smaller.
func integrate(f odeRight, dim int, t0, t1, tol float64, y *odeState) error {
	var k [rkStages]odeState
	var next odeState
	if t1 == t0 {
		return nil
	}
	t, hold := t0, true // hold: the step must not grow now
	h := math.Min(t1-t0, 0.05)
	f(t, y, &k[0])
	for range odeMaxStep {
		last := t+h >= t1
		if last {
			h = t1 - t
		}
		rkStep(f, dim, t, h, y, &k, &next)
		e := rkError(dim, h, y, &next, &k) / tol
		if !(e <= 1) {
			if !(e < math.MaxFloat64) {
				h /= 10
			} else {
				h *= math.Max(0.2, 0.9*math.Pow(e, -0.125))
			}
			if t+h == t {
				return errTooManySteps
			}
			hold = true
			continue
		}
		t, *y = t+h, next
		if last {
			return nil
		}
		f(t, y, &k[0])
		grow := 0.9 * math.Pow(math.Max(e, 1e-9), -0.125)
		if hold {
			grow = math.Min(grow, 1)
		}
		hold = false
		h *= math.Min(math.Max(grow, 0.2), 8)
	}
	return errTooManySteps
}

// rkStep fills k[1:] and next = y + h Σ b_i k_i from k[0].
func rkStep(f odeRight, dim int, t, h float64, y *odeState, k *[rkStages]odeState, next *odeState) {
	for s := 1; s < rkStages; s++ {
		*next = *y
		for j, a := range rkMatrix[s][:s] {
			if a == 0 {
				continue
			}
			for i := range dim {
				next[i] += h * a * k[j][i]
			}
		}
		f(t+rkNodes[s]*h, next, &k[s])
	}
	for i := range dim {
		sum := 0.0
		for s, b := range rkWeights {
			sum += b * k[s][i]
		}
		next[i] = y[i] + h*sum
	}
}

// rkError combines both estimates, each relative to max(1, |y|).
func rkError(dim int, h float64, y, next *odeState, k *[rkStages]odeState) float64 {
	var sum5, sum3 float64
	for i := range dim {
		var e5, e3 float64
		for s := range rkStages {
			e5 += rkError5[s] * k[s][i]
			e3 += (rkWeights[s] - rkThird[s]) * k[s][i]
		}
		scale := math.Max(1, math.Max(math.Abs(y[i]), math.Abs(next[i])))
		sum5 += e5 / scale * e5 / scale
		sum3 += e3 / scale * e3 / scale
	}
	if sum5 == 0 && sum3 == 0 {
		return 0
	}
	return math.Abs(h) * sum5 / math.Sqrt((sum5+0.01*sum3)*float64(dim))
}
