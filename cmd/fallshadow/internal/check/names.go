package check

import "fallshadow/cmd/fallshadow/internal/report"

// brief cuts names to at most so many characters where that keeps them apart: to their ends,
// which count shots most often, else to their beginnings, else to both, else not at all.
func brief(names []string, most int) []string {
	whole := make([]string, len(names))
	for i, name := range names {
		whole[i] = report.Printable(name)
	}
	different := kinds(whole)
	for _, head := range []int{0, most - 1, most / 2} {
		short := make([]string, len(whole))
		for i, name := range whole {
			short[i] = cutMiddle(name, most, head)
		}
		if kinds(short) == different {
			return short
		}
	}
	return whole
}

// cutMiddle keeps the first head characters of a longer text and its end.
func cutMiddle(text string, most, head int) string {
	r := []rune(text)
	if len(r) <= most {
		return text
	}
	return string(r[:head]) + "~" + string(r[len(r)-(most-1-head):])
}

func kinds(list []string) int {
	seen := map[string]bool{}
	for _, s := range list {
		seen[s] = true
	}
	return len(seen)
}
