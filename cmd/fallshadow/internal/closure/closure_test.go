package closure

import (
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// form is how many shots a night has: those of FALLSHADOW_CLOSURE, all of them fitted, or in
// the short form 30, so that the light of a night is there, and each fifth fitted.
func form(t *testing.T) (shots, every int) {
	t.Helper()
	text := os.Getenv("FALLSHADOW_CLOSURE")
	if text == "" {
		return 30, 5
	}
	n, err := strconv.Atoi(text)
	if err != nil || n < 1 {
		t.Fatalf("FALLSHADOW_CLOSURE is %q: give the number of shots", text)
	}
	return n, 1
}

// The bounds that 200 shots must keep.
const (
	mostRMS, mostMean   = 1.15, 0.25
	leastPull, mostPull = 0.85, 1.15
	mostMissed          = 0.005
	enough              = 200
)

// slack is what fewer shots may be off: three standard deviations of an rms of n values,
// 1/√2n of itself.
func slack(shots int, n float64) float64 {
	if shots >= enough {
		return 0
	}
	return 3 / math.Sqrt(2*math.Max(n, 1))
}

// presets are the nights of the closure.
var presets = []string{"rubidium", "threshold", "sodium-bright", "fringed", "faint", "potassium-flight"}

// TestClosure: values scatter about the truth as the Cramer-Rao bound says, and as their own
// errors say, through the whole way from frames to numbers.
func TestClosure(t *testing.T) {
	n, every := form(t)
	var table []string
	for _, name := range presets {
		t.Run(name, func(t *testing.T) {
			shots := simulated{preset: name, shots: n, every: every}.run(t)
			keep(t, name, shots)
			for _, s := range shots {
				if s.failure != nil {
					t.Errorf("%s: %v", s.truth.Shot, s.failure)
				}
			}
			for _, q := range quantities {
				s := scoreOf(q, shots)
				table = append(table, s.line(name, q.name))
				s.hold(t, name+" "+q.name, n)
			}
		})
	}
	t.Logf("(value - truth)/bound\n%s\n%s", head, strings.Join(table, "\n"))
}

// hold fails where a score is beyond its bounds.
func (s score) hold(t *testing.T, what string, shots int) {
	t.Helper()
	if s.bounds.n < 4 {
		return // too few to say anything
	}
	wide := slack(shots, s.bounds.n)
	if rms := s.bounds.rms(); !(rms < mostRMS+wide) {
		t.Errorf("%s: rms %.3f bounds, want below %.3f", what, rms, mostRMS+wide)
	}
	if mean := s.bounds.mean(); !(math.Abs(mean) < mostMean+math.Sqrt2*wide) {
		t.Errorf("%s: mean %+.3f bounds, want within %.3f", what, mean, mostMean+math.Sqrt2*wide)
	}
	if pulls := s.pulls.rms(); !(pulls > leastPull-wide && pulls < mostPull+wide) {
		t.Errorf("%s: rms of pulls %.3f, want %.3f to %.3f", what, pulls, leastPull-wide, mostPull+wide)
	}
	if all := s.bounds.n + float64(s.missed); float64(s.missed) > mostMissed*all {
		t.Errorf("%s: %d of %.0f shots have no value", what, s.missed, all)
	}
}

// keep writes the shots of a night to the folder in FALLSHADOW_CLOSURE_CSV.
func keep(t *testing.T, name string, shots []shot) {
	dir := os.Getenv("FALLSHADOW_CLOSURE_CSV")
	if dir == "" {
		return
	}
	f, err := os.Create(filepath.Join(dir, name+".csv"))
	if err != nil {
		t.Fatal(err)
	}
	w := csv.NewWriter(f)
	cells := []string{"shot", "model", "t_reduced", "reference", "light_shot", "chi2_per_dof", "chi2_cloud", "flags"}
	for _, q := range quantities {
		cells = append(cells, q.name+"_true", q.name, q.name+"_err", q.name+"_bound")
	}
	w.Write(cells)
	for i := range shots {
		s := &shots[i]
		cells := []string{s.truth.Shot, s.fit.Model, text(s.truth.T / s.truth.Tc0), s.reference, text(s.noise.LightShot),
			text(s.fit.ChiPerDof), text(s.fit.ChiCloud), strings.Join(s.fit.Flags, "+")}
		for _, q := range quantities {
			v := q.value(&s.fit.Numbers)
			cells = append(cells, text(q.truth(s)), text(v.V), text(v.Err), text(q.bound(s)))
		}
		w.Write(cells)
	}
	w.Flush()
	if err := w.Error(); err != nil {
		t.Fatal(err)
	}
	if err := f.Close(); err != nil {
		t.Fatal(err)
	}
}

func text(v float64) string { return fmt.Sprintf("%.6g", v) }
