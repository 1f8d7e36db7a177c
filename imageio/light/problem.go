package light

import "fmt"

// Problem is one thing that can be wrong with the frames of a shot.
type Problem struct {
	Word  string // stands in Exposure.Notes and in errors
	What  string
	Do    string
	Fatal bool // there is no exposure
}

// The words of the problems.
const (
	NoAtoms      = "no_atoms_frame"
	NoLight      = "no_light_frame"
	NoDark       = "no_dark_frame"
	WrongSize    = "wrong_size"
	Blank        = "blank_frame"
	Saturated    = "saturated"
	EmptyProbe   = "empty_probe"
	Unlit        = "unlit_atoms_frame"
	Exchanged    = "exchanged"
	PartSaturate = "part_saturated"
	Brighter     = "atoms_brighter"
	Power        = "power_jump"
	OddDark      = "odd_dark"
	Drift        = "dark_drift"
	ManyBad      = "many_bad_pixels"
)

// Problems lists every problem, those without an exposure first.
var Problems = []Problem{
	{NoAtoms, "there is no atoms frame", "check the layout and that the file was written to its end", true},
	{NoLight, "there is no light frame", "check the layout and that the file was written to its end", true},
	{NoDark, "neither the shot nor the night has a dark frame", "take a dark frame, or put a shot with one into the night's folder; where the dark is subtracted already, save the frames as the camera gives them", true},
	{WrongSize, "a frame differs in size from the others of the night", "give each camera setting a folder of its own", true},
	{Blank, "a frame holds one and the same value everywhere", "check that the camera was triggered and the file written; a dark frame of one value may come of subtracting it already: save the frames as the camera gives them", true},
	{Saturated, "a frame is saturated over a large part", "lower the probe, the exposure or the gain; check full_scale", true},
	{EmptyProbe, "the light frame holds no light above the dark", "check the probe shutter and the order of the planes", true},
	{Unlit, "the atoms frame holds no light though the light frame does", "check the probe pulse of the first exposure and the order of the planes", true},
	{Exchanged, "the light frame has a hole where the atoms frame has none", "the two are exchanged: correct the order of the planes", true},
	{PartSaturate, "more than one pixel in a thousand is saturated; these and all whose noise full scale clips are masked", "lower the probe, the exposure or the gain", false},
	{Brighter, "along the border the atoms frame is brighter than the light frame by more than a quarter", "check that the probe pulses are alike and that the order of the planes is right", false},
	{Power, "along the border the atoms frame holds less than three quarters of the light frame", "check the probe's power; if the cloud reaches the border, enlarge the region", false},
	{OddDark, "the dark frame does not look like those of the night; the shot's own was used", "look for stray light in the dark exposure", false},
	{Drift, "the offset of the camera drifts over the night and this shot has no dark of its own", "take a dark with every shot", false},
	{ManyBad, "more than one pixel in a hundred is masked", "look at the frames: a wrong full_scale, stray light, or a worn camera", false},
}

// Explain finds the problem of a word.
func Explain(word string) (Problem, bool) {
	for _, p := range Problems {
		if p.Word == word {
			return p, true
		}
	}
	return Problem{}, false
}

// Error is a problem that leaves no exposure.
type Error struct {
	Problem
	Where string // which frame, or what was measured
}

func (e *Error) Error() string {
	if e.Where == "" {
		return fmt.Sprintf("%s: %s", e.What, e.Do)
	}
	return fmt.Sprintf("%s (%s): %s", e.What, e.Where, e.Do)
}

func refuse(word, format string, args ...any) error {
	p, _ := Explain(word)
	return &Error{Problem: p, Where: fmt.Sprintf(format, args...)}
}
