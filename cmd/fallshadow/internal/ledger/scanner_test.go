package ledger

import (
	"context"
	"encoding/json"
	"fmt"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// texts are what encode writes, what only the general decoder reads, and what is broken.
var texts = []string{
	`null`, `[]`, `["a.fits"]`, `["a","b","c"]`, `["\u00b5\n"]`, `["µ"]`, `["a",]`, `["a"`, `["a"]x`, `[,"a"]`, "[\"\x00\"]", "[\"\xff\"]",
	`{}`, `{"a":1.5}`, `{"a":-1e-300,"b":123456789012345680,"c":5e-324}`, `{"a":1e999}`, `{"a":1,"a":2}`, ` { "a" : 1 } `, `{"a":null}`, `{"a":-}`, `{"a":}`,
	`{"a":"b"}`, `{"a":"b","c":""}`, `{"q\"":"<"}`, `{"a":"b"`, `{"a":"b",}`, `{,"a":"b"}`, `{"a" "b"}`, `{a:"b"}`,
	`{"alpha":{"known":true,"change":{"N":1e3,"T":-1e-9}},"trap":{"known":false,"change":{}}}`,
	`{"alpha":{"known":true,"change":null}}`, `{"alpha":{"change":{"N":1},"known":true}}`, `{"alpha":{"known":yes,"change":{}}}`, `{"alpha":{"known":true,"change":{"N":1}`,
	``, `"`, `[`, `{`, `[["a"]]`, `{"a":{}}`, `{"a":[]}`, `true`, `1`,
}

// agree holds a scanner against the general decoder.
func agree[V any](t *testing.T, text string, read func(*scanner) V) {
	t.Helper()
	if !json.Valid([]byte(text)) {
		return
	}
	var want, got V
	wanted := json.Unmarshal([]byte(text), &want)
	err := decode(&got, text, dictionary{}, read)
	if (err == nil) != (wanted == nil) {
		t.Errorf("%q: error %v, want %v", text, err, wanted)
	}
	if diff := cmp.Diff(want, got); err == nil && diff != "" {
		t.Errorf("%q: %s", text, diff)
	}
}

func agreeAll(t *testing.T, text string) {
	agree(t, text, (*scanner).list)
	agree(t, text, (*scanner).wordMap)
	agree(t, text, (*scanner).numberMap)
	agree(t, text, (*scanner).shiftMap)
}

func TestScannerReadsWhatJSONDoes(t *testing.T) {
	for _, text := range texts {
		agreeAll(t, text)
		if !json.Valid([]byte(text)) {
			var into map[string]Shift
			if err := decode(&into, text, dictionary{}, (*scanner).shiftMap); err == nil {
				t.Errorf("%q is read", text)
			}
		}
	}
}

func FuzzScanner(f *testing.F) {
	for _, text := range texts {
		f.Add(text)
	}
	f.Fuzz(agreeAll)
}

// TestScannerTakesUsualRows: rows as they are written do not need the general decoder.
func TestScannerTakesUsualRows(t *testing.T) {
	r := row("shot", 1)
	text, err := encode(r.Files, r.Flags, r.Numbers, r.Words, r.Shifts)
	if err != nil {
		t.Fatal(err)
	}
	for i, read := range []func(*scanner){
		func(s *scanner) { s.list() }, func(s *scanner) { s.list() }, func(s *scanner) { s.numberMap() },
		func(s *scanner) { s.wordMap() }, func(s *scanner) { s.shiftMap() },
	} {
		s := &scanner{text: text[i], names: dictionary{}}
		if read(s); s.odd || s.text != "" {
			t.Errorf("stops in %s before %q", text[i], s.text)
		}
	}
}

// TestRowsOfManyBatches come in order, and a damaged one among them is named.
func TestRowsOfManyBatches(t *testing.T) {
	l := open0(t, t.TempDir())
	var want []string
	for i := range 2*batch + 7 {
		r := row(fmt.Sprintf("shot_%d", i), 0)
		r.Content = Digest{byte(i), byte(i >> 8), 1}
		put(t, l, r)
		want = append(want, r.Shot)
	}
	if got := names(read(t, l.Reader)); !slices.Equal(got, want) {
		t.Errorf("rows %v", got)
	}
	damaged := want[batch+3]
	if _, err := l.write.Exec(`UPDATE row SET numbers = '{"T_nK":' WHERE shot = ?`, damaged); err != nil {
		t.Fatal(err)
	}
	if _, err := l.Rows(context.Background()); err == nil || !strings.Contains(err.Error(), damaged+" is damaged") {
		t.Errorf("a damaged row gives %v", err)
	}
}
