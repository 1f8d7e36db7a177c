// Package report makes what people and other programs read of a night: the columns of
// the table, the file results.csv, and the summary on the terminal.
package report

import (
	"slices"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/fit"
	"fallshadow/imageio/light"
)

// The flags that come from the ledger and not from a picture.
const (
	FlagDuplicate   = "duplicate"
	FlagProvisional = "provisional"
	FlagStale       = "stale"
	FlagMarkedBad   = "marked_bad"
)

// The flags of the region that a person gave.
const (
	FlagGrown   = "region_grown"
	FlagOutside = "cloud_outside_region"
)

// RegionFlags are the flags of the region that a person gave.
var RegionFlags = []fit.Flag{
	{Name: FlagGrown, Sentence: "the cloud reached over the border of its region, and was fitted in the whole frame: give a larger region, or none"},
	{Name: FlagOutside, Sentence: "there is no cloud in its region, but one elsewhere in the frame: move the region, or give none"},
}

var ledgerFlags = []fit.Flag{
	{Name: FlagDuplicate, Sentence: "another shot before it in the night has the same pixels: the same file was saved or copied twice"},
	{Name: FlagProvisional, Sentence: "fitted while the night was being taken, with the light frames of that moment: batch makes it final"},
	{Name: FlagStale, Sentence: "fitted with other settings, frames or program than those of now: batch fits it again"},
	{Name: FlagMarkedBad, Sentence: "a person marked the shot as bad; the word is in the column bad, and curve leaves the shot out"},
}

// Flags returns the flags of a row: those of its picture, then those that follow from the
// ledger.
func Flags(r *ledger.Row) []string {
	flags := slices.Clone(r.Flags)
	for _, f := range []struct {
		on   bool
		name string
	}{{r.Duplicate != "", FlagDuplicate}, {r.Provisional, FlagProvisional}, {r.Stale, FlagStale}, {r.Bad != "", FlagMarkedBad}} {
		if f.on {
			flags = append(flags, f.name)
		}
	}
	return flags
}

// AllFlags returns every flag that a row can have, with its sentence: those of the fit,
// of the frames, of the region, and of the ledger.
func AllFlags() []fit.Flag {
	all := slices.Clone(fit.Flags)
	for _, p := range light.Problems {
		if !p.Fatal {
			all = append(all, fit.Flag{Name: p.Word, Sentence: p.What + ": " + p.Do})
		}
	}
	return slices.Concat(all, RegionFlags, ledgerFlags)
}

// Worded is a flag as it is to be read of density images, whose noise no setting of a camera
// tells, or of frames.
func Worded(f fit.Flag, density bool) fit.Flag {
	if density && f.Name == fit.FlagNoise {
		f.Sentence = "the residuals of the whole picture do not match the noise that was estimated from it: look for fringes, and for noise that neighbouring pixels share, as after smoothing or interpolation"
	}
	return f
}
