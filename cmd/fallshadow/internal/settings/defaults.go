package settings

import "strings"

// defaults returns the settings of a file that gives nothing; what must be given is zero.
func defaults() *Settings {
	s := &Settings{}
	doc := newDocument("defaults", []byte(defaultText()))
	newBinder(doc, s).bind(doc.read())
	for _, k := range keys {
		switch p := k.field(s).(type) {
		case *Quantity:
			p.Given = false
		case *Number:
			p.Given = false
		}
	}
	return s
}

// defaultText is the file that spells all defaults out.
func defaultText() string {
	var text strings.Builder
	for _, t := range tables {
		text.WriteString("[" + t.name + "]\n")
		for _, k := range keys {
			if k.table == t.name && k.def != "" {
				text.WriteString(k.name + " = " + k.def + "\n")
			}
		}
	}
	return text.String()
}
