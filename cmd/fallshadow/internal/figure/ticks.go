package figure

import (
	"math"
	"strconv"
	"strings"
)

// tick is a mark on an axis; one without a label is a small one.
type tick struct {
	at    float64
	label Label
}

// ticks returns the marks of an axis and the power of ten that was taken out of their
// labels.
func (a *Axis) ticks() (list []tick, power int) {
	if a.Log {
		return logTicks(a.Min, a.Max), 0
	}
	return linearTicks(a.Min, a.Max)
}

// linearTicks puts four to eight labelled marks on round numbers, with small ones between.
func linearTicks(low, high float64) ([]tick, int) {
	step, parts := roundStep((high - low) / 5)
	power := 0
	if size := math.Max(math.Abs(low), math.Abs(high)); size >= 1e5 || size < 1e-2 {
		power = int(math.Floor(math.Log10(size) + 1e-9))
	}
	unit := math.Pow10(power)
	decimals := max(0, -int(math.Floor(math.Log10(step/unit)+1e-9)))
	var list []tick
	small := step / float64(parts)
	for k := math.Ceil(low/small - 1e-6); k*small <= high+1e-6*small; k++ {
		t := tick{at: k * small}
		if math.Mod(k, float64(parts)) == 0 {
			t.label = Plain(minus(strconv.FormatFloat(t.at/unit, 'f', decimals, 64)))
		}
		list = append(list, t)
	}
	return list, power
}

// roundStep returns 1, 2 or 5 times a power of ten near x, and into how many parts small
// marks divide it.
func roundStep(x float64) (step float64, parts int) {
	unit := math.Pow10(int(math.Floor(math.Log10(x))))
	switch m := x / unit; {
	case m < 1.5:
		return unit, 5
	case m < 3.5:
		return 2 * unit, 4
	case m < 7.5:
		return 5 * unit, 5
	}
	return 10 * unit, 5
}

// logTicks labels powers of ten, and more the fewer of them there are.
func logTicks(low, high float64) []tick {
	decades := math.Log10(high / low)
	labelled := map[float64]bool{1: true}
	for _, more := range []struct {
		below  float64
		digits []float64
	}{{2.2, []float64{2, 5}}, {1, []float64{3, 7}}, {0.5, []float64{4, 6, 8, 9}}} {
		for _, m := range more.digits {
			labelled[m] = labelled[m] || decades < more.below
		}
	}
	var list []tick
	for p := math.Floor(math.Log10(low)); p <= math.Log10(high); p++ {
		for m := 1.0; m < 10; m++ {
			t := tick{at: m * math.Pow(10, p)}
			if t.at < low*(1-1e-9) || t.at > high*(1+1e-9) {
				continue
			}
			if labelled[m] {
				t.label = scientific(m, int(p))
			}
			list = append(list, t)
		}
	}
	return list
}

// scientific writes m 10^p, small numbers in full.
func scientific(m float64, p int) Label {
	digit := strconv.Itoa(int(m))
	switch {
	case p >= -2 && p < 4:
		return Plain(strconv.FormatFloat(m*math.Pow10(p), 'f', max(0, -p), 64))
	case m == 1:
		return powerOfTen(p)
	}
	return Plain(digit + "×").And(powerOfTen(p))
}

func powerOfTen(p int) Label {
	return Label{{text: "10"}, {text: minus(strconv.Itoa(p)), level: 1}}
}

// minus sets a true minus sign, and none before a zero.
func minus(number string) string {
	if number[0] == '-' {
		if strings.Trim(number, "-0.") == "" {
			return number[1:]
		}
		return "\u2212" + number[1:]
	}
	return number
}
