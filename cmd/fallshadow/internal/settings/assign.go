package settings

import (
	"cmp"
	"math"
	"slices"
	"strconv"
	"strings"
	"unicode"
)

// assign checks a value and puts it where the key says; what is wrong is reported.
func (b *binder) assign(k *key, v value) {
	switch p := k.field(b.s).(type) {
	case *Quantity:
		b.quantity(k, v, p)
	case *Number:
		if x, ok := b.number(k, k.name, v); ok {
			*p = Number{Value: x, Given: true}
		}
	case *float64:
		if x, ok := b.number(k, k.name, v); ok {
			*p = x
		}
	case *int:
		if x, ok := b.number(k, k.name, v); ok {
			*p = int(x)
		}
	case *string:
		if t, ok := b.text(k, v); ok {
			*p = t
		}
	case *[]string:
		b.texts(k, v, p)
	case *[][2]int:
		b.pixels(k, v, p)
	}
}

// number reads a number within the key's range; name stands for it in messages.
func (b *binder) number(k *key, name string, v value) (float64, bool) {
	x, ok := v.number()
	switch {
	case !ok || k.whole() && v.kind != kindInteger:
		expected := k.expected()
		if name != k.name {
			expected = "a whole number" // a part of the value
		}
		b.wrong(v.offset, "%s: expected %s, found %s%s", name, expected, v.found(), k.otherwise(v))
	case math.IsNaN(x) || math.IsInf(x, 0):
		b.wrong(v.offset, "%s = %s: expected a finite number, %s", name, v.text, k.within())
	case x < k.low || x > k.high:
		b.wrong(v.offset, "%s = %s is out of range: expected %s%s", name, v.text, k.within(), k.slip(x))
	default:
		return x, true
	}
	return 0, false
}

// quantity reads a number, or a table of a number and its uncertainty.
func (b *binder) quantity(k *key, v value, q *Quantity) {
	if v.kind != kindTable {
		if x, ok := b.number(k, k.name, v); ok {
			*q = Quantity{Value: x, Given: true}
		}
		return
	}
	var seen []string
	before := len(b.problems)
	got := Quantity{Given: true}
	for _, e := range v.entries {
		part := strings.Join(e.path, ".")
		switch {
		case slices.Contains(seen, part):
			b.wrong(e.offset, "%s: %s is given twice", k.name, part)
		case part == "value":
			got.Value, _ = b.number(k, k.name, *e.value)
		case part == "err":
			got.Err, got.Known = b.uncertainty(k, *e.value)
		default:
			b.wrong(e.offset, "%s: unknown key %s: a calibrated setting is { value = ..., err = ... }", k.name, part)
		}
		seen = append(seen, part)
	}
	switch {
	case len(b.problems) > before:
	case !slices.Contains(seen, "value"):
		b.wrong(v.offset, "%s has no value: write { value = ..., err = ... }", k.name)
	case k.most == 0 && got.Value > 0 && got.Err >= got.Value:
		b.wrong(v.offset, "%s: err = %s is as large as the value %s itself: err is one standard deviation, in the unit of the value", k.name, short(got.Err), short(got.Value))
	}
	*q = got
}

func (b *binder) uncertainty(k *key, v value) (float64, bool) {
	x, ok := v.number()
	if !ok || !(x >= 0) || math.IsInf(x, 0) {
		b.wrong(v.offset, "%s: err: expected one standard deviation, 0 or more, in the unit of the value, found %s", k.name, v.found())
		return 0, false
	}
	if k.most > 0 && x > k.most {
		b.wrong(v.offset, "%s: err = %s is out of range: it is one standard deviation, in the unit of the value, and expected to be %s at most", k.name, v.text, short(k.most))
		return 0, false
	}
	return x, true
}

