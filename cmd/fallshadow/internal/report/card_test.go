package report

import (
	"testing"

	"github.com/google/go-cmp/cmp"

	"fallshadow/cmd/fallshadow/internal/ledger"
)

// Cards have the digits that their errors leave.
func TestCards(t *testing.T) {
	row := func(v, e, cal, low, high float64) *ledger.Row {
		r := &ledger.Row{}
		for name, x := range map[string]float64{"x": v, "x_err": e, "x_cal": cal, "x_low": low, "x_high": high} {
			if x != 0 {
				r.SetNumber(name, x)
			}
		}
		return r
	}
	tests := []struct {
		r    *ledger.Row
		want Card
	}{
		{row(46.13, 9.02, 0, 0, 0), Card{Value: "46", Err: "± 9"}},
		{row(0.4932, 0.0032, 0.0023, 0, 0), Card{Value: "0.4932", Err: "± 0.0032", Cal: "± 0.0023"}},
		{row(2.5e6, 1.23e4, 5e4, 0, 0), Card{Value: "2.500", Unit: "×10⁶", Err: "± 0.012", Cal: "± 0.050"}},
		{row(4.2e-5, 3e-6, 0, 0, 0), Card{Value: "4.20", Unit: "×10⁻⁵", Err: "± 0.30"}},
		{row(67, 0, 0, 46, 99), Card{Value: "67", Err: "+32 −21"}},
		{row(0, 0, 0, 0, 35.81), Card{Value: "< 36"}},
		{row(0, 0, 0, 12.6, 0), Card{Value: "> 13"}},
		{row(1234567, 0, 0, 0, 0), Card{Value: "1.23", Unit: "×10⁶"}},
		{row(-0.034, 0.5, 0, 0, 0), Card{Value: "0.0", Err: "± 0.5"}},
		{row(0, 0, 0, 0, 0), Card{}},
	}
	for _, test := range tests {
		if diff := cmp.Diff(test.want, newCard(test.r, "x")); diff != "" {
			t.Error(diff)
		}
	}
}
