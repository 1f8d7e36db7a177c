package closure

import (
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/simulate"
)

// large returns a change of a scenario to frames of 1280 by 1024 pixels in which the cloud is
// off the middle.
func large(s *simulate.Scenario) {
	s.Picture.Width, s.Picture.Height = 1280, 1024
	s.Picture.X, s.Picture.Y, s.Picture.Jitter = 430, 610, 30
	s.Probe.X, s.Probe.Y, s.Probe.Waist = 620, 500, 1100
}

// TestClosureLarge: in large frames, of which nobody named a region, values scatter as in those
// that hold little more than the cloud.
func TestClosureLarge(t *testing.T) {
	n, every := form(t)
	n, names := min(n, 60), []string{"rubidium", "fringed", "potassium-flight"}
	if every > 1 { // large frames take long to draw
		n, every, names = 8, 2, names[:1]
	}
	var table []string
	for _, name := range names {
		t.Run(name, func(t *testing.T) {
			shots := simulated{preset: name, name: " in large frames", shots: n, every: every, draw: large}.run(t)
			keep(t, name+"-large", shots)
			for _, q := range quantities {
				s := scoreOf(q, shots)
				table = append(table, s.line(name, q.name))
				s.hold(t, name+" "+q.name, n)
			}
		})
	}
	t.Logf("large frames: (value - truth)/bound\n%s\n%s", head, strings.Join(table, "\n"))
}
