package light

import (
	"context"
	"math"
	"os"
	"testing"

	"fallshadow/imageio"
)

// TestLongNight compares the own light frame and the basis on a night of sixteen shots
// that was drawn apart from this program: what they leave in 8x8 blocks of tiles far from
// the cloud that no coefficient saw, over the white noise stated and, less that noise, in
// percent of the light. It needs the night's folder in FALLSHADOW_NIGHT_EVAP.
func TestLongNight(t *testing.T) {
	dir := os.Getenv("FALLSHADOW_NIGHT_EVAP")
	if dir == "" {
		t.Skip("FALLSHADOW_NIGHT_EVAP does not name the folder of the night")
	}
	ctx := context.Background()
	raws := readNight(t, ctx, dir)
	n := prepare(t, Camera{ElectronsPerCount: 1, ReadNoise: 6, FullScale: 65535}, raws)
	m, err := PhotonTransfer(ctx, Camera{FullScale: 65535}, each(raws))
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("photon transfer: %.4f ± %.4f electrons per count, read noise %.3f ± %.3f", m.ElectronsPerCount, m.ElectronsPerCountErr, m.ReadNoise, m.ReadNoiseErr)
	within(t, "gain", m.ElectronsPerCount, 1, 0.02)
	within(t, "read noise", m.ReadNoise, 6, 0.6)

	refs := NewReferences(n, len(raws), len(raws), loader(raws))
	cloud, judged := longNightMasks()
	var own, basis left
	for i, raw := range raws {
		e := expose(t, n, raw)
		bad := 0
		for _, g := range e.Good {
			if !g {
				bad++
			}
		}
		if bad != 6 || len(e.Notes) > 0 {
			t.Errorf("shot %d: %d bad pixels, six are hot; notes %v", i+1, bad, e.Notes)
		}
		ownOnly, err := refs.alone(ctx, i, e, cloud)
		if err != nil {
			t.Fatal(err)
		}
		out, err := refs.Apply(ctx, i, e, cloud)
		if err != nil {
			t.Fatal(err)
		}
		a, b := leave(ownOnly, judged), leave(out, judged)
		t.Logf("shot %2d: own %.3f of white noise, %s %.3f; shot noise of the light %.3f per electron", i+1, a.ratio(), out.Reference, b.ratio(), out.Noise.LightShot)
		own.add(a)
		basis.add(b)
	}
	t.Logf("night: own %.3f of white noise, coherent %.3f %% of the light; basis %.3f, coherent %.3f %%", own.ratio(), own.coherent(), basis.ratio(), basis.coherent())
	if !(basis.ratio() < 1.1) || !(basis.coherent() < own.coherent()) {
		t.Error("the basis leaves more than 1.1 of white noise, or more fringes than the own frame")
	}
}

// alone is the shot's own frame, scaled over the open tiles.
func (r *References) alone(ctx context.Context, shot int, e *imageio.Exposure, cloud Cloud) (*imageio.Exposure, error) {
	one := NewReferences(r.night, 1, r.shots, r.load)
	return one.Apply(ctx, shot, e, cloud)
}

// longNightMasks masks the cloud and one tile in five; judged are those tiles, off the cloud.
func longNightMasks() (cloud Cloud, judged []bool) {
	cloud = disc(320, 159, 165, 140)
	judged = make([]bool, len(cloud.Mask))
	for i, inCloud := range cloud.Mask {
		if (i%320/16+2*(i/320/16))%5 == 0 {
			judged[i], cloud.Mask[i] = !inCloud, true
		}
	}
	return cloud, judged
}

func readNight(t *testing.T, ctx context.Context, dir string) []*imageio.Raw {
	t.Helper()
	found, err := imageio.Scan(ctx, dir, imageio.Layout{})
	if err != nil {
		t.Fatal(err)
	}
	var raws []*imageio.Raw
	for _, shot := range found.Shots {
		raw, err := imageio.Read(ctx, dir, shot, imageio.Layout{})
		if err != nil {
			t.Fatal(err)
		}
		raws = append(raws, raw)
	}
	if len(raws) != 16 {
		t.Fatalf("%d shots, sixteen expected", len(raws))
	}
	return raws
}

// left is what a reference leaves in 8x8 blocks: squares, white squares, light squared.
type left struct{ got, white, light float64 }

func leave(e *imageio.Exposure, judged []bool) left {
	got, white := blockPower(e, judged, true, 8)
	l := left{got: got, white: white}
	count := 0.0
	for i, j := range judged {
		if j {
			l.light += e.Light[i] * e.Light[i]
			count++
		}
	}
	l.light *= math.Floor(count/64) / count
	return l
}

func (l *left) add(m left) {
	l.got += m.got
	l.white += m.white
	l.light += m.light
}

func (l left) ratio() float64 { return math.Sqrt(l.got / l.white) }

// coherent is in percent of the light; below zero where less than noise is left.
func (l left) coherent() float64 {
	d := (l.got - l.white) / l.light
	return 100 * math.Copysign(math.Sqrt(math.Abs(d)), d)
}
