package ledger

import (
	"cmp"
	"encoding/json"
	"fmt"
)

// stored are the columns that hold a Row, in the order of columns and scanStored.
const stored = "shot, files, content, frames, settings, analysis, reference, provisional, reason, flags, meta, numbers, words, shifts"

// columns returns the row as the values of the stored columns.
func (r *Row) columns() ([]any, error) {
	text, err := encode(r.Files, r.Flags, r.Meta, r.Numbers, r.Words, r.Shifts)
	if err != nil {
		return nil, err
	}
	c := &r.Currency
	return []any{r.Shot, text[0], r.Content.blob(), c.Frames.blob(), c.Settings.blob(), c.Analysis,
		c.Reference.blob(), r.Provisional, r.Reason, text[1], text[2], text[3], text[4], text[5]}, nil
}

// storedRow is a row whose lists and cells are still text.
type storedRow struct {
	Row
	files, flags, meta, numbers, words, shifts string
}

// source is a row of a query.
type source interface{ Scan(...any) error }

// scanStored reads a row from the stored columns.
func scanStored(from source) (s storedRow, err error) {
	var content, frames, settings, reference []byte
	err = from.Scan(&s.Shot, &s.files, &content, &frames, &settings, &s.Currency.Analysis,
		&reference, &s.Provisional, &s.Reason, &s.flags, &s.meta, &s.numbers, &s.words, &s.shifts)
	s.Content = digestFrom(content)
	s.Currency.Frames, s.Currency.Settings, s.Currency.Reference = digestFrom(frames), digestFrom(settings), digestFrom(reference)
	return s, err
}

// scanRow reads and decodes one.
func scanRow(from source) (Row, error) {
	s, err := scanStored(from)
	if err != nil {
		return Row{}, err
	}
	return s.decode(dictionary{})
}

// decode reads the text.
func (s *storedRow) decode(d dictionary) (Row, error) {
	err := cmp.Or(
		decode(&s.Files, s.files, d, (*scanner).list), decode(&s.Flags, s.flags, d, (*scanner).list),
		decode(&s.Meta, s.meta, d, (*scanner).wordMap), decode(&s.Numbers, s.numbers, d, (*scanner).numberMap),
		decode(&s.Words, s.words, d, (*scanner).wordMap), decode(&s.Shifts, s.shifts, d, (*scanner).shiftMap))
	if err != nil {
		return Row{}, fmt.Errorf("row of %s is damaged: %w", s.Shot, err)
	}
	return s.Row, nil
}

// encode writes each value as JSON.
func encode(values ...any) ([]string, error) {
	text := make([]string, len(values))
	for i, v := range values {
		b, err := json.Marshal(v)
		if err != nil {
			return nil, err
		}
		text[i] = string(b)
	}
	return text, nil
}
