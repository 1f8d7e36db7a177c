package light

import (
	"context"
	"errors"
	"math"
	"slices"
	"strconv"
	"sync"
	"testing"

	"gonum.org/v1/gonum/mat"

	"fallshadow/imageio"
)

// TestAgainstLeastSquares holds the coefficients from sums over tiles against a plain
// least-squares solution, by gonum's QR, of all open blocks written out one by one.
func TestAgainstLeastSquares(t *testing.T) {
	for _, k := range []int{7, 3} { // for three frames the picture is a large one
		t.Run(strconv.Itoa(k), func(t *testing.T) { againstLeastSquares(t, k) })
	}
}

func againstLeastSquares(t *testing.T, k int) {
	const side = 150 // tiles at the right and lower edge are not whole
	s := newScene(side, side, 51).fringed(6, 0.06)
	s.jitter, s.power = 0.35, 0.05
	raws := s.night(k + 2)
	n := prepare(t, s.camera(), raws)
	e := expose(t, n, raws[4])
	cloud := disc(side, 70, 80, 40)
	cloud.Transmission = make([]float64, side*side)
	for i := range cloud.Transmission {
		cloud.Transmission[i] = 1 - 0.3*math.Exp(-float64((i%side-70)*(i%side-70))/900)
	}
	refs := NewReferences(n, k, len(raws), loader(raws))
	if refs.tiles.coarse != (k == 3) {
		t.Fatal("whole tiles are in the sums, or are not")
	}
	frames, err := refs.nearest(context.Background(), 4)
	if err != nil {
		t.Fatal(err)
	}
	open, _ := refs.openTiles(cloud)
	eq := refs.equations(frames, bare(e, cloud.Transmission), open)
	c, ok := eq.solve(eq.all())
	if !ok {
		t.Fatal("no solution")
	}
	rows, rhs := writtenOut(frames, e, cloud, open, refs)
	all := eq.all()
	for a := range k {
		row := make([]float64, k)
		row[a] = math.Sqrt(ridge * all.blocks * eq.noise[a])
		rows = append(rows, row...)
		rhs = append(rhs, row[a]*all.sum/all.blocks/float64(k))
	}
	var x mat.VecDense
	if err := x.SolveVec(mat.NewDense(len(rhs), k, rows), mat.NewVecDense(len(rhs), rhs)); err != nil {
		t.Fatal(err)
	}
	for a := range k {
		// light frames are kept as float32, their sums are not
		within(t, "coefficient", c[a], x.AtVec(a), 5e-6*math.Abs(x.AtVec(a))+1e-3)
	}
}

// writtenOut lists light frames (over their means) and the bare atoms frame in means over
// the 4x4 and, at twice their weight in each of four, the 8x8 blocks of open tiles, where the picture
// is large their 16x16, too.
func writtenOut(frames []*lightFrame, e *imageio.Exposure, cloud Cloud, open []bool, r *References) (rows, rhs []float64) {
	sizes := []int{4, 8}
	if r.tiles.coarse {
		sizes = append(sizes, 16)
	}
	for _, size := range sizes {
		for y := 0; y+size <= e.Height/4*4; y += size {
			for x := 0; x+size <= e.Width/4*4; x += size {
				if !open[y/16*r.tiles.across+x/16] {
					continue
				}
				row, b := make([]float64, len(frames)), 0.0
				weight := float64(size*size/16) / float64(size*size)
				for p := range size * size {
					i := (y+p/size)*e.Width + x + p%size
					b += weight * e.Atoms[i] / cloud.Transmission[i]
					for a, f := range frames {
						row[a] += weight * float64(f.pix[i]) / f.mean
					}
				}
				rows, rhs = append(rows, row...), append(rhs, b)
			}
		}
	}
	return rows, rhs
}

