package imageio

import (
	"math/rand/v2"
	"testing"
)

// A checksum tells frames apart that differ in one pixel, in the order of pixels or of frames, in
// their shape or in which of them are there.
func TestSum(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 5))
	frames := func(w, h int, at ...Role) *Raw {
		raw := new(Raw)
		for _, r := range at {
			f := &Frame{Width: w, Height: h, Pix: make([]float32, w*h)}
			for i := range f.Pix {
				f.Pix[i] = float32(100 + i%17)
			}
			raw.Frames[r] = f
		}
		return raw
	}
	seen := map[uint64]string{}
	add := func(what string, raw *Raw) {
		t.Helper()
		sum := raw.Sum()
		if sum != raw.Sum() {
			t.Errorf("%s: two sums", what)
		}
		if other, ok := seen[sum]; ok {
			t.Errorf("%s has the sum of %s", what, other)
		}
		seen[sum] = what
	}
	add("none", new(Raw))
	add("two", frames(7, 5, Atoms, Light))
	add("two others", frames(7, 5, Atoms, Dark))
	add("turned", frames(5, 7, Atoms, Light))
	add("more", frames(7, 5, Atoms, Light, Dark))
	for i := range 35 {
		raw := frames(7, 5, Atoms, Light)
		raw.Frames[Light].Pix[i]++
		add("a pixel more", raw)
		raw = frames(7, 5, Atoms, Light)
		j := rng.IntN(34)
		if p := raw.Frames[Atoms].Pix; i != j && p[i] != p[j] {
			p[i], p[j] = p[j], p[i]
			if _, ok := seen[raw.Sum()]; !ok {
				add("two pixels changed over", raw)
			}
		}
	}
}

func BenchmarkSum(b *testing.B) {
	raw := new(Raw)
	raw.Frames[Atoms] = &Frame{Width: 1024, Height: 1024, Pix: make([]float32, 1<<20)}
	for b.Loop() {
		raw.Sum()
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/(1<<20), "ns/px")
}
