package settings

import (
	"crypto/sha256"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// Text returns the effective settings as a settings file, defaults and the species' own
// numbers spelled out, in the order of the table of keys.
func (s *Settings) Text() string {
	var out strings.Builder
	for _, t := range tables {
		header := "[" + t.name + "]\n"
		for i := range keys {
			if v := keys[i].written(s); keys[i].table == t.name && v != "" {
				out.WriteString(header + keys[i].name + " = " + v + "\n")
				header = ""
			}
		}
	}
	return out.String()
}

// Digest is the SHA-256 of what Text says of the keys that change the numbers of a given
// shot: of everything but names, files and what else is carried along. Two files that
// mean the same have the same digest, however they are written.
func (s *Settings) Digest() [32]byte {
	return sha256.Sum256([]byte(s.digested()))
}

func (s *Settings) digested() string {
	var out strings.Builder
	for i := range keys {
		if v := keys[i].written(s); !keys[i].silent && v != "" {
			fmt.Fprintf(&out, "%s = %s\n", keys[i].full(), v)
		}
	}
	return out.String()
}

// written returns the value that a setting has, in TOML, empty where it has none.
func (k *key) written(s *Settings) string {
	switch p := k.field(s).(type) {
	case *Quantity:
		return k.writtenQuantity(*p)
	case *Number:
		if p.Given || p.Value != 0 {
			return decimal(p.Value)
		}
	case *float64:
		return decimal(*p)
	case *int:
		if k.table != "region" || !s.Region.Auto() {
			return strconv.Itoa(*p)
		}
	case *string:
		if *p != "" {
			return tomlText(*p)
		}
	case *[]string:
		if len(*p) == 0 {
			return ""
		}
		quoted := make([]string, len(*p))
		for i, t := range *p {
			quoted[i] = tomlText(t)
		}
		return "[" + strings.Join(quoted, ", ") + "]"
	case *[][2]int:
		if len(*p) == 0 {
			return ""
		}
		pairs := make([]string, len(*p))
		for i, xy := range *p {
			pairs[i] = fmt.Sprintf("[%d, %d]", xy[0], xy[1])
		}
		return "[" + strings.Join(pairs, ", ") + "]"
	}
	return ""
}

func (k *key) writtenQuantity(q Quantity) string {
	switch {
	case !q.Given && q.Value == 0 && k.def == "":
		return ""
	case q.Known:
		return "{ value = " + decimal(q.Value) + ", err = " + decimal(q.Err) + " }"
	}
	return decimal(q.Value)
}

// decimal writes a number as TOML reads it, with the digits that give it back.
func decimal(x float64) string {
	if x == 0 {
		return "0.0" // minus zero too
	}
	s := strconv.FormatFloat(x, 'g', -1, 64)
	if x == math.Trunc(x) && !strings.ContainsAny(s, ".e") {
		s += ".0"
	}
	return s
}

var escapes = strings.NewReplacer(`\`, `\\`, `"`, `\"`)

// tomlText writes printable text as a TOML string.
func tomlText(t string) string { return `"` + escapes.Replace(t) + `"` }
