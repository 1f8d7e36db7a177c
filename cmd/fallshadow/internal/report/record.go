package report

import (
	"bytes"
	"encoding/json"
	"math"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/imageio"
)

// Record writes a row as one JSON object on one line for other programs: the columns of
// the table in their order under their names, numbers as numbers, empty cells left out,
// flags as a list, and the scan variables behind them, as numbers where they are such.
func Record(r *ledger.Row, scan []string) ([]byte, error) {
	b := bytes.NewBufferString("{")
	add := func(name string, value any) error {
		key, err := json.Marshal(name)
		if err != nil {
			return err
		}
		text, err := json.Marshal(value)
		if err != nil {
			return err
		}
		if b.Len() > 1 {
			b.WriteByte(',')
		}
		b.Write(key)
		b.WriteByte(':')
		b.Write(text)
		return nil
	}
	for _, c := range Columns {
		if value := c.value(r); value != nil {
			if err := add(c.Name, value); err != nil {
				return nil, err
			}
		}
	}
	for _, name := range scan {
		text, ok := imageio.Metadata(r.Meta).Get(name)
		if !ok {
			continue
		}
		var value any = text
		if v, err := imageio.Metadata(r.Meta).Number(name); err == nil && v-v == 0 {
			value = v
		}
		if err := add(name, value); err != nil {
			return nil, err
		}
	}
	b.WriteByte('}')
	return b.Bytes(), nil
}

// value returns a cell for JSON, nil where it is empty.
func (c Column) value(r *ledger.Row) any {
	switch {
	case c.Name == "flags":
		return append([]string{}, Flags(r)...)
	case c.number != nil:
		if v := r.Number(c.Name); !math.IsNaN(v) {
			return v
		}
		return nil
	}
	if text := c.Cell(r); text != "" {
		return text
	}
	return nil
}
