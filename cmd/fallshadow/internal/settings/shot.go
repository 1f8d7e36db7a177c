package settings

import (
	"fmt"
	"math"

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
			return 0, fmt.Errorf("time of flight: %w; see [flight] in the settings", err)
		}
	}
	seconds = x/perSecond + s.Clock.ZeroMs.Value/1e3
	if !(seconds >= 0 && seconds <= maxFlight) || math.IsNaN(seconds) {
		return 0, fmt.Errorf("time of flight: %s gives %g ms with zero_ms added: expected 0 to %d s; see unit and zero_ms in [flight] of the settings", from, seconds*1e3, maxFlight)
	}
	return seconds, nil
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
