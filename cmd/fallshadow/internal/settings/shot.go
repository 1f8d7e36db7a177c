package settings

import (
	"fmt"
	"maps"
	"math"
	"regexp"
	"slices"
	"strings"

	"fallshadow/imageio"
)

// maxFlight is the longest time of flight believed, s.
const maxFlight = 10

// Flight returns the time of flight of a shot in s, the zero added. It fails where the
// metadata do not hold it, where what they hold is no number, and outside 0 to 10 s.
func (s *Settings) Flight(meta imageio.Metadata) (seconds float64, err error) {
	x, perSecond, from := s.Clock.FixedMs.Value, 1e3, "flight.fixed_ms"
	if !s.Clock.FixedMs.Given {
		from = s.Clock.From
		perSecond = map[string]float64{"s": 1, "ms": 1e3, "us": 1e6}[s.Clock.Unit]
		if x, err = meta.Number(from); err != nil {
			return 0, fmt.Errorf("time of flight: %w%s; see [flight] in the settings", err, candidates(meta))
		}
	}
	seconds = x/perSecond + s.Clock.ZeroMs.Value/1e3
	if !(seconds >= 0 && seconds <= maxFlight) || math.IsNaN(seconds) {
		return 0, fmt.Errorf("time of flight: %s gives %g ms with zero_ms added: expected 0 to %d s; see unit and zero_ms in [flight] of the settings", from, seconds*1e3, maxFlight)
	}
	return seconds, nil
}

// structural are header keywords that tell of the file and not of the shot.
var structural = regexp.MustCompile(`^(SIMPLE|BITPIX|NAXIS\d*|EXTEND|BSCALE|BZERO|PCOUNT|GCOUNT|XTENSION|EXTNAME|CHECKSUM|DATASUM|COMMENT|HISTORY|END|)$`)

// IsStructural reports whether a key of metadata tells of the file and not of the shot.
func IsStructural(key string) bool { return structural.MatchString(key) }

// candidates names the keys that hold numbers, those that are likely a time first.
func candidates(meta imageio.Metadata) string {
	const most = 8
	var likely, others []string
	for _, key := range slices.Sorted(maps.Keys(meta)) {
		_, err := meta.Number(key)
		switch name := strings.ToLower(key); {
		case err != nil || IsStructural(key):
		case strings.Contains(name, "tof") || strings.Contains(name, "flight") || strings.Contains(name, "time") || strings.HasSuffix(name, "ms"):
			likely = append(likely, key)
		default:
			others = append(others, key)
		}
	}
	list := append(likely, others...)
	if len(list) == 0 {
		return ""
	}
	text := strings.Join(list[:min(len(list), most)], ", ")
	if len(list) > most {
		text += ", ..."
	}
	return "; these hold numbers: " + text
}

// Scanned is a scan variable of a shot as its metadata give it.
type Scanned struct {
	Name, Text string
}

// Scan returns the variables to carry along, in the order of the settings, with empty
// text where the metadata lack one.
func (s *Settings) Scan(meta imageio.Metadata) []Scanned {
	out := make([]Scanned, len(s.Shots.Scan))
	for i, name := range s.Shots.Scan {
		text, _ := meta.Get(name)
		out[i] = Scanned{name, text}
	}
	return out
}
