package ledger

import (
	"encoding/json"
	"fmt"
)

// stored are the columns that hold a Row, in the order of columns and scanRow.
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

// scanRow reads a row from the stored columns.
func scanRow(from interface{ Scan(...any) error }) (Row, error) {
	var r Row
	var files, flags, meta, numbers, words, shifts string
	var content, frames, settings, reference []byte
	err := from.Scan(&r.Shot, &files, &content, &frames, &settings, &r.Currency.Analysis,
		&reference, &r.Provisional, &r.Reason, &flags, &meta, &numbers, &words, &shifts)
	if err != nil {
		return Row{}, err
	}
	r.Content = digestFrom(content)
	r.Currency.Frames, r.Currency.Settings, r.Currency.Reference = digestFrom(frames), digestFrom(settings), digestFrom(reference)
	for _, v := range []struct {
		text string
		into any
	}{{files, &r.Files}, {flags, &r.Flags}, {meta, &r.Meta}, {numbers, &r.Numbers}, {words, &r.Words}, {shifts, &r.Shifts}} {
		if err := json.Unmarshal([]byte(v.text), v.into); err != nil {
			return Row{}, fmt.Errorf("row of %s is damaged: %w", r.Shot, err)
		}
	}
	return r, nil
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
