package light

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"fallshadow/imageio"
)

// steep is a dense cloud with a sharp edge and a bright ring outside it, as refraction
// draws it: optical density 6 falling to 0 within two pixels, light up by a fifth on a
// crest of about four.
func steep(x, y float64) float64 {
	r := math.Hypot((x-60)/1.7, y-64)
	return 3*(1-math.Tanh(r-14)) - 0.18*math.Exp(-(r-18)*(r-18)/4)
}

// TestFalseMasks checks that good pixels are not masked: at most one in ten thousand, for
// faint and bright light, dense clouds with sharp edges, and coarse and fine fringes.
func TestFalseMasks(t *testing.T) {
	condensate := func(x, y float64) float64 {
		u := 1 - (x-64)*(x-64)/36 - (y-64)*(y-64)/100
		return 5 * math.Pow(max(u, 0), 1.5)
	}
	for _, c := range []struct {
		name            string
		electrons, read float64
		depth           func(x, y float64) float64
		period          float64 // of fringes; 0: none
	}{
		{"one electron", 1, 0.5, nil, 0},
		{"twenty electrons", 20, 6, nil, 0},
		{"twenty electrons and a cloud", 20, 6, condensate, 0},
		{"bright", 30000, 6, nil, 0},
		{"small condensate", 2000, 6, condensate, 0},
		{"steep edge and ring", 9000, 6, steep, 0},
		{"fringes of 6 px", 9000, 6, condensate, 6},
		{"fringes of 20 px", 9000, 6, steep, 20},
	} {
		t.Run(c.name, func(t *testing.T) {
			s := newScene(128, 128, 21)
			s.electrons, s.read, s.depth, s.jitter = c.electrons, c.read, c.depth, 0.35
			for k := range 6 {
				if c.period > 0 {
					q, a := 2*math.Pi/c.period, float64(k)*1.1
					s.fringes = append(s.fringes, fringe{0.06, q * math.Cos(a), q * math.Sin(a), float64(k * k)})
				}
			}
			raws := s.night(4)
			n := prepare(t, s.camera(), raws)
			masked := 0
			for _, raw := range raws {
				for _, g := range expose(t, n, raw).Good {
					if !g {
						masked++
					}
				}
			}
			if limit := len(raws) * 128 * 128 / 10000; masked > limit {
				t.Errorf("%d of %d good pixels masked, at most %d allowed", masked, len(raws)*128*128, limit)
			}
		})
	}
}

// TestSuspects checks that a first glance passes over no pixel that the test behind it would find,
// at few and many counts and beside pixels that are no numbers.
func TestSuspects(t *testing.T) {
	const width, readVar = 512, 36
	rng := rand.New(rand.NewPCG(11, 4))
	for _, level := range []float64{0, 3, 100, 3000} {
		rows := make([]float64, 3*width)
		for i := range rows {
			rows[i] = level + math.Sqrt(level+readVar)*rng.NormFloat64()
			switch rng.IntN(200) {
			case 0, 1:
				rows[i] += 2000 * (rng.Float64() - 0.5)
			case 2:
				rows[i] = []float64{math.NaN(), math.Inf(1), math.Inf(-1)}[rng.IntN(3)]
			}
		}
		for _, holes := range []bool{false, true} {
			var got, want []int
			suspects(rows, width, readVar, holes, func(x int) { got = append(got, x) })
			for x := 1; x < width-1; x++ {
				v, near := rows[width+x], []float64{rows[width+x-1], rows[width+x+1], rows[x], rows[2*width+x]}
				low := min(near[0], near[1], near[2], near[3])
				if beyond(v-low, low, readVar) || holes && beyond(max(near[0], near[1], near[2], near[3])-v, v, readVar) {
					want = append(want, x)
				}
			}
			if len(want) < 3 || !slices.Equal(got, want) {
				t.Errorf("level %g, holes %v: got %v, want %v", level, holes, got, want)
			}
		}
	}
}

// TestStruckPixels checks that what struck a frame is masked, also two by two, at the
// picture's edge and inside a dense cloud, and that the mask goes no further than it did.
func TestStruckPixels(t *testing.T) {
	s := newScene(128, 128, 22)
	s.depth = steep
	raws := s.night(4)
	strikes := map[imageio.Role][]int{
		imageio.Atoms: {10*128 + 100, 64*128 + 60, 64*128 + 61, 65*128 + 60, 65*128 + 61, 127},
		imageio.Light: {100*128 + 20, 100*128 + 21},
	}
	const dead = 30*128 + 30
	struck := map[int]bool{dead: true}
	for role, pixels := range strikes {
		for _, p := range pixels {
			raws[1].Frames[role].Pix[p] += 800
			struck[p] = true
		}
	}
	for _, raw := range raws {
		raw.Frames[imageio.Atoms].Pix[dead], raw.Frames[imageio.Light].Pix[dead] = 104, 104
	}
	n := prepare(t, s.camera(), raws)
	e := expose(t, n, raws[1])
	for p, g := range e.Good {
		if g == struck[p] {
			t.Errorf("pixel %d: good %v, struck %v", p, g, struck[p])
		}
	}
}

// TestFill checks that filling reads good pixels only and reaches over a cluster.
func TestFill(t *testing.T) {
	const side = 9
	pix, bad := make([]float64, side*side), make([]bool, side*side)
	for i := range pix {
		pix[i] = 7
		if x, y := i%side, i/side; x >= 3 && x <= 6 && y >= 3 && y <= 6 {
			pix[i], bad[i] = math.NaN(), true
		}
	}
	fill(pix, side, bad)
	for _, v := range pix {
		within(t, "filled", v, 7, 0)
	}
	lost := []float64{math.NaN()}
	fill(lost, 1, []bool{true})
	within(t, "nothing to fill with", lost[0], 0, 0)
}
