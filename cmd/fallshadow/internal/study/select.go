package study

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit"
)

// Range is a condition on a quantity.
type Range struct {
	Quantity  string
	Low, High float64 // both included
}

// ParseRange reads NAME=LOW:HIGH, where either end may be left out.
func ParseRange(text string) (Range, error) {
	fail := func(what string) (Range, error) {
		return Range{}, fmt.Errorf("%q: %s; write NAME=LOW:HIGH, such as number=3: or T_nK=50:200", text, what)
	}
	name, ends, found := strings.Cut(text, "=")
	low, high, two := strings.Cut(ends, ":")
	if !found || !two || name == "" {
		return fail("no range")
	}
	r := Range{name, math.Inf(-1), math.Inf(1)}
	for _, end := range []struct {
		text string
		into *float64
	}{{low, &r.Low}, {high, &r.High}} {
		if end.text == "" {
			continue
		}
		v, err := strconv.ParseFloat(end.text, 64)
		if err != nil || math.IsNaN(v) {
			return fail(end.text + " is no number")
		}
		*end.into = v
	}
	if r.Low > r.High {
		return fail("the range is empty")
	}
	return r, nil
}

// UnmarshalText is ParseRange, for the command line.
func (r *Range) UnmarshalText(text []byte) (err error) {
	*r, err = ParseRange(string(text))
	return err
}

func (r Range) String() string {
	end := func(v float64) string {
		if math.IsInf(v, 0) {
			return ""
		}
		return strconv.FormatFloat(v, 'g', -1, 64)
	}
	return r.Quantity + "=" + end(r.Low) + ":" + end(r.High)
}

// Selection says which shots take part.
type Selection struct {
	Where   []Range
	Without []string // flags that put a shot out; AnyFlag stands for all
}

// AnyFlag is the word for every flag.
const AnyFlag = "any"

// Chosen is what a selection leaves of a night.
type Chosen struct {
	Rows    []*ledger.Row
	Numbers []int // of the rows in the night, from 1
	LeftOut []LeftOut

	why map[string]string // of LeftOut, by shot
}

// Select applies a selection. Failed shots, shots that a person has given a word against,
// duplicates and stale ones never take part. It fails on a name that is no quantity or flag.
func (n *Night) Select(s Selection) (*Chosen, error) {
	var wanted []*Quantity
	for _, r := range s.Where {
		q, err := n.Quantity(r.Quantity)
		if err != nil {
			return nil, err
		}
		wanted = append(wanted, q)
	}
	for _, f := range s.Without {
		if !isFlag(f) {
			return nil, fmt.Errorf("no flag is called %q: %s", f, strings.Join(flagNames(), ", "))
		}
	}
	c := &Chosen{why: map[string]string{}}
	for i := range n.Rows {
		r := &n.Rows[i]
		why, kind := verdict(r), kindOf(r)
		if why == "" {
			why = flagged(r, s.Without)
		}
		for k, q := range wanted {
			if v := q.value(n, r, i+1); why == "" && !(v >= s.Where[k].Low && v <= s.Where[k].High) {
				why = fmt.Sprintf("%s is %s: asked for %s", q.Name, orNothing(v), s.Where[k])
				kind = fmt.Sprintf("outside of %s", s.Where[k])
			}
		}
		if why != "" {
			c.LeftOut, c.why[r.Shot] = append(c.LeftOut, LeftOut{r.Shot, why, kind}), why
			continue
		}
		c.Rows, c.Numbers = append(c.Rows, r), append(c.Numbers, i+1)
	}
	return c, nil
}

// verdict says what speaks against a row whatever is selected.
func verdict(r *ledger.Row) string {
	switch {
	case r.Reason != "":
		return "failed: " + r.Reason
	case r.Bad != "":
		return "a person's word: " + r.Bad
	case r.Stale:
		return "fitted with other settings, region or program than those of now: run batch"
	case r.Duplicate != "":
		return "the same pixels as " + r.Duplicate
	case r.Words["model"] == fit.ModelNone:
		return "no cloud in the picture"
	case lacksCorrelations(r):
		return "fitted by a program that kept no correlations: run batch --again"
	}
	return ""
}

// kindOf is what verdicts on several shots have in common where their words differ.
func kindOf(r *ledger.Row) string {
	switch {
	case r.Reason != "":
		return "failed, each with its reason in the table"
	case r.Bad != "":
		return "a person's word, each with its own"
	case r.Duplicate != "" && !r.Stale:
		return "the same pixels as another shot"
	}
	return ""
}

func flagged(r *ledger.Row, without []string) string {
	for _, f := range report.Flags(r) {
		if slices.Contains(without, f) || slices.Contains(without, AnyFlag) {
			return "flag " + f
		}
	}
	return ""
}

func isFlag(name string) bool { return name == AnyFlag || slices.Contains(flagNames(), name) }

func flagNames() []string {
	var names []string
	for _, f := range report.AllFlags() {
		names = append(names, f.Name)
	}
	return names
}

func orNothing(v float64) string {
	if math.IsNaN(v) {
		return "not known"
	}
	return strconv.FormatFloat(v, 'g', 6, 64)
}