// TestMovingFringes is six fringes of 6 % whose phases jitter by 0.35 rad from frame to
// frame, forty shots, the pictures empty: under the place of a cloud, which the
// coefficients never saw, 8x8 blocks must lie within 1.1 of the white noise stated, for
// fringes that stand still otherwise or wander from shot to shot, coarse and fine. The
// scaled own frame stays far above.
func TestMovingFringes(t *testing.T) {
	const side, shots = 160, 40
	for _, c := range []struct {
		name   string
		wander float64
		finest float64 // period, px
	}{{"standing", 0, 12}, {"wandering", 2, 12}, {"standing, fine", 0, 5}} {
		s := newScene(side, side, 52)
		for k := range 6 {
			q, a := 2*math.Pi/(c.finest*(1+0.6*float64(k))), 2.4*float64(k)
			s.fringes = append(s.fringes, fringe{0.06, q * math.Cos(a), q * math.Sin(a), float64(k)})
		}
		s.jitter, s.wander, s.power, s.waist = 0.35, c.wander, 0.03, 240
		raws := s.night(shots)
		n := prepare(t, s.camera(), raws)
		refs := NewReferences(n, shots, shots, loader(raws))
		cloud := disc(side, 80, 80, 48)
		var basis, own, white, ownWhite float64
		for i, raw := range raws {
			e := expose(t, n, raw)
			out, err := refs.Apply(context.Background(), i, e, cloud)
			if err != nil {
				t.Fatal(err)
			}
			if out.Reference != "basis" {
				t.Errorf("%s, shot %d: reference %s", c.name, i, out.Reference)
			}
			got, w := blockPower(out, cloud.Mask, true, 8)
			basis, white = basis+got, white+w
			got, w = blockPower(e, cloud.Mask, true, 8)
			own, ownWhite = own+got, ownWhite+w
		}
		b, o := math.Sqrt(basis/white), math.Sqrt(own/ownWhite)
		t.Logf("%s: 8x8 blocks over white noise: basis %.3f, own %.2f", c.name, b, o)
		if !(b < 1.1) || !(o > 2) {
			t.Errorf("%s: basis %.3f, own %.2f", c.name, b, o)
		}
	}
}

// TestFaintCoarseFringes: in a large picture fringes of less than 1 %, as coarse as a cloud, are taken
// off to the white noise of blocks of 32x32 pixels under the cloud's place.
func TestFaintCoarseFringes(t *testing.T) {
	const side, shots = 400, 24
	s := newScene(side, side, 57)
	s.electrons, s.jitter, s.wander, s.power = 1500, 0.35, 1.5, 0.02
	for k := range 4 {
		q, a := 2*math.Pi/(40+25*float64(k)), 2.1*float64(k)
		s.fringes = append(s.fringes, fringe{0.006, q * math.Cos(a), q * math.Sin(a), float64(k)})
	}
	raws := s.night(shots)
	n := prepare(t, s.camera(), raws)
	refs := NewReferences(n, shots, shots, loader(raws))
	cloud := disc(side, 200, 190, 100)
	got, white := 0.0, 0.0
	for i, raw := range raws {
		out, err := refs.Apply(context.Background(), i, expose(t, n, raw), cloud)
		if err != nil {
			t.Fatal(err)
		}
		g, w := blockPower(out, cloud.Mask, true, 32)
		got, white = got+g, white+w
	}
	t.Logf("32x32 blocks over white noise: %.3f", math.Sqrt(got/white))
	if !(math.Sqrt(got/white) < 1.2) {
		t.Errorf("32x32 blocks are %.3f of white noise", math.Sqrt(got/white))
	}
}

// TestOwnFrameKept checks that the basis is left where it does not pay: light frames that
// have nothing to do with the atoms frame's fringes, which the own frame carries.
func TestOwnFrameKept(t *testing.T) {
	const side = 96
	var raws []*imageio.Raw
	for seed := range uint64(6) {
		s := newScene(side, side, 60+seed).fringed(20, 0.04)
		s.electrons = 20000
		raws = append(raws, s.shot())
	}
	s := newScene(side, side, 1)
	n := prepare(t, s.camera(), raws)
	refs := NewReferences(n, 6, len(raws), loader(raws))
	empty := Cloud{Mask: make([]bool, side*side)}
	kept := 0
	for i, raw := range raws {
		e := expose(t, n, raw)
		out, err := refs.Apply(context.Background(), i, e, empty)
		if err != nil {
			t.Fatal(err)
		}
		within(t, "own scale", out.Light[500]/e.Light[500], 1, 0.002)
		if out.Reference == "own" {
			kept++
		}
	}
	if kept == 0 {
		t.Error("the own frame is never kept")
	}
}

