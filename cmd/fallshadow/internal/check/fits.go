package check

import (
	"cmp"
	"context"
	"fmt"
	"slices"
	"strings"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit"
)

// fitted is a shot that was fitted on trial.
type fitted struct {
	shot  int
	facts *report.Facts
	row   ledger.Row // the cells, for their text
	light float64    // median of the light in the cloud's place, electrons a fitted pixel
}

// fit tries shots spread over the night until enough of them show a condensate beside a
// thermal part, whose ratios tell wrong settings apart; scans often begin or end
// without the one or the other. Three times as many are tried at most.
func (v *visit) fit(ctx context.Context, p night.Progress) {
	list := spread(v.usable())
	list = list[:min(len(list), 3*v.Fits)]
	if len(list) == 0 {
		return
	}
	p.Begin("trying up to", len(list))
	defer p.End()
	both := 0
	for _, i := range list {
		f, err := v.try(ctx, i)
		p.Step("", false)
		if ctx.Err() != nil {
			return
		}
		if err != nil {
			v.shots[i].refuse("no fit")
			v.trouble.problem(v.look.Shots[i].Name, "%v", err)
			continue
		}
		v.fitted = append(v.fitted, *f)
		if f.facts.Fit.Model == fit.ModelBimodal {
			both++
		}
		if both == v.Fits {
			break
		}
	}
	slices.SortFunc(v.fitted, func(a, b fitted) int { return a.shot - b.shot })
	v.judgeFits()
}

func (v *visit) try(ctx context.Context, i int) (*fitted, error) {
	facts, err := v.look.Measure(ctx, i)
	if err != nil {
		return nil, err
	}
	f := &fitted{shot: i, facts: facts}
	report.Fill(&f.row, facts)
	e := v.look.Expose(ctx, i)
	if e.Err != nil {
		return nil, e.Err
	}
	x, y := v.look.Light.Camera.FromSaved(facts.X, facts.Y)
	f.light = lightAt(e.Exposure, x, y, facts.Fit, v.look.Lab.Optics.Pixel)
	return f, nil
}

// spread orders a list from its middle outwards by halving: the middle, the quarters, the
// eighths and so on.
func spread(list []int) []int {
	var order []int
	taken := make([]bool, len(list))
	for parts := 2; len(order) < len(list); parts *= 2 {
		for k := 1; k < parts; k += 2 {
			i := k * len(list) / parts
			if !taken[i] {
				taken[i] = true
				order = append(order, list[i])
			}
		}
	}
	return order
}

// judgeFits gathers the flags of the fits. A flag that names a setting in most of the
// shots that can tell is a problem, and the cause of most others, which are then only
// named. Axes that disagree in most shots are no accident of one.
func (v *visit) judgeFits() {
	others := v.raised(func(flag string) bool { return !suspect[flag] })
	suspects := v.raised(func(flag string) bool { return suspect[flag] })
	axes := slices.IndexFunc(others, func(r raised) bool { return r.Name == fit.FlagWidths })
	if len(suspects) == 0 && axes >= 0 && 2*len(others[axes].where) > len(v.fitted) {
		suspects = []raised{others[axes]}
		others = slices.Delete(others, axes, axes+1)
	}
	shots := 0
	for _, f := range suspects {
		shots += len(f.where)
	}
	if 2*shots <= v.condensates() {
		if v.judgeSaturation() {
			others = withoutForm(others)
		}
		v.judgeMeanField()
		for _, f := range slices.Concat(suspects, others) {
			v.trouble.cautions = append(v.trouble.cautions, matter{f.Name + ": " + f.Sentence, f.where})
		}
		return
	}
	slices.SortStableFunc(suspects, func(a, b raised) int {
		return cmp.Or(b.condensed-a.condensed, len(b.where)-len(a.where))
	})
	text := suspects[0].Name + ": " + suspects[0].Sentence
	for _, f := range suspects[1:] {
		text += fmt.Sprintf(" (%s instead: %s)", some(f.where), f.Name)
	}
	v.trouble.problems = append(v.trouble.problems, matter{text, suspects[0].where})
	if len(others) > 0 {
		var names []string
		for _, f := range others {
			names = append(names, f.Name)
		}
		v.trouble.caution("", "the trial fits also raise %s: look again when %s is solved", strings.Join(names, ", "), suspects[0].Name)
	}
}

// condensates counts the fits with a condensate, whose ratios tell settings apart.
func (v *visit) condensates() (n int) {
	for i := range v.fitted {
		if v.fitted[i].condensed() {
			n++
		}
	}
	return n
}

func (f *fitted) condensed() bool {
	m := f.facts.Fit.Model
	return m == fit.ModelBimodal || m == fit.ModelCondensate
}

// raised is a flag and the shots that have it.
type raised struct {
	fit.Flag
	where     []string
	condensed int // of them with a condensate, whose ratios name a setting best
}

// raised lists the flags of the fits that are of a kind, in the order of their table.
func (v *visit) raised(kind func(flag string) bool) (list []raised) {
	for _, flag := range slices.Concat(fit.Flags, report.RegionFlags) {
		r := raised{Flag: report.Worded(flag, v.Settings.Shots.Layout == "density")}
		for i := range v.fitted {
			if f := &v.fitted[i]; slices.Contains(f.row.Flags, flag.Name) {
				r.where = append(r.where, v.look.Shots[f.shot].Name)
				if f.condensed() {
					r.condensed++
				}
			}
		}
		if kind(flag.Name) && len(r.where) > 0 {
			list = append(list, r)
		}
	}
	return list
}

// suspect holds the flags that say which setting is wrong, or that one is.
var suspect = map[string]bool{
	fit.FlagFrequencyUnit: true, fit.FlagAxes: true, fit.FlagAxis1: true, fit.FlagAxis2: true, fit.FlagSight: true,
	fit.FlagFlight: true, fit.FlagPixel: true, fit.FlagNumber: true, fit.FlagRatios: true,
}
