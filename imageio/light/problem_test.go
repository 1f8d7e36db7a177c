package light

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"fallshadow/imageio"
)

// cloudy is a night of three shots with a cloud in the middle and fringes that move.
func cloudy() (*scene, []*imageio.Raw) {
	s := newScene(96, 96, 31).fringed(4, 0.05)
	s.jitter, s.power, s.waist = 0.35, 0.03, 120
	s.depth = func(x, y float64) float64 {
		return 2 * math.Exp(-(x-50)*(x-50)/200-(y-44)*(y-44)/400)
	}
	return s, s.night(3)
}

// TestProblems drives every problem of the table once. The shot in question is the second.
func TestProblems(t *testing.T) {
	const light, atoms, dark = imageio.Light, imageio.Atoms, imageio.Dark
	all := func(v float32) func(f *imageio.Frame) {
		return func(f *imageio.Frame) {
			for i := range f.Pix {
				f.Pix[i] = v
			}
		}
	}
	brighten := func(f *imageio.Frame, by float32) {
		for i := range f.Pix {
			f.Pix[i] = 104 + by*(f.Pix[i]-104)
		}
	}
	cases := map[string]func(s *scene, raw *imageio.Raw){
		NoAtoms:   func(_ *scene, raw *imageio.Raw) { raw.Frames[atoms] = nil },
		NoLight:   func(_ *scene, raw *imageio.Raw) { raw.Frames[light] = nil },
		NoDark:    func(_ *scene, raw *imageio.Raw) { raw.Frames[dark] = nil },
		WrongSize: func(_ *scene, raw *imageio.Raw) { raw.Frames[light] = newScene(90, 96, 1).frame(nil) },
		Blank:     func(_ *scene, raw *imageio.Raw) { all(0)(raw.Frames[atoms]) },
		Saturated: func(_ *scene, raw *imageio.Raw) { brighten(raw.Frames[light], 30) },
		EmptyProbe: func(s *scene, raw *imageio.Raw) {
			raw.Frames[light], raw.Frames[atoms] = s.frame(nil), s.frame(nil)
		},
		Unlit: func(s *scene, raw *imageio.Raw) { raw.Frames[atoms] = s.frame(nil) },
		Exchanged: func(_ *scene, raw *imageio.Raw) {
			raw.Frames[atoms], raw.Frames[light] = raw.Frames[light], raw.Frames[atoms]
		},
		PartSaturate: func(_ *scene, raw *imageio.Raw) { all(65535)(&imageio.Frame{Pix: raw.Frames[light].Pix[960:980]}) },
		Brighter:     func(_ *scene, raw *imageio.Raw) { brighten(raw.Frames[atoms], 1.3) },
		Power:        func(_ *scene, raw *imageio.Raw) { brighten(raw.Frames[light], 1.5) },
		OddDark: func(_ *scene, raw *imageio.Raw) {
			for i := range raw.Frames[dark].Pix {
				raw.Frames[dark].Pix[i] += float32(i % 96)
			}
		},
		Drift: func(_ *scene, raw *imageio.Raw) { raw.Frames[dark] = nil },
		ManyBad: func(_ *scene, raw *imageio.Raw) {
			all(float32(math.NaN()))(&imageio.Frame{Pix: raw.Frames[light].Pix[960:1060]})
		},
	}
	for _, p := range Problems {
		t.Run(p.Word, func(t *testing.T) {
			change, ok := cases[p.Word]
			if !ok {
				t.Fatal("no case drives this problem")
			}
			s, raws := cloudy()
			if p.Word == Drift {
				s.offset += 20
				raws = append(raws, s.night(2)...)
			}
			change(s, raws[1])
			night := raws
			if p.Word == NoDark {
				night = raws[1:2]
			}
			c := s.camera()
			if p.Word == Saturated {
				c.FullScale = 4095
			}
			e, err := prepare(t, c, night).Expose(raws[1])
			if !p.Fatal {
				if err != nil || !slices.Contains(e.Notes, p.Word) {
					t.Fatalf("exposure with error %v, notes %v", err, e)
				}
				return
			}
			var problem *Error
			if !errors.As(err, &problem) || problem.Word != p.Word {
				t.Fatalf("got %v", err)
			}
			if !strings.Contains(err.Error(), p.What) || !strings.Contains(err.Error(), p.Do) {
				t.Errorf("the error says neither what nor what to do: %v", err)
			}
		})
	}
}

func TestExplain(t *testing.T) {
	if _, ok := Explain("no such word"); ok {
		t.Error("an unknown word is explained")
	}
	seen := map[string]bool{}
	for _, p := range Problems {
		if p.Word == "" || p.What == "" || p.Do == "" || seen[p.Word] {
			t.Errorf("row %+v is not whole or stands twice", p)
		}
		seen[p.Word] = true
	}
}

// TestSoundShots checks that nothing is said of sound shots, faint and bright, with a
// dense, a wide and no cloud, with a narrow and a broad unsteady probe; and that each with
// a cloud is known when its frames are exchanged.
func TestSoundShots(t *testing.T) {
	for _, cloud := range []struct {
		name  string
		depth func(x, y float64) float64
	}{
		{"none", nil},
		{"wide", func(x, y float64) float64 { return 3 * math.Exp(-(x-48)*(x-48)/400-(y-48)*(y-48)/400) }},
		{"tight", func(x, y float64) float64 { return 6 * math.Exp(-(x-20)*(x-20)/16-(y-70)*(y-70)/60) }},
		{"steep", steep},
	} {
		for _, electrons := range []float64{20, 300, 20000} {
			for _, waist := range []float64{0, 70} {
				s := newScene(96, 96, 33).fringed(6, 0.06)
				s.depth, s.electrons, s.waist, s.jitter, s.power = cloud.depth, electrons, waist, 0.5, 0.04
				raws := s.night(4)
				n := prepare(t, s.camera(), raws)
				for i, raw := range raws {
					e, err := n.Expose(raw)
					if err != nil {
						t.Fatalf("cloud %s, %g electrons, waist %g, shot %d: %v", cloud.name, electrons, waist, i, err)
					}
					if len(e.Notes) > 0 {
						t.Errorf("cloud %s, %g electrons, waist %g, shot %d: %v, scale %.3f", cloud.name, electrons, waist, i, e.Notes, e.Noise.LightShot)
					}
					swapped := *raw
					swapped.Frames[imageio.Atoms], swapped.Frames[imageio.Light] = raw.Frames[imageio.Light], raw.Frames[imageio.Atoms]
					var problem *Error
					if _, err := n.Expose(&swapped); cloud.depth != nil && !(errors.As(err, &problem) && problem.Word == Exchanged) {
						t.Errorf("cloud %s, %g electrons, waist %g, shot %d exchanged: %v", cloud.name, electrons, waist, i, err)
					}
				}
			}
		}
	}
}
