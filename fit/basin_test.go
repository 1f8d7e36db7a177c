package fit

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"strconv"
	"testing"

	"fallshadow/model"
)

// basins is how many random shots TestWrongBasin draws: those of FALLSHADOW_BASIN, or few.
func basins(t *testing.T) int {
	text := os.Getenv("FALLSHADOW_BASIN")
	if text == "" {
		return 30
	}
	n, err := strconv.Atoi(text)
	if err != nil || n < 1 {
		t.Fatalf("FALLSHADOW_BASIN is %q: give the number of random shots", text)
	}
	return n
}

// TestWrongBasin: a fit that is told the truth finds nothing better than one that had to look
// for itself. The shots have a fraction of 1 to 99 %, a peak σ0 n of 0.05 to 6, their centre
// anywhere in the picture, two pixels as dark as the cloud and a small second cloud.
func TestWrongBasin(t *testing.T) {
	n := basins(t)
	found := make([]basin, n)
	t.Run("shots", func(t *testing.T) {
		for start := range 2 {
			t.Run(strconv.Itoa(start), func(t *testing.T) {
				t.Parallel()
				ws := NewWorkspace()
				for i := start; i < n; i += 2 {
					found[i] = searched(t, uint64(i), ws)
				}
			})
		}
	})
	wrong, cut := 0, 0
	for i, b := range found {
		if b.edge {
			cut++
		}
		if b.lower > 1 || b.missed > 1 {
			wrong++
			t.Logf("shot %d: %s, χ² lower by %.3g from the truth, by %.3g enough for another model", i, b.about, b.lower, b.missed)
		}
	}
	t.Logf("%d of %d in a wrong basin; %d clouds had their centre within a tenth of the border", wrong, n, cut)
	if float64(wrong) >= math.Max(1, 0.001*float64(n)) {
		t.Errorf("%d of %d shots end in a wrong basin, want fewer than 1 in 1000", wrong, n)
	}
}

// basin is how a search ended against one from the truth.
type basin struct {
	about  string
	edge   bool
	lower  float64 // χ² of the chosen model minus that of the same model from the truth
	missed float64 // by how much another model from the truth passes what it takes to be chosen
}

// searched draws a random shot, looks for its cloud, and looks again from the truth.
func searched(t *testing.T, seed uint64, ws *Workspace) (b basin) {
	sc, mu := randomScene(t, seed)
	pic := sc.draw(t)
	b.edge = math.Min(sc.x/float64(sc.w), sc.y/float64(sc.h)) < 0.1 || math.Max(sc.x/float64(sc.w), sc.y/float64(sc.h)) > 0.9
	s, err := newSession(context.Background(), pic, sc.lab, sc.flight, Options{}, ws)
	if err != nil {
		t.Error(err)
		return b
	}
	c, err := s.explore()
	if err != nil {
		t.Error(err)
		return b
	}
	chosen, model := s.choose(c)
	b.about = fmt.Sprintf("%s at (%.1f, %.1f) of %d x %d, fraction %.3f, peak %.3g, %.0f electrons, fit %s at (%.1f, %.1f)",
		sc.lab.Species.Name, sc.x, sc.y, sc.w, sc.h, sc.condensate/(sc.condensate+sc.thermal), sc.peak(t), sc.electrons, model, chosen.p[pX], chosen.p[pY])
	truth := s.truth(sc, mu)
	b.missed = s.missed(t, c, truth)
	full, err := s.refine(chosen)
	if err != nil {
		t.Errorf("shot %d: %s: %v", seed, b.about, err)
		return b
	}
	s.freeze(0, full)
	b.lower = s.again(t, 0, full.kind, full.p).chi2 - s.again(t, 0, full.kind, truth).chi2
	return b
}

// again minimises from start as close as it can.
func (s *session) again(t *testing.T, level int, k kind, start params) *state {
	st, err := s.run(level, k, start, 1e-3)
	if err != nil {
		t.Fatal(err)
	}
	return st
}

