package study

import (
	"bytes"
	"context"
	"errors"
	"io"
	"strings"
	"testing"

	"fallshadow/fit/curve"
)

// TestByNumber: shots whose T was computed from their number are counted out of laws,
// transition and factor, and stay in the figure under a mark of their own; a night of them is
// refused in a sentence.
func TestByNumber(t *testing.T) {
	n := made(t, 40)
	for _, i := range []int{30, 35} {
		n.Rows[i].Words["form"] = "bose+tf,number,free"
	}
	a := analysed(t, n)
	if c := a.Comparisons[0].Points; c != 28 || len(a.Chosen.Rows) != 40 {
		t.Errorf("%d shots are compared, %d chosen", c, len(a.Chosen.Rows))
	}
	var text, table, number bytes.Buffer
	if err := errors.Join(a.WriteText(&text), a.WriteTable(&table), n.WriteNumber(context.Background(), &number, a.Chosen)); err != nil {
		t.Fatal(err)
	}
	for what, b := range map[string]*bytes.Buffer{"left out of laws and transition (2): made_00031, made_00036: T was computed": &text,
		"\r\nmade_00031,\"of laws and transition: T was computed": &table, "left out (2): made_00031, made_00036: T was computed": &number} {
		if !strings.Contains(b.String(), what) {
			t.Errorf("no %q in\n%s", what, b)
		}
	}
	d, err := a.Plot(Axes{X: DefaultX, Y: DefaultY})
	if err != nil {
		t.Fatal(err)
	}
	if last := d.Figure.Points[len(d.Figure.Points)-1]; len(last.X) != 2 || !strings.Contains(last.Legend, "*N*_{th}") {
		t.Errorf("they are drawn as %q, %d of them", last.Legend, len(last.X))
	}

	if d, err = a.Plot(Axes{X: DefaultX, Y: DefaultY, Group: Grouping{DefaultX, 0.1}}); err != nil || len(d.LeftOut) != 2 {
		t.Errorf("means of groups leave out %v, %v", d.LeftOut, err)
	}
	if d, err = a.Plot(Axes{X: "number", Y: "T_nK", Group: Grouping{"number", 10}}); err != nil || len(d.LeftOut) != 0 {
		t.Errorf("means of a trend leave out %v, %v", d.LeftOut, err)
	}

	for i := range n.Rows {
		n.Rows[i].Words["form"] += ",number"
	}
	a, text = analysed(t, n), bytes.Buffer{}
	if err := a.WriteText(&text); err != nil {
		t.Fatal(err)
	}
	for _, no := range []string{"1 - t^3", "Tc/Tc0", "chi2/shot"} {
		if strings.Contains(text.String(), no) {
			t.Errorf("a night of them has %q:\n%s", no, &text)
		}
	}
	if !strings.Contains(text.String(), `(40): made_00001, made_00002, made_00003 and 37 more: T was computed from the thermal number (flag temperature_from_number, or fugacity = "number" in [fit])`) {
		t.Errorf("a night of them:\n%s", &text)
	}
	err = n.WriteNumber(context.Background(), io.Discard, a.Chosen)
	if !errors.Is(err, curve.ErrNoFactor) || !strings.HasSuffix(err.Error(), "no shot tells a factor: "+whyByNumber) {
		t.Errorf("a factor of them gives %v", err)
	}
	if page := written(t, n); !strings.Contains(page, "40 shots left out of laws and transition") {
		t.Error("the report does not say so")
	}
}
