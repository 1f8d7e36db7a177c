package settings

import (
	"cmp"
	"fmt"
	"strings"
)

const preface = `# Laboratory settings of a night of shots, read by fallshadow. Keep them in the night's
# folder as ` + FileName + `. The values are an example: replace them by your own.
#
# The unit of a number is in the name of its key. A calibrated setting may carry its
# uncertainty, one standard deviation in the same unit:
#     axis1_hz = { value = 20.0, err = 0.1 }
# err = 0 means exact. Without err the uncertainty is unknown, and the columns ending in
# _cal that need it stay empty; where a key says so it is then taken as exact.
# A key behind a # is not set: remove the # to set it.
`

// Template returns a settings file with every key in it, explained, that works as it is.
func Template() []byte {
	var out strings.Builder
	out.WriteString(preface)
	for _, t := range tables {
		out.WriteString("\n" + wrap(t.doc) + "[" + t.name + "]\n")
		for i := range keys {
			if k := &keys[i]; k.table == t.name {
				out.WriteString(wrap(k.doc+" "+k.brief()) + k.templateLine())
			}
		}
	}
	return []byte(out.String())
}

func (k *key) templateLine() string {
	if k.shown {
		return k.name + " = " + cmp.Or(k.sample, k.def) + "\n"
	}
	return "#" + k.name + " = " + cmp.Or(k.def, k.sample) + "\n"
}

// brief says unit, range and default in brackets.
func (k *key) brief() string {
	var parts []string
	for _, p := range []string{k.unit, k.domain(), k.whenLeftOut(), k.whenUnstated()} {
		if p != "" {
			parts = append(parts, p)
		}
	}
	return "(" + strings.Join(parts, "; ") + ")"
}

func (k *key) whenLeftOut() string {
	switch {
	case k.required:
		return "must be given"
	case k.def != "":
		return "default " + k.def
	}
	return "may be left out"
}

func (k *key) whenUnstated() string {
	if !k.calibrated() {
		return ""
	}
	err := "may carry err"
	if k.most > 0 {
		err += " up to " + short(k.most)
	}
	switch k.unstated {
	case exact:
		err += ", exact without"
	case exactAtZero:
		err += ", exact without while it is 0"
	}
	return err
}

// wrap makes a comment of a text, in lines of at most 88 characters.
func wrap(text string) string {
	var out, line strings.Builder
	line.WriteString("#")
	for _, word := range strings.Fields(text) {
		if line.Len()+1+len(word) > 88 {
			out.WriteString(line.String() + "\n")
			line.Reset()
			line.WriteString("#")
		}
		line.WriteString(" " + word)
	}
	return out.String() + line.String() + "\n"
}

// Markdown returns all keys as a table, for the README and for readers on a screen.
func Markdown() []byte {
	var out strings.Builder
	out.WriteString("| key | unit | may be | default | err | meaning |\n|---|---|---|---|---|---|\n")
	for i := range keys {
		k := &keys[i]
		err := strings.TrimLeft(strings.TrimPrefix(k.whenUnstated(), "may carry err"), ", ")
		if k.calibrated() {
			err = cmp.Or(err, "yes")
		}
		def := cmp.Or(k.def, "none")
		if k.required {
			def = "must be given"
		}
		fmt.Fprintf(&out, "| `%s` | %s | %s | %s | %s | %s |\n", k.full(), k.unit, k.domain(), strings.ReplaceAll(def, "|", `\|`), err, strings.ReplaceAll(k.doc, "|", `\|`))
	}
	return []byte(out.String())
}
