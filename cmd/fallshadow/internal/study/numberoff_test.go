package study

import (
	"bytes"
	"math"
	"strings"
	"testing"

	"fallshadow/fit/curve"
)

// TestNumberOff: a night whose condensates are larger or smaller than their number lets them
// be is told so, with the errors that are known, and only where both part and errors say so.
func TestNumberOff(t *testing.T) {
	for _, c := range []struct {
		ratio curve.Estimate
		want  string
	}{
		{curve.Estimate{V: 1.082, Err: 0.001, Cal: 0.018}, "is 4.5 of its errors from 1: alpha"},
		{curve.Estimate{V: 0.92, Err: 0.01, Cal: math.NaN()}, "is 8 of its statistical errors from 1: alpha"},
		{curve.Estimate{V: 1.04, Err: 0.001, Cal: 0.001}, ""},
		{curve.Estimate{V: 1.082, Err: 0.001, Cal: 0.03}, ""},
		{curve.Estimate{V: math.NaN(), Err: 0.001, Cal: 0.001}, ""},
	} {
		a := &Analysis{MeanField: &curve.MeanField{Ratio: c.ratio}}
		var said bytes.Buffer
		a.writeMeanField(&said)
		if text := a.numberOff(); !strings.Contains(text, c.want) || (c.want == "") != (text == "") || !strings.Contains(said.String(), text) {
			t.Errorf("%+v: %q, want %q, in %q", c.ratio, text, c.want, said.String())
		}
	}
}
