package report

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"fallshadow/cmd/fallshadow/internal/ledger"
)

// Concise writes the number of a column with its statistical error in parentheses, as
// 123.4(1.2), 0.345(12) or 1.234(12)e5: two digits of the error. An interval in its place
// is written 12.3+1.5-0.9 and a limit <12.3 or >12.3; without any error the number has four digits.
func Concise(r *ledger.Row, column string) string {
	v := r.Number(column)
	e, low, high := r.Number(column+"_err"), r.Number(column+"_low"), r.Number(column+"_high")
	switch {
	case high-high == 0 && low-low != 0:
		return "<" + short(high, 3)
	case low-low == 0 && high-high != 0:
		return ">" + short(low, 3)
	case math.IsNaN(v):
		return ""
	case high >= v && v >= low && high > low:
		return asymmetric(v, high-v, v-low)
	case e > 0 && e-e == 0:
		return parentheses(v, e)
	}
	return short(v, 4)
}

// short writes v with the given digits, 1.23e3 for 1.23e+03.
func short(v float64, digits int) string {
	text := strconv.FormatFloat(v, 'g', digits, 64)
	mantissa, power, found := strings.Cut(text, "e")
	if !found {
		return text
	}
	n, _ := strconv.Atoi(power)
	return mantissa + "e" + strconv.Itoa(n)
}

// parentheses writes v(e); numbers from 1e5 and below 1e-3 with an exponent.
func parentheses(v, e float64) string {
	scale, tail := exponent(math.Max(math.Abs(v), e))
	v, e = v/scale, e/scale
	d := 1 - order(e)
	digits := fixed(e, d)
	if small, ok := strings.CutPrefix(digits, "0."); ok {
		digits = strings.TrimLeft(small, "0")
	}
	return fmt.Sprintf("%s(%s)%s", fixed(v, d), digits, tail)
}

// asymmetric writes v+up-down.
func asymmetric(v, up, down float64) string {
	scale, tail := exponent(math.Max(math.Abs(v), math.Max(up, down)))
	d := 1 - order(math.Max(up, down)/scale)
	text := fmt.Sprintf("%s+%s-%s", fixed(v/scale, d), fixed(up/scale, d), fixed(down/scale, d))
	if tail != "" {
		return "(" + text + ")" + tail
	}
	return text
}

// exponent returns the power of ten to take out of a number of the given size.
func exponent(size float64) (scale float64, tail string) {
	if size == 0 || size >= 1e-3 && size < 1e5 {
		return 1, ""
	}
	n := order(size)
	return math.Pow10(n), "e" + strconv.Itoa(n)
}

// order is the power of ten of a positive number once it is rounded to two digits.
func order(x float64) int {
	_, power, _ := strings.Cut(strconv.FormatFloat(x, 'e', 1, 64), "e")
	n, _ := strconv.Atoi(power)
	return n
}

func fixed(v float64, decimals int) string { return strconv.FormatFloat(v, 'f', max(decimals, 0), 64) }