// missed is by how much, at the level of choices, the candidates from the truth change the
// choice: the decrease of χ² beyond what the better model needs.
func (s *session) missed(t *testing.T, c *candidates, truth params) float64 {
	was, model := s.choose(c)
	told := candidates{none: c.none}
	for _, k := range []struct {
		k  kind
		to **state
	}{{s.thermal(), &told.thermal}, {s.both(), &told.both}, {s.alone(), &told.alone}} {
		*k.to = s.again(t, s.work, k.k, truth)
	}
	strict := *s
	strict.opt.CondensateChi2++
	strict.opt.ThermalChi2++
	strict.opt.CloudChi2++
	now, other := strict.choose(&told)
	if other == model {
		return 0
	}
	return was.chi2 - now.chi2
}

// truth returns the parameters that the scene was drawn with.
func (s *session) truth(sc *scene, mu float64) (p params) {
	p[pX], p[pY] = sc.x, sc.y
	p[pWidth1] = 0.5 * math.Log(sc.T/templateT)
	p[pRadius1] = 0.5 * math.Log(mu/templateMu)
	p[pWidth2], p[pRadius2] = p[pWidth1], p[pRadius1]
	one := params{pThermal: 1, pCondensate: 1, pWidth1: p[pWidth1], pWidth2: p[pWidth2], pRadius1: p[pRadius1], pRadius2: p[pRadius2]}
	m, _ := s.tmpl.measured(&one, kind{thermal: true, condensate: true})
	p[pThermal] = sc.thermal / s.perSum() / m.ThermalSum
	p[pCondensate] = sc.condensate / s.perSum() / m.CondensateSum
	p[pLight] = s.levels[0].borderLight()
	return p
}

// peak is σ0 n at the centre.
func (sc *scene) peak(t *testing.T) float64 { return sc.column(t)(sc.x, sc.y) }

// randomScene draws the figures of a shot; it also returns μ in J. The number of atoms is that
// which gives the peak.
func randomScene(t *testing.T, seed uint64) (*scene, float64) {
	rng := rand.New(rand.NewPCG(seed, 17))
	between := func(a, b float64) float64 { return a + (b-a)*rng.Float64() }
	ratio := func(a, b float64) float64 { return a * math.Pow(b/a, rng.Float64()) }
	sc := &scene{lab: pancakeLab(t), seed: seed, read: 7, powerNoise: 0.02, hot: 2, second: true}
	if seed%2 == 1 {
		sc.lab = prolateLab(t)
	}
	side := [][2]int{{152, 136}, {200, 180}, {256, 256}}[rng.IntN(3)]
	sc.w, sc.h = side[0], side[1]
	sc.x, sc.y = between(0, float64(sc.w-1)), between(0, float64(sc.h-1))
	sc.flight, sc.electrons = between(8e-3, 22e-3), ratio(300, 5000)
	fraction, peak := between(0.01, 0.99), ratio(0.05, 6)
	low, high := math.Log(100), math.Log(1e9)
	var mu float64
	for range 60 {
		middle := 0.5 * (low + high)
		mu = sc.fill(t, math.Exp(middle), fraction)
		sc.second = false
		if sc.peak(t) < peak {
			low = middle
		} else {
			high = middle
		}
	}
	sc.second = true
	return sc, mu
}

// fill shares out atoms at the temperature where an ideal gas has the fraction condensed.
func (sc *scene) fill(t *testing.T, atoms, fraction float64) (mu float64) {
	sc.T = model.CriticalTemperature(atoms, sc.lab.Trap) * math.Cbrt(1-fraction)
	sc.condensate, sc.thermal = fraction*atoms, (1-fraction)*atoms
	mu, err := model.Mu(sc.condensate, sc.lab.Species.Mass, sc.lab.Species.ScatteringLength, sc.lab.Trap)
	if err != nil {
		t.Fatal(err)
	}
	return mu
}

// prolateLab is a rubidium machine of our own, long across the picture.
func prolateLab(t testing.TB) *Lab {
	t.Helper()
	rb, err := model.LookupSpecies("87Rb")
	if err != nil {
		t.Fatal(err)
	}
	return &Lab{
		Species: rb, Trap: model.TrapHz(24, 110, 120), View: model.View(0.15, 0, 0),
		Optics: Optics{Pixel: 3.2e-6, Blur: 3e-6, Alpha: 2, Saturation: 9000},
	}
}
