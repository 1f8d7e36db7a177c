package light

import (
	"context"
	"iter"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"

	"fallshadow/imageio"
)

// scene draws small nights for tests: a probe with moving fringes, a cloud as a function
// of the pixel, shot noise and read noise, digitised.
type scene struct {
	width, height int
	electrons     float64 // of the probe at its centre
	waist         float64 // 1/e² radius of the probe, px; 0: flat
	power         float64 // rms of the logarithm of the probe's power, frame to frame
	fringes       []fringe
	jitter        float64 // rms phase of a fringe, frame to frame, rad
	wander        float64 // rms phase of a fringe, shot to shot, rad
	gain          float64 // electrons per count
	read          float64 // rms electrons
	offset        float64 // counts
	pattern       func(i int) float64
	depth         func(x, y float64) float64 // optical density
	saved         *imageio.Frame             // a dark that stands for all
	rng           *rand.Rand
}

type fringe struct{ contrast, kx, ky, phase float64 }

// newScene is a flat probe of 2000 electrons, read noise 6, one electron per count.
func newScene(width, height int, seed uint64) *scene {
	return &scene{width: width, height: height, electrons: 2000, gain: 1, read: 6, offset: 104,
		rng: rand.New(rand.NewPCG(seed, 1))}
}

// fringed adds n fringes of a contrast, periods 12 to 60 px.
func (s *scene) fringed(n int, contrast float64) *scene {
	for range n {
		k, a := 2*math.Pi/(12+48*s.rng.Float64()), 2*math.Pi*s.rng.Float64()
		s.fringes = append(s.fringes, fringe{contrast, k * math.Cos(a), k * math.Sin(a), 2 * math.Pi * s.rng.Float64()})
	}
	return s
}

// probe draws the mean light of one frame about the phases of its shot.
func (s *scene) probe(phases []float64) []float64 {
	out := make([]float64, s.width*s.height)
	scale := s.electrons * math.Exp(s.power*s.rng.NormFloat64())
	moved := make([]float64, len(phases))
	for k, p := range phases {
		moved[k] = p + s.jitter*s.rng.NormFloat64()
	}
	for i := range out {
		x, y := float64(i%s.width), float64(i/s.width)
		v := scale
		if s.waist > 0 {
			dx, dy := x-float64(s.width)/2, y-float64(s.height)/2
			v *= math.Exp(-2 * (dx*dx + dy*dy) / (s.waist * s.waist))
		}
		f := 1.0
		for k, r := range s.fringes {
			f += r.contrast * math.Cos(r.kx*x+r.ky*y+moved[k])
		}
		out[i] = v * f
	}
	return out
}

// read out a frame of mean electrons; nil is a dark.
func (s *scene) frame(mean []float64) *imageio.Frame {
	f := &imageio.Frame{Width: s.width, Height: s.height, Pix: make([]float32, s.width*s.height)}
	for i := range f.Pix {
		e := s.read * s.rng.NormFloat64()
		if mean != nil {
			e += distuv.Poisson{Lambda: mean[i], Src: s.rng}.Rand()
		}
		c := s.offset + e/s.gain
		if s.pattern != nil {
			c += s.pattern(i)
		}
		f.Pix[i] = float32(math.Round(c))
	}
	return f
}

// shot draws atoms, light and dark.
func (s *scene) shot() *imageio.Raw {
	phases := make([]float64, len(s.fringes))
	for k, r := range s.fringes {
		phases[k] = r.phase + s.wander*s.rng.NormFloat64()
	}
	behind := s.probe(phases)
	if s.depth != nil {
		for i := range behind {
			behind[i] *= math.Exp(-s.depth(float64(i%s.width), float64(i/s.width)))
		}
	}
	raw := &imageio.Raw{}
	raw.Frames[imageio.Atoms] = s.frame(behind)
	raw.Frames[imageio.Light] = s.frame(s.probe(phases))
	raw.Frames[imageio.Dark] = s.frame(nil)
	return raw
}

func (s *scene) night(shots int) []*imageio.Raw {
	raws := make([]*imageio.Raw, shots)
	for i := range raws {
		raws[i] = s.shot()
	}
	return raws
}

// camera is what a lab would state of the scene's camera.
func (s *scene) camera() Camera {
	return Camera{ElectronsPerCount: s.gain, ReadNoise: s.read, FullScale: 65535}
}

func each(raws []*imageio.Raw) iter.Seq[*imageio.Raw] {
	return func(yield func(*imageio.Raw) bool) {
		for _, r := range raws {
			if !yield(r) {
				return
			}
		}
	}
}

func loader(raws []*imageio.Raw) func(context.Context, int) (*imageio.Raw, error) {
	return func(_ context.Context, i int) (*imageio.Raw, error) { return raws[i], nil }
}

func prepare(t testing.TB, c Camera, raws []*imageio.Raw) *Night {
	t.Helper()
	n, err := Prepare(context.Background(), c, each(raws))
	if err != nil {
		t.Fatal(err)
	}
	return n
}

func expose(t testing.TB, n *Night, raw *imageio.Raw) *imageio.Exposure {
	t.Helper()
	e, err := n.Expose(raw)
	if err != nil {
		t.Fatal(err)
	}
	return e
}

// within fails unless |got - want| <= tol; a NaN fails.
func within(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if d := math.Abs(got - want); !(d <= tol) {
		t.Errorf("%s: got %.6g, want %.6g within %.2g", what, got, want, tol)
	}
}