// text reads one of the key's words, or any printable text.
func (b *binder) text(k *key, v value) (string, bool) {
	unprintable := func(r rune) bool { return !unicode.IsPrint(r) }
	bare := v.text
	if k.ends {
		bare = strings.TrimLeft(bare, " ")
	}
	switch {
	case v.kind != kindText:
		b.wrong(v.offset, "%s: expected %s, found %s", k.name, k.expected(), v.found())
	case k.words != nil && !slices.Contains(k.words, v.text):
		near := nearest(v.text, k.words)
		if near != "" {
			near = "; nearest: " + strconv.Quote(near)
		}
		b.wrong(v.offset, "%s = %s: expected %s%s", k.name, strconv.Quote(clip(v.text)), orList(k.words), near)
	case strings.IndexFunc(v.text, unprintable) >= 0 || strings.TrimSpace(v.text) != bare:
		b.wrong(v.offset, "%s = %s: expected text on one line, with no space at its ends", k.name, strconv.Quote(clip(v.text)))
	default:
		return v.text, true
	}
	return "", false
}

// texts reads a list of different texts, none of them empty.
func (b *binder) texts(k *key, v value, p *[]string) {
	if v.kind != kindList {
		b.wrong(v.offset, "%s: expected %s, found %s", k.name, k.expected(), v.found())
		return
	}
	out := []string{}
	for _, item := range v.items {
		t, ok := b.text(k, item)
		switch {
		case !ok:
			continue
		case strings.TrimSpace(t) == "":
			b.wrong(item.offset, "%s: expected %s, found an empty text", k.name, k.expected())
		case slices.Contains(out, t):
			b.wrong(item.offset, "%s: %s stands twice", k.name, strconv.Quote(t))
		}
		out = append(out, t)
	}
	*p = out
}

// pixels reads a list of [x, y]; the order they are written in has no meaning.
func (b *binder) pixels(k *key, v value, p *[][2]int) {
	if v.kind != kindList {
		b.wrong(v.offset, "%s: expected %s, found %s", k.name, k.expected(), v.found())
		return
	}
	out := [][2]int{}
	for i, item := range v.items {
		name := k.name + " " + strconv.Itoa(i+1)
		if item.kind != kindList || len(item.items) != 2 {
			b.wrong(item.offset, "%s: expected [x, y], found %s", name, item.found())
			continue
		}
		x, okX := b.number(k, name+" x", item.items[0])
		y, okY := b.number(k, name+" y", item.items[1])
		if okX && okY {
			out = append(out, [2]int{int(x), int(y)})
		}
	}
	slices.SortFunc(out, func(a, c [2]int) int { return cmp.Or(cmp.Compare(a[1], c[1]), cmp.Compare(a[0], c[0])) })
	*p = slices.Compact(out)
}

// number returns the value as a number, not yet checked to be finite.
func (v value) number() (float64, bool) {
	if v.kind != kindInteger && v.kind != kindFloat {
		return 0, false
	}
	if n, err := strconv.ParseInt(v.text, 0, 64); err == nil {
		return float64(n), true
	}
	x, err := strconv.ParseFloat(strings.ReplaceAll(v.text, "_", ""), 64)
	return x, err == nil || math.IsInf(x, 0)
}

// found describes the value for a message.
func (v value) found() string {
	switch v.kind {
	case kindText:
		return "the text " + strconv.Quote(clip(v.text))
	case kindList:
		return "a list of " + strconv.Itoa(len(v.items))
	case kindTable:
		return "a table in braces"
	}
	return clip(v.text)
}

func clip(s string) string {
	if r := []rune(s); len(r) > 40 {
		return string(r[:40]) + "..."
	}
	return s
}

// otherwise says what to write for a number in quotes or in braces.
func (k *key) otherwise(v value) string {
	if v.kind == kindTable {
		return "; it takes no uncertainty"
	}
	first, _, _ := strings.Cut(strings.TrimSpace(v.text), " ")
	if _, err := strconv.ParseFloat(first, 64); err != nil || v.kind != kindText {
		return ""
	}
	return "; write a bare number, in the unit of the key's name"
}

// within says the range of a number.
func (k *key) within() string {
	s := k.domain()
	if k.unit != "" {
		s += " (" + k.unit + ")"
	}
	return s
}

// slip names the unit in which a number out of range would make sense.
func (k *key) slip(x float64) string {
	_, own := splitUnit(k.name)
	for _, u := range units {
		y, ok := convert(x, u, own)
		if ok && u.name != own.name && y >= k.low && y <= k.high {
			return "; if this is in " + u.name + ", write " + k.name + " = " + short(y)
		}
	}
	return ""
}
