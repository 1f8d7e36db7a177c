package light

import (
	"context"
	"slices"
	"testing"

	"fallshadow/imageio"
)

// TestCopiesLendNoLight: a night in which every shot stands twice has the noise, the gain and
// the references of the night without copies.
func TestCopiesLendNoLight(t *testing.T) {
	const side = 128
	s := newScene(side, side, 61).fringed(3, 0.05)
	s.jitter, s.power, s.waist = 0.3, 0.05, 90
	raws := s.night(8)
	var twice []*imageio.Raw
	for i, r := range raws {
		r.Digest[0] = byte(i + 1)
		again := *r
		twice = append(twice, r, &again)
	}
	unknown := Camera{FullScale: 65535}
	n, m := prepare(t, unknown, raws), prepare(t, unknown, twice)
	within(t, "read noise", m.Camera.ReadNoise, n.Camera.ReadNoise, 0)
	within(t, "gain", m.Camera.ElectronsPerCount, n.Camera.ElectronsPerCount, 0)
	within(t, "variance of the dark", m.DarkVariance, n.DarkVariance, 0)

	plain, copied := NewReferences(n, 16, len(raws), loader(raws)), NewReferences(m, 16, len(twice), loader(twice))
	cloud := disc(side, 64, 64, 30)
	for i, raw := range raws {
		want, err := plain.Apply(context.Background(), i, expose(t, n, raw), cloud)
		if err != nil {
			t.Fatal(err)
		}
		if want.Reference != "basis" {
			t.Fatalf("shot %d: reference %s tells nothing of copies", i, want.Reference)
		}
		for _, at := range []int{2 * i, 2*i + 1} {
			got, err := copied.Apply(context.Background(), at, expose(t, m, twice[at]), cloud)
			if err != nil {
				t.Fatal(err)
			}
			within(t, "shot noise of the light", got.Noise.LightShot, want.Noise.LightShot, 1e-9)
			within(t, "light", got.Light[40*side+40], want.Light[40*side+40], 1e-6*want.Light[40*side+40])
		}
	}
	set, err := copied.Set(context.Background(), 5)
	if err != nil {
		t.Fatal(err)
	}
	slices.Sort(set)
	if want := []int{1, 3, 5, 6, 8, 10, 12, 14}; !slices.Equal(set, want) {
		t.Errorf("lights %v, want %v", set, want)
	}
}