// TestApplyLeavesAlone lists what gives no new reference, and what is refused.
func TestApplyLeavesAlone(t *testing.T) {
	s := newScene(64, 64, 53)
	raws := s.night(4)
	n := prepare(t, s.camera(), raws)
	refs := NewReferences(n, 4, len(raws), loader(raws))
	e := expose(t, n, raws[0])
	ctx := context.Background()
	full := make([]bool, 64*64)
	for i := range full {
		full[i] = true
	}
	for name, cloud := range map[string]Cloud{"no mask": {}, "all masked": {Mask: full}} {
		out, err := refs.Apply(ctx, 0, e, cloud)
		if err != nil || out != e {
			t.Errorf("%s: %v", name, err)
		}
	}
	if _, err := refs.Apply(ctx, 0, e, Cloud{Mask: full[1:]}); err == nil {
		t.Error("a mask of the wrong size passes")
	}
	if _, err := refs.Apply(ctx, 9, e, disc(64, 0, 0, 1)); err == nil {
		t.Error("a shot outside the night passes")
	}
	stopped, stop := context.WithCancel(ctx)
	stop()
	if _, err := refs.Apply(stopped, 0, e, disc(64, 0, 0, 1)); !errors.Is(err, context.Canceled) {
		t.Errorf("after the stop: %v", err)
	}
}

// TestNearest checks the order of references: natural, ties to the earlier, unusable
// shots passed over, the shot itself first.
func TestNearest(t *testing.T) {
	s := newScene(48, 48, 54)
	raws := s.night(9)
	raws[3].Frames[imageio.Light] = nil
	n := prepare(t, s.camera(), raws)
	refs := NewReferences(n, 4, len(raws), loader(raws))
	for shot, want := range map[int][]int{5: {5, 4, 6, 7}, 0: {0, 1, 2, 4}, 8: {8, 7, 6, 5}, 2: {2, 1, 0, 4}} {
		got, err := refs.Set(context.Background(), shot)
		if err != nil || !slices.Equal(got, want) {
			t.Errorf("shot %d: %v (%v), want %v", shot, got, err, want)
		}
	}
}

// Frames that Expose refuses lend no light, whoever reads them; frames handed over need not be
// loaded.
func TestLend(t *testing.T) {
	s, raws := cloudy()
	swapped := *raws[1]
	swapped.Frames[imageio.Atoms], swapped.Frames[imageio.Light] = swapped.Frames[imageio.Light], swapped.Frames[imageio.Atoms]
	n := prepare(t, s.camera(), raws)
	raws[1] = &swapped
	load := func(_ context.Context, shot int) (*imageio.Raw, error) {
		if shot == 2 {
			t.Error("the shot handed over was loaded")
		}
		return raws[shot], nil
	}
	refs := NewReferences(n, 3, len(raws), load)
	refs.Offer(2, raws[2])
	got, err := refs.Set(context.Background(), 0)
	if err != nil || !slices.Equal(got, []int{0, 2}) {
		t.Errorf("shots %v lend light, %v; want 0 and 2", got, err)
	}
}

// TestExtend lets shots come one after another: the latest takes the light of those before.
func TestExtend(t *testing.T) {
	s := newScene(48, 48, 56)
	raws := s.night(5)
	n := prepare(t, s.camera(), raws)
	refs := NewReferences(n, 3, 1, loader(raws))
	for shot, want := range [][]int{{0}, {1, 0}, {2, 1, 0}, {3, 2, 1}, {4, 3, 2}} {
		refs.Extend(shot + 1)
		refs.Extend(shot) // a night never shrinks
		got, err := refs.Set(context.Background(), shot)
		if err != nil || !slices.Equal(got, want) {
			t.Errorf("shot %d: %v (%v), want %v", shot, got, err, want)
		}
	}
}

// TestSameBytes checks that neither the number of workers, nor the order of shots, nor a
// memory too short to keep the frames changes a bit of the light.
func TestSameBytes(t *testing.T) {
	const side, shots, k = 64, 24, 6
	s := newScene(side, side, 55).fringed(3, 0.06)
	s.jitter = 0.35
	raws := s.night(shots)
	n := prepare(t, s.camera(), raws)
	run := func(workers, step int) [][]float64 {
		refs := NewReferences(n, k, shots, loader(raws))
		lights := make([][]float64, shots)
		var wg sync.WaitGroup
		for w := range workers {
			wg.Go(func() {
				for j := w; j < shots; j += workers {
					i := j * step % shots
					e, err := n.Expose(raws[i])
					if err != nil {
						t.Error(err)
						return
					}
					out, err := refs.Apply(context.Background(), i, e, disc(side, 30, 30, float64(i)))
					if err != nil {
						t.Error(err)
						return
					}
					lights[i] = out.Light
				}
			})
		}
		wg.Wait()
		return lights
	}
	one := run(1, 1)
	for _, c := range [][2]int{{1, 1}, {2, 1}, {8, 7}} {
		for i, l := range run(c[0], c[1]) {
			if !slices.Equal(l, one[i]) {
				t.Fatalf("%d workers, step %d: shot %d differs", c[0], c[1], i)
			}
		}
	}
}
