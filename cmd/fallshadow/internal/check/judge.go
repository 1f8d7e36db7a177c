package check

import (
	"context"
	"errors"
	"strings"

	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/imageio"
	"fallshadow/imageio/fault"
	"fallshadow/imageio/light"
)

// shot is what was found of one shot.
type shot struct {
	tally
	flight   float64 // s, where it is known
	unusable bool    // a batch would fail it
	remarks  []string
}

func (s *shot) refuse(remark string) {
	s.unusable = true
	s.remarks = append(s.remarks, remark)
}

// judgeNight notes what cannot be read, and what stopped the look.
func (v *visit) judgeNight() {
	for i, s := range v.look.Shots {
		switch {
		case s.Err == nil:
		case errors.Is(s.Problem, imageio.ErrRow):
			v.shots[i].refuse("no row")
			v.trouble.problem(s.Name, "%s", bare(s))
		case s.Problem != nil:
			v.shots[i].refuse("incomplete")
			v.trouble.problem(s.Name, "%s", bare(s))
		case errors.Is(s.Err, fault.Truncated):
			v.shots[i].refuse("unfinished")
			v.trouble.problem(s.Name, "the file is not whole: wait until it is written, or copy it again")
		default:
			v.shots[i].refuse("not read")
			v.trouble.problem(s.Name, "%s", bare(s))
		}
	}
	v.judgeStrays()
	if names := v.Settings.Shots.DarkFiles; len(names) > 0 && len(v.look.DarkFiles) == 0 {
		v.trouble.caution("", "dark_files: no file in the folder is called %s", strings.Join(names, ", "))
	}
	if v.stopped != nil {
		v.trouble.problem("", "%v", v.stopped)
	}
	if advice := v.otherLayout(); advice != "" {
		v.trouble.problem("", "%s", advice)
	}
}

// judgeStrays counts the files that belong to no shot though they may hold frames.
func (v *visit) judgeStrays() {
	n := 0
	for _, s := range v.look.Strays {
		if !strings.HasPrefix(s.Reason, "no camera frames") {
			n++
		}
	}
	if n > 0 {
		v.trouble.caution("", "files that may hold frames but are part of no shot: %d; see \"passed over\" above", n)
	}
}

// bare returns why a shot cannot be read without the names that the list has already.
func bare(s night.Seen) string {
	text := s.Err.Error()
	for _, f := range s.Files {
		text = strings.TrimPrefix(text, f.Path+": ")
	}
	return strings.TrimPrefix(text, s.Name+": ")
}

// The longest flight of a night that is usual, ms (common practice).
const (
	leastFlight = 0.5
	mostFlight  = 500.0
)

// judgeFlights finds every shot's time of flight.
func (v *visit) judgeFlights() {
	longest := 0.0
	for i, s := range v.look.Shots {
		if s.Err != nil {
			continue
		}
		var err error
		if v.shots[i].flight, err = v.Settings.Flight(s.Meta); err != nil {
			v.shots[i].refuse("no flight")
			v.trouble.problem(s.Name, "%v", err)
		}
		longest = max(longest, v.shots[i].flight*1e3)
	}
	if longest > 0 && longest < leastFlight || longest > mostFlight {
		v.trouble.problem("", "the longest flight is %g ms, where %g to %g is usual: check unit and zero_ms in [flight]", longest, leastFlight, mostFlight)
	}
}

func (v *visit) unread() (n int) {
	for _, s := range v.look.Shots {
		if s.Err != nil {
			n++
		}
	}
	return n
}

// expose makes every readable shot ready for a fit and notes what is seen on the way.
func (v *visit) expose(ctx context.Context, p night.Progress) {
	n := len(v.shots) - v.unread()
	if n == 0 {
		return
	}
	p.Begin("looking at", n)
	defer p.End()
	for i, e := range v.look.Exposures(ctx) {
		if ctx.Err() != nil {
			return
		}
		p.Step("", false)
		v.judgeExposure(i, e)
	}
}

func (v *visit) judgeExposure(i int, e night.Exposed) {
	s, name := &v.shots[i], v.look.Shots[i].Name
	var refused *light.Error
	switch {
	case errors.As(e.Err, &refused):
		s.refuse(refused.Word)
		v.trouble.problem(name, "%s: %s", refused.What, refused.Do)
	case e.Err != nil:
		s.refuse("not usable")
		v.trouble.problem(name, "%v", e.Err)
	default:
		for _, word := range e.Notes {
			s.remarks = append(s.remarks, word)
			if known, ok := light.Explain(word); ok {
				v.trouble.caution(name, "%s: %s", known.What, known.Do)
			}
		}
	}
}

// usable lists the shots that can be fitted.
func (v *visit) usable() (list []int) {
	for i := range v.shots {
		if !v.shots[i].unusable {
			list = append(list, i)
		}
	}
	return list
}
