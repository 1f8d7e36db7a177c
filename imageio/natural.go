package imageio

import (
	"cmp"
	"strings"
)

// Natural compares two names as a person sorts them: runs of digits by the number that
// they write, so that shot_9 comes before shot_10, all else byte by byte. Names that
// differ only in leading zeros are ordered by their bytes; the order is total.
func Natural(a, b string) int {
	for x, y := a, b; ; {
		if x == "" || y == "" {
			return cmp.Or(cmp.Compare(len(x), len(y)), cmp.Compare(a, b))
		}
		if !digit(x[0]) || !digit(y[0]) {
			if x[0] != y[0] {
				return cmp.Compare(x[0], y[0])
			}
			x, y = x[1:], y[1:]
			continue
		}
		var m, n string
		m, x = leadingDigits(x)
		n, y = leadingDigits(y)
		m, n = strings.TrimLeft(m, "0"), strings.TrimLeft(n, "0")
		if c := cmp.Or(cmp.Compare(len(m), len(n)), cmp.Compare(m, n)); c != 0 {
			return c
		}
	}
}

func digit(c byte) bool { return c >= '0' && c <= '9' }

func leadingDigits(s string) (digits, rest string) {
	i := 0
	for i < len(s) && digit(s[i]) {
		i++
	}
	return s[:i], s[i:]
}
