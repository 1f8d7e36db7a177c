package numbers

import "math"

// Nothing returns a Result in which no number exists: every field NaN, no shifts.
func Nothing() Result {
	var r Result
	nan := math.NaN()
	for _, q := range quantities {
		*q.result(&r) = Value{nan, nan, nan, nan, nan}
	}
	return r
}
