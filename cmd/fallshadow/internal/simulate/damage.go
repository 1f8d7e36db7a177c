package simulate

import (
	"fmt"
	"maps"
	"math"
	"math/rand/v2"
	"slices"
	"strings"

	"fallshadow/imageio/synth"
)

// Damage lists, by kind, the numbers of the shots to break, from 1.
type Damage map[string][]int

// The kinds of damage.
const (
	absent       = "absent"        // no file
	missingFrame = "missing-frame" // the last frame is not there
	truncated    = "truncated"     // the file ends early
	randomBytes  = "random-bytes"  // the file is noise
	zero         = "zero"          // all frames are zero
	saturated    = "saturated"     // atoms and light at full scale
	empty        = "empty"         // no atoms
	exchanged    = "exchanged"     // atoms and light in each other's place
	wrongSize    = "wrong-size"    // the frames lack a row
)

var kinds = []string{absent, missingFrame, truncated, randomBytes, zero, saturated, empty, exchanged, wrongSize}

func (d Damage) check(shots int) error {
	seen := map[int]string{}
	for _, kind := range slices.Sorted(maps.Keys(d)) {
		if !slices.Contains(kinds, kind) {
			return fmt.Errorf("damage.%s is unknown: known are %s", kind, strings.Join(kinds, ", "))
		}
		for _, shot := range d[kind] {
			if shot < 1 || shot > shots {
				return fmt.Errorf("damage.%s names shot %d of %d", kind, shot, shots)
			}
			if other, twice := seen[shot]; twice {
				return fmt.Errorf("damage names shot %d twice, as %s and %s", shot, other, kind)
			}
			seen[shot] = kind
		}
	}
	return nil
}

// of returns the kind of damage of a shot, empty for none.
func (d Damage) of(shot int) string {
	for _, kind := range kinds {
		if slices.Contains(d[kind], shot) {
			return kind
		}
	}
	return ""
}

// spoil breaks the frames of a shot as its damage says.
func spoil(f synth.Frames, damage string, fullScale int) synth.Frames {
	set := func(v uint16, planes ...[]uint16) {
		for _, p := range planes {
			for i := range p {
				p[i] = v
			}
		}
	}
	switch damage {
	case zero:
		set(0, f.Planes()...)
	case saturated:
		set(uint16(fullScale), f.Atoms, f.Light)
	case exchanged:
		f.Atoms, f.Light = f.Light, f.Atoms
	case wrongSize:
		f.Height--
		n := f.Width * f.Height
		f.Atoms, f.Light, f.Dark = f.Atoms[:n], f.Light[:n], f.Dark[:n]
	}
	return f
}

// spoilFile breaks the bytes of a file.
func spoilFile(data []byte, damage string, rng *rand.Rand) []byte {
	switch damage {
	case truncated:
		return data[:int(math.Round(0.6*float64(len(data))))]
	case randomBytes:
		noise := make([]byte, 4096)
		for i := range noise {
			noise[i] = byte(rng.Uint32())
		}
		return noise
	}
	return data
}
