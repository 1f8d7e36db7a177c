package ledger

import (
	"encoding/json"
	"strconv"
	"strings"
	"unicode/utf8"
)

// scanner reads JSON of the few forms that encode writes for most rows: no space, no
// escapes, ASCII. Whatever else it meets makes it stop with odd set.
//
// A night of thousands of shots has millions of cells, nearly all under the same few
// names; the general decoder of the standard library takes six times as long and makes a
// copy of each name.
type scanner struct {
	text  string
	names dictionary
	odd   bool
}

// dictionary holds one copy of each word.
type dictionary map[string]string

func (d dictionary) copyOf(word string) string {
	if known, ok := d[word]; ok {
		return known
	}
	word = strings.Clone(word) // else it would keep the whole text
	d[word] = word
	return word
}

// decode reads text with a scanner, or with encoding/json where the scanner stops; of valid
// JSON both make the same.
func decode[V any](into *V, text string, d dictionary, read func(*scanner) V) error {
	s := &scanner{text: text, names: d}
	if v := read(s); !s.odd && s.text == "" {
		*into = v
		return nil
	}
	return json.Unmarshal([]byte(text), into)
}

// skip goes past the token if it comes next.
func (s *scanner) skip(token string) bool {
	if !strings.HasPrefix(s.text, token) {
		return false
	}
	s.text = s.text[len(token):]
	return true
}

// want goes past the token, which must come next.
func (s *scanner) want(token string) {
	if !s.skip(token) {
		s.odd = true
	}
}

// word reads a string.
func (s *scanner) word() string {
	s.want(`"`)
	for i := range len(s.text) {
		switch c := s.text[i]; {
		case c == '"':
			word := s.names.copyOf(s.text[:i])
			s.text = s.text[i+1:]
			return word
		case c < ' ' || c == '\\' || c >= utf8.RuneSelf:
			s.odd = true
			return ""
		}
	}
	s.odd = true
	return ""
}

// number reads a number.
func (s *scanner) number() float64 {
	end := 0
	for end < len(s.text) && strings.IndexByte("0123456789+-.eE", s.text[end]) >= 0 {
		end++
	}
	v, err := strconv.ParseFloat(s.text[:end], 64)
	s.odd = s.odd || err != nil
	s.text = s.text[end:]
	return v
}

// truth reads true or false.
func (s *scanner) truth() bool {
	if s.skip("true") {
		return true
	}
	s.want("false")
	return false
}

func (s *scanner) wordMap() map[string]string    { return object(s, s.word) }
func (s *scanner) numberMap() map[string]float64 { return object(s, s.number) }
func (s *scanner) shiftMap() map[string]Shift    { return object(s, s.shift) }

// shift reads a Shift.
func (s *scanner) shift() (v Shift) {
	s.want(`{"known":`)
	v.Known = s.truth()
	s.want(`,"change":`)
	v.Change = object(s, s.number)
	s.want("}")
	return v
}

// list reads a list of strings.
func (s *scanner) list() []string {
	list := []string{}
	s.want("[")
	for !s.odd && !s.skip("]") {
		if len(list) > 0 {
			s.want(",")
		}
		list = append(list, s.word())
	}
	return list
}

// object reads an object whose values are of one kind.
func object[V any](s *scanner, value func() V) map[string]V {
	m := make(map[string]V, strings.Count(s.text[:max(0, strings.IndexByte(s.text, '}'))], ":"))
	s.want("{")
	for !s.odd && !s.skip("}") {
		if len(m) > 0 {
			s.want(",")
		}
		name := s.word()
		s.want(":")
		m[name] = value()
	}
	return m
}
