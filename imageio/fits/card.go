package fits

import (
	"strings"
	"unicode/utf8"
)

// Card is one keyword of a header. Value is the text as written; a quoted string comes
// without its quotes, doubled quotes halved and trailing blanks cut, and has Text set.
// A HIERARCH keyword is known by the words behind HIERARCH. Commentary (COMMENT,
// HISTORY, blank) has its text in Comment and no Value.
type Card struct {
	Key, Value, Comment string
	Text                bool
}

const (
	cardSize  = 80
	blockSize = 2880
)

// parseCard reads one record of 80 bytes. It never fails: what breaks the standard is
// kept as text, and the few keywords that decide the layout are judged where they are used.
func parseCard(record []byte) Card {
	line := clean(record)
	if rest, ok := strings.CutPrefix(line, "HIERARCH "); ok {
		if key, value, ok := strings.Cut(rest, "="); ok {
			return valued(strings.TrimSpace(key), value)
		}
	}
	if len(line) < 9 {
		return Card{Key: strings.TrimSpace(line)}
	}
	key := strings.TrimSpace(line[:8])
	if line[8] != '=' || key == "COMMENT" || key == "HISTORY" || key == "CONTINUE" || key == "" {
		return Card{Key: key, Comment: strings.TrimRight(line[8:], " ")}
	}
	return valued(key, line[9:])
}

// valued splits the part of a card behind the equals sign into value and comment.
func valued(key, s string) Card {
	s = strings.TrimLeft(s, " ")
	if strings.HasPrefix(s, "'") {
		text, rest := quoted(s)
		_, comment, _ := strings.Cut(rest, "/")
		return Card{Key: key, Value: text, Comment: strings.TrimSpace(comment), Text: true}
	}
	value, comment, _ := strings.Cut(s, "/")
	return Card{Key: key, Value: strings.TrimSpace(value), Comment: strings.TrimSpace(comment)}
}

// quoted reads a string that starts with a quote and returns what stands behind it. A
// string without its closing quote ends with the card.
func quoted(s string) (text, rest string) {
	var b strings.Builder
	for i := 1; i < len(s); i++ {
		if s[i] == '\'' {
			if i+1 >= len(s) || s[i+1] != '\'' {
				return strings.TrimRight(b.String(), " "), s[i+1:]
			}
			i++
		}
		b.WriteByte(s[i])
	}
	return strings.TrimRight(b.String(), " "), ""
}

// clean makes a record printable: control bytes become blanks, and bytes that are no
// UTF-8 are taken as Latin-1, in which cameras write µ and °.
func clean(record []byte) string {
	plain := true
	for _, c := range record {
		plain = plain && c >= ' ' && c < 0x7f
	}
	if plain {
		return string(record)
	}
	latin := !utf8.Valid(record)
	var b strings.Builder
	for i := 0; i < len(record); i++ {
		switch c := record[i]; {
		case c < ' ' || c == 0x7f:
			b.WriteByte(' ')
		case latin:
			b.WriteRune(rune(c))
		default:
			b.WriteByte(c)
		}
	}
	return b.String()
}

// continued joins a CONTINUE card to a string that ends in an ampersand and reports
// whether it was one (FITS standard 4.0, section 4.2.1.2).
func continued(last *Card, c Card) bool {
	if c.Key != "CONTINUE" || !last.Text || !strings.HasSuffix(last.Value, "&") {
		return false
	}
	more := valued("", c.Comment)
	if !more.Text {
		return false
	}
	last.Value = strings.TrimSuffix(last.Value, "&") + more.Value
	last.Comment += more.Comment
	return true
}
