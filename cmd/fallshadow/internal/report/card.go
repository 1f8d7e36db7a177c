package report

import (
	"math"
	"strconv"
	"strings"

	"fallshadow/cmd/fallshadow/internal/ledger"
)

// Card is a number for people: the value with the digits that its error leaves, and both
// errors on the same scale.
type Card struct {
	Name  string `json:"name"`
	Label string `json:"label"`
	Unit  string `json:"unit,omitempty"` // with the power of ten
	Value string `json:"value"`
	Err   string `json:"err,omitempty"`
	Cal   string `json:"cal,omitempty"`
}

var cardOrder = []struct{ name, label, unit string }{
	{"atoms", "N", ""},
	{"fraction", "N₀/N", ""},
	{"T_nK", "T", "nK"},
	{"mu_nK", "μ", "nK"},
	{"condensate", "N₀", ""},
	{"t_reduced", "T/Tc", ""},
}

// Cards are the numbers of a shot that people look at first.
func Cards(r *ledger.Row) (list []Card) {
	for _, c := range cardOrder {
		if k := newCard(r, c.name); k.Value != "" {
			k.Name, k.Label, k.Unit = c.name, c.label, strings.TrimSpace(k.Unit+" "+c.unit)
			list = append(list, k)
		}
	}
	return list
}

func newCard(r *ledger.Row, name string) Card {
	v, e, cal := r.Number(name), r.Number(name+"_err"), r.Number(name+"_cal")
	low, high := r.Number(name+"_low"), r.Number(name+"_high")
	switch {
	case math.IsNaN(low) && !math.IsNaN(high):
		return Card{Value: "< " + Plain(high, 2)}
	case math.IsNaN(high) && !math.IsNaN(low):
		return Card{Value: "> " + Plain(low, 2)}
	case math.IsNaN(v):
		return Card{}
	case high >= v && v >= low && high > low:
		k, scale, decimals := scaled(v, math.Max(high-v, v-low))
		k.Err = "+" + spaced((high-v)/scale, decimals) + " −" + spaced((v-low)/scale, decimals)
		return k.withCal(cal, scale, decimals)
	}
	k, scale, decimals := scaled(v, e)
	if e > 0 {
		k.Err = "± " + spaced(e/scale, decimals)
	}
	return k.withCal(cal, scale, decimals)
}

func (k Card) withCal(cal, scale float64, decimals int) Card {
	if cal > 0 {
		k.Cal = "± " + spaced(cal/scale, decimals)
	}
	return k
}

// scaled writes a value with the digits that its error leaves, numbers of a million and more or
// below a thousandth with their power of ten in the unit.
func scaled(v, e float64) (k Card, scale float64, decimals int) {
	scale = 1
	size := math.Max(math.Abs(v), orZero(e))
	if size >= 1e6 || size > 0 && size < 1e-3 {
		n := int(math.Floor(math.Log10(size)))
		scale = math.Pow10(n)
		k.Unit = "×10" + superscript(n)
	}
	decimals = 3 - int(math.Floor(math.Log10(math.Max(size/scale, 1e-12)))) - 1
	if e > 0 && e-e == 0 {
		decimals = digitsOf(e / scale)
	}
	decimals = min(decimals, 6)
	k.Value = spaced(v/scale, decimals)
	return k, scale, decimals
}

// digitsOf is how many decimals an error leaves: two digits of it where they are at most
// 35, else one (the rounding of the Particle Data Group's tables; common practice).
func digitsOf(e float64) int {
	n := int(math.Floor(math.Log10(e)))
	if e/math.Pow10(n) < 3.55 {
		return 1 - n
	}
	return -n
}

func orZero(x float64) float64 {
	if x-x != 0 {
		return 0
	}
	return x
}

// spaced writes a number with so many decimals, rounded to tens and more where they are
// negative, with thin spaces between thousands and a true minus.
func spaced(v float64, decimals int) string {
	if decimals < 0 {
		step := math.Pow10(-decimals)
		v = math.Round(v/step) * step
	}
	text := strconv.FormatFloat(math.Abs(v), 'f', max(decimals, 0), 64)
	whole, rest, found := strings.Cut(text, ".")
	for i := len(whole) - 3; i > 0 && len(whole) > 4; i -= 3 {
		whole = whole[:i] + "\u2009" + whole[i:]
	}
	if found {
		whole += "." + rest
	}
	if v < 0 && strings.ContainsAny(text, "123456789") {
		return "−" + whole
	}
	return whole
}

// Plain writes a number for people with so many digits.
func Plain(v float64, digits int) string {
	size := math.Abs(v)
	if size == 0 {
		return "0"
	}
	n := int(math.Floor(math.Log10(size)))
	if n >= 6 || n < -3 {
		return strconv.FormatFloat(v/math.Pow10(n), 'g', digits, 64) + "×10" + superscript(n)
	}
	if n >= digits {
		return spaced(v, digits-1-n)
	}
	return strconv.FormatFloat(v, 'g', digits, 64)
}

func superscript(n int) string {
	return strings.NewReplacer("-", "⁻", "0", "⁰", "1", "¹", "2", "²", "3", "³", "4", "⁴", "5", "⁵", "6", "⁶", "7", "⁷", "8", "⁸", "9", "⁹").Replace(strconv.Itoa(n))
}
