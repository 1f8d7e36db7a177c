package watch

import (
	"fmt"
	"regexp"
	"slices"
	"strings"
	"unicode/utf8"

	"fallshadow/cmd/fallshadow/internal/settings"
)

const (
	// named is how many changed keys are written out.
	named = 4
	// longest is how many characters of a value are.
	longest = 32
)

// quantity is a value with its uncertainty as a settings file has it.
var quantity = regexp.MustCompile(`^\{ value = (.*), err = (.*) \}$`)

// changes says which keys of two settings differ, "" where none do: key old -> new.
func changes(old, new *settings.Settings) string {
	before, after := values(old), values(new)
	var keys, list []string
	for _, s := range [][][2]string{before, after} {
		for _, v := range s {
			if !slices.Contains(keys, v[0]) && valueOf(before, v[0]) != valueOf(after, v[0]) {
				keys = append(keys, v[0])
			}
		}
	}
	for _, key := range keys[:min(len(keys), named)] {
		list = append(list, fmt.Sprintf("%s %s -> %s", key, short(valueOf(before, key)), short(valueOf(after, key))))
	}
	if n := len(keys) - named; n > 0 {
		list = append(list, fmt.Sprintf("and %d more", n))
	}
	return strings.Join(list, ", ")
}

// values returns the full keys of settings, each with its value as a settings file has it.
func values(s *settings.Settings) (list [][2]string) {
	table := ""
	for line := range strings.Lines(s.Text()) {
		line = strings.TrimSpace(line)
		if name, ok := strings.CutPrefix(line, "["); ok {
			table = strings.TrimSuffix(name, "]") + "."
		} else if key, value, ok := strings.Cut(line, " = "); ok {
			list = append(list, [2]string{table + key, value})
		}
	}
	return list
}

func valueOf(list [][2]string, key string) string {
	if i := slices.IndexFunc(list, func(v [2]string) bool { return v[0] == key }); i >= 0 {
		return list[i][1]
	}
	return "none"
}

// short writes a value for a message.
func short(value string) string {
	value = quantity.ReplaceAllString(value, "$1 ± $2")
	if utf8.RuneCountInString(value) > longest {
		return string([]rune(value)[:longest-1]) + "…"
	}
	return value
}
