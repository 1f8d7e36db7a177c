package light

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"fallshadow/imageio"
)

// TestMeanTrimmed holds the stated variance of the mean without its extremes against
// draws.
func TestMeanTrimmed(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	const draws = 40000
	for _, n := range []int{1, 2, 3, 4, 5, 8, 16, 40} {
		squares := 0.0
		v := make([]float64, n)
		for range draws {
			for i := range v {
				v[i] = rng.NormFloat64()
			}
			kept := v
			if n >= mastered {
				slices.Sort(v)
				kept = v[1 : n-1]
			}
			m := 0.0
			for _, x := range kept {
				m += x
			}
			m /= float64(len(kept))
			squares += m * m / draws
		}
		within(t, "variance", squares*meanTrimmed(n), 1, 0.035)
	}
}

// patterned gives the scene a camera with uneven columns and a slow wave.
func (s *scene) patterned() *scene {
	rng := rand.New(rand.NewPCG(9, 9))
	columns := make([]float64, s.width)
	for x := range columns {
		columns[x] = 4 * rng.NormFloat64()
	}
	s.pattern = func(i int) float64 {
		return columns[i%s.width] + 3*math.Sin(float64(i/s.width)/9)
	}
	return s
}

// leftover is the rms of atoms above their expected electrons over good pixels.
func leftover(e *imageio.Exposure, mean float64) (offset, rms float64) {
	var sum, squares, n float64
	for i, g := range e.Good {
		if d := e.Atoms[i] - mean; g {
			sum += d
			squares += d * d
			n++
		}
	}
	return sum / n, math.Sqrt(squares / n)
}

// TestDarks checks each way to a dark: what is left in the atoms frame, in mean and rms,
// is what Noise says.
func TestDarks(t *testing.T) {
	const shots, mean = 9, 2000.0
	night := func(drift float64) (*scene, []*imageio.Raw) {
		s := newScene(96, 96, 11).patterned()
		raws := make([]*imageio.Raw, shots)
		for i := range raws {
			s.offset = 104 + drift*float64(i)
			raws[i] = s.shot()
		}
		return s, raws
	}
	for _, c := range []struct {
		name          string
		drift         float64
		change        func(s *scene, i int, raw *imageio.Raw)
		shots         int
		variance      float64 // of the dark, electrons²
		shared, noted bool
	}{
		{"master", 0, nil, shots, 36 / meanTrimmed(shots), true, false},
		{"drifting offset", 3, nil, shots, 36 / meanTrimmed(shots), true, false},
		{"two shots", 0, nil, 2, 36, true, false},
		{"two frames", 0, func(s *scene, i int, raw *imageio.Raw) {
			if i == 4 {
				raw.Frames[imageio.Dark] = nil
			}
		}, shots, 36 / meanTrimmed(shots-1), true, false},
		{"two frames and drift", 3, func(s *scene, i int, raw *imageio.Raw) {
			if i == 4 {
				raw.Frames[imageio.Dark] = nil
			}
		}, shots, 36 / meanTrimmed(shots-1), true, true},
		{"four frames", 0, func(s *scene, i int, raw *imageio.Raw) {
			raw.Frames[imageio.DarkOfLight] = s.frame(nil)
		}, 1, 36, false, false},
		{"one dark saved with every shot", 0, func(s *scene, i int, raw *imageio.Raw) {
			if s.saved == nil {
				s.saved = raw.Frames[imageio.Dark]
			}
			raw.Frames[imageio.Dark] = s.saved
		}, shots, 36, true, false},
		{"an odd dark", 0, func(s *scene, i int, raw *imageio.Raw) {
			if i == 4 {
				for _, f := range raw.Frames {
					for j := range f2(f) {
						f.Pix[j] += float32(20 * math.Sin(float64(j%96)/20))
					}
				}
			}
		}, shots, 36, true, true},
	} {
		t.Run(c.name, func(t *testing.T) {
			s, raws := night(c.drift)
			raws = raws[:c.shots]
			for i, raw := range raws {
				if c.change != nil {
					c.change(s, i, raw)
				}
			}
			e := expose(t, prepare(t, s.camera(), raws), raws[min(4, c.shots-1)])
			within(t, "dark variance", e.Noise.Dark, c.variance, 0.06*c.variance)
			if e.Noise.DarkIsShared != c.shared || len(e.Notes) > 0 != c.noted {
				t.Errorf("shared %v, notes %v", e.Noise.DarkIsShared, e.Notes)
			}
			offset, rms := leftover(e, mean)
			want := math.Sqrt(mean + e.Noise.Read*e.Noise.Read + e.Noise.Dark)
			within(t, "mean", offset, 0, 5*want/96)
			within(t, "rms", rms, want, 0.03*want)
		})
	}
}

// f2 is the pixels of a frame that may be absent.
func f2(f *imageio.Frame) []float32 {
	if f == nil {
		return nil
	}
	return f.Pix
}

// TestHotPixels checks that hot and restless pixels are found from the darks, a strike in
// one dark costs nothing, and no good pixel is lost to an uneven pattern.
func TestHotPixels(t *testing.T) {
	s := newScene(96, 96, 12).patterned()
	raws := s.night(12)
	hot := map[int]float32{500: 65535, 4000: 120, 4001: 150, 4096: 300, 4097: 90}
	const restless, struck = 7000, 3000
	for i, raw := range raws {
		for _, f := range raw.Frames {
			for p, v := range hot {
				if f != nil {
					f.Pix[p] = min(f.Pix[p]+v, 65535)
				}
			}
			if f != nil {
				f.Pix[restless] += float32(40 * s.rng.NormFloat64())
			}
		}
		if i == 5 {
			raw.Frames[imageio.Dark].Pix[struck] += 3000
		}
	}
	n := prepare(t, s.camera(), raws)
	for p, b := range n.bad {
		_, isHot := hot[p]
		if want := isHot || p == restless; b != want {
			t.Errorf("pixel %d: bad %v, want %v", p, b, want)
		}
	}
	within(t, "bad pixels", float64(n.BadPixels()), float64(len(hot)+1), 0)
	if e := expose(t, n, raws[5]); !e.Good[struck] {
		t.Error("a pixel struck in one dark of twelve is lost")
	}
	within(t, "measured noise of the darks", n.DarkNoise, 6, 0.1)
}

// TestPrepareMajority checks that the size of most shots is the night's.
func TestPrepareMajority(t *testing.T) {
	odd, even := newScene(40, 40, 1), newScene(48, 32, 2)
	raws := append(odd.night(1), even.night(2)...)
	n := prepare(t, even.camera(), raws)
	if _, err := n.Expose(raws[1]); err != nil {
		t.Error(err)
	}
	if _, err := n.Expose(raws[0]); err == nil {
		t.Error("a shot of another size passes")
	}
}
