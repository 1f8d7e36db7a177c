package study

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"fallshadow/fit/curve"
)

// format writes a number with its statistical and its calibration error in parentheses,
// 0.9981(42)(35) in units of its last digit; the second is a dash where it is not known. Nothing
// stands for a number that there is not.
func format(e curve.Estimate) string {
	if !e.Found() {
		return "not found"
	}
	if math.IsNaN(e.V) {
		return ""
	}
	decimals := 3
	large, small := math.Max(e.Err, orZero(e.Cal)), math.Min(e.Err, orInfinity(e.Cal))
	if large > 0 && !math.IsInf(large, 0) {
		decimals = 1 - int(math.Floor(math.Log10(large)))
		if small > 0 && small < large/10 {
			decimals++
		}
	}
	decimals = min(max(decimals, 0), 12)
	return fixed(e.V, decimals) + digits(e.Err, decimals) + digits(e.Cal, decimals)
}

// fixed writes a number with so many decimals, 0 without a sign.
func fixed(v float64, decimals int) string {
	text := strconv.FormatFloat(v, 'f', decimals, 64)
	if strings.Trim(text, "-0.") == "" {
		return strings.TrimPrefix(text, "-")
	}
	return text
}

// digits writes an error in units of the last of so many decimals.
func digits(e float64, decimals int) string {
	if math.IsNaN(e) {
		return "(-)"
	}
	text := strconv.FormatFloat(e, 'f', decimals, 64)
	if e < 1 {
		text = strings.TrimLeft(strings.Replace(text, ".", "", 1), "0")
	}
	if text == "" {
		text = "0"
	}
	return "(" + text + ")"
}

func orZero(v float64) float64 {
	if math.IsNaN(v) {
		return 0
	}
	return v
}

func orInfinity(v float64) float64 {
	if math.IsNaN(v) || v == 0 {
		return math.Inf(1)
	}
	return v
}

// sigmas writes a distance in errors.
func sigmas(v float64) string {
	if text := fixed(v, 1); text == "0.0" {
		return text
	}
	return fmt.Sprintf("%+.1f", v)
}

// perDof writes chi2 over degrees of freedom.
func perDof(q curve.Quality) string {
	if v := q.PerDof(); !math.IsNaN(v) {
		return strconv.FormatFloat(v, 'g', 2, 64)
	}
	return "-"
}

// count writes a number of things, 1 shot, 2 shots.
func count(n int, what string) string {
	if n == 1 {
		return "1 " + what
	}
	return strconv.Itoa(n) + " " + what + "s"
}
