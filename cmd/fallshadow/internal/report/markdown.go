package report

import (
	"bytes"
	"fmt"
)

// Markdown documents the table: its columns, then its flags.
func Markdown() []byte {
	var b bytes.Buffer
	b.WriteString("| column | unit | meaning |\n|---|---|---|\n")
	for _, c := range Columns {
		fmt.Fprintf(&b, "| `%s` | %s | %s |\n", c.Name, c.Unit, c.Meaning)
	}
	b.WriteString("\n| flag | meaning |\n|---|---|\n")
	for _, f := range AllFlags() {
		fmt.Fprintf(&b, "| `%s` | %s |\n", f.Name, f.Sentence)
	}
	return b.Bytes()
}
