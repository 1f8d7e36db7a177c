package study

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"math"
	"strings"
	"testing"

	"fallshadow/fit"
	"fallshadow/fit/curve"
)

// TestOutlier: a shot that makes another law that of least chi2 is named, with its flags, and
// the law of the rest; those flagged and provisional are counted.
func TestOutlier(t *testing.T) {
	n := made(t, 60)
	n.Rows[2].Provisional = true
	r := &n.Rows[40]
	r.Numbers["T_nK"] *= 0.7
	r.Flags = []string{fit.FlagMisfit}
	a := analysed(t, n)
	if a.Describes() || len(a.Outliers.Places) != 1 || a.Outliers.Places[0] != 40 || !(a.Outliers.PerShot < 1.5) {
		t.Errorf("described %v, %+v", a.Describes(), a.Outliers)
	}
	var text, out, number bytes.Buffer
	if err := errors.Join(a.WriteText(&text), a.WriteJSON(&out), n.WriteNumber(context.Background(), &number, a.Chosen)); err != nil {
		t.Fatal(err)
	}
	if !strings.Contains(number.String(), "no single factor mends the night") || !strings.Contains(number.String(), ", 1 of 43 are more than five errors off: made_00041\n") {
		t.Errorf("calibrate number does not name it:\n%s", &number)
	}
	for _, want := range []string{"condensate, 1 flagged, 1 provisional until batch has run\n", "no law describes these shots: the least chi2 a shot is ",
		"1 shot more than 5 errors from ideal gas, 1 - t^3, to which most are nearest: made_00041 (-", ", misfit); the rest has the least chi2, ", " a shot, from ideal gas, 1 - t^3\n"} {
		if !strings.Contains(text.String(), want) {
			t.Errorf("no %q:\n%s", want, &text)
		}
	}
	if strings.Contains(text.String(), "least chi2\n") || strings.Contains(written(t, n), "(least chi2)") {
		t.Error("a law that describes nothing is marked")
	}
	var v struct {
		Best     string `json:"least_chi2"`
		Outliers []struct {
			Shot   string
			Sigmas float64
			Flags  []string
		}
	}
	if err := json.Unmarshal(out.Bytes(), &v); err != nil || v.Best != "" || len(v.Outliers) != 1 || v.Outliers[0].Shot != "made_00041" || !(v.Outliers[0].Sigmas < -farAway) || len(v.Outliers[0].Flags) != 1 {
		t.Errorf("%+v, %v", v, err)
	}
}

// TestUnknown: a shot whose condensate is not known, and one that failed to be fitted with a
// moved setting, tell no law, and are named; the errors of the others stay whole.
func TestUnknown(t *testing.T) {
	n := made(t, 40)
	whole := analysed(t, n)
	for _, name := range []string{"condensate", "atoms", "fraction", "t_reduced"} {
		delete(n.Rows[9].Numbers, name)
	}
	delete(n.Rows[20].Shifts[curve.Alpha].Change, "T")
	a := analysed(t, n)
	if len(a.Aside) != 2 || a.Aside[0] != (LeftOut{Shot: "made_00010", Why: whyUnknown}) || a.Aside[1] != (LeftOut{Shot: "made_00021", Why: whyShift}) {
		t.Errorf("left out: %+v", a.Aside)
	}
	if got, was := a.Comparisons[0].Points, whole.Comparisons[0].Points; got != was-1 {
		t.Errorf("%d shots are compared, %d were", got, was)
	}
	if !(a.Transition.Coldest > whole.Transition.Coldest) {
		t.Errorf("the coldest without a condensate stays %g", a.Transition.Coldest)
	}
	within(t, "calibration error of Tc", a.Measured().Cal/whole.Measured().Cal, 1, 0.1)
	if p := &a.Curve.Points[9]; !math.IsNaN(p.Atoms()) {
		t.Errorf("the shot has %g atoms", p.Atoms())
	}
	var b bytes.Buffer
	if err := errors.Join(a.WriteText(&b), a.WriteTable(&b), a.WriteJSON(&b), a.WriteGroups(&b, Grouping{"EVAP", 0})); err != nil {
		t.Fatal(err)
	}
	for _, axes := range []Axes{{X: DefaultX, Y: DefaultY}, {X: "T_nK", Y: "fraction"}, {X: "number", Y: "T_nK"}} {
		if _, err := a.Plot(axes); err != nil {
			t.Errorf("%+v: %v", axes, err)
		}
	}
}
