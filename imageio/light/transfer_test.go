package light

import (
	"context"
	"math"
	"slices"
	"testing"

	"fallshadow/imageio"
)

// TestPhotonTransfer measures cameras of known gain and read noise, the probe uneven, its
// power unsteady, its fringes moving, the camera patterned, pixels struck: gain within
// two percent, read noise within ten, both within four of their stated errors.
func TestPhotonTransfer(t *testing.T) {
	for _, c := range []struct{ gain, read, electrons float64 }{{1, 6, 2000}, {2.3, 12, 20000}, {0.25, 2, 300}, {0.45, 1.2, 8000}} {
		s := newScene(128, 128, 71).fringed(6, 0.06).patterned()
		s.gain, s.read, s.electrons = c.gain, c.read, c.electrons
		s.jitter, s.wander, s.power, s.waist = 0.35, 2, 0.05, 120
		raws := s.night(10)
		for i, raw := range raws {
			raw.Frames[imageio.Light].Pix[1000+300*i] += 5000
			raw.Frames[imageio.Dark].Pix[2000+500*i] += 5000
		}
		m, err := PhotonTransfer(context.Background(), Camera{FullScale: 65535}, each(raws))
		if err != nil {
			t.Fatal(err)
		}
		t.Logf("gain %g: %.4f ± %.4f; read %g: %.3f ± %.3f", c.gain, m.ElectronsPerCount, m.ElectronsPerCountErr, c.read, m.ReadNoise, m.ReadNoiseErr)
		read := math.Hypot(c.read, c.gain/math.Sqrt(12)) // rounding to whole counts is noise too
		within(t, "gain", m.ElectronsPerCount, c.gain, min(0.02*c.gain, 4*m.ElectronsPerCountErr))
		within(t, "read noise", m.ReadNoise, read, min(0.1*read, 4*m.ReadNoiseErr))

		n := prepare(t, Camera{FullScale: 65535}, raws)
		within(t, "gain of the night", n.Camera.ElectronsPerCount, m.ElectronsPerCount, 0)
		within(t, "read noise of the night", n.Camera.ReadNoise, read, 0.1*read)
	}
}

// TestTransferFromDarksOfTheNight measures the same camera from shots without darks of their
// own after three or more of the night's, and refuses where there is but one, or one twice.
func TestTransferFromDarksOfTheNight(t *testing.T) {
	s := newScene(128, 128, 73).patterned()
	s.gain, s.read, s.electrons, s.power, s.waist = 2.3, 12, 20000, 0.05, 120
	shots := s.night(10)
	var darks []*imageio.Raw
	for i, raw := range shots {
		lone := &imageio.Raw{}
		lone.Frames[imageio.Dark], raw.Frames[imageio.Dark] = raw.Frames[imageio.Dark], nil
		lone.Digest[0] = byte(i + 1)
		darks = append(darks, lone)
	}
	read := math.Hypot(s.read, s.gain/math.Sqrt(12))
	for _, most := range []int{3, 10} {
		m, err := PhotonTransfer(context.Background(), Camera{FullScale: 65535}, each(append(slices.Clone(darks[:most]), shots...)))
		if err != nil {
			t.Fatal(err)
		}
		within(t, "gain", m.ElectronsPerCount, s.gain, min(0.02*s.gain, 4*m.ElectronsPerCountErr))
		within(t, "read noise", m.ReadNoise, read, min(0.1*read, 4*m.ReadNoiseErr))
		if m.Pairs != 9 {
			t.Errorf("%d pairs", m.Pairs)
		}
	}
	for _, few := range [][]*imageio.Raw{nil, darks[:1], {darks[0], darks[0]}} {
		if m, err := PhotonTransfer(context.Background(), Camera{FullScale: 65535}, each(append(slices.Clone(few), shots...))); err == nil {
			t.Errorf("%d darks: %+v", len(few), m)
		}
	}
}

// TestTransferErrors checks the stated errors against the scatter over nights.
func TestTransferErrors(t *testing.T) {
	const nights = 40
	var gains, reads, gainErr, readErr [nights]float64
	for i := range nights {
		s := newScene(64, 64, uint64(100+i))
		s.waist = 60
		m, err := PhotonTransfer(context.Background(), Camera{}, each(s.night(4)))
		if err != nil {
			t.Fatal(err)
		}
		gains[i], reads[i], gainErr[i], readErr[i] = m.ElectronsPerCount, m.ReadNoise, m.ElectronsPerCountErr, m.ReadNoiseErr
	}
	// the scatter of 40 values is known to 11 percent
	within(t, "error of the gain", scatter(gains[:])/scatterMean(gainErr[:]), 1, 0.35)
	within(t, "error of the read noise", scatter(reads[:])/scatterMean(readErr[:]), 1, 0.35)
	within(t, "mean gain", scatterMean(gains[:]), 1, 4*scatterMean(gainErr[:])/math.Sqrt(nights))
}

func scatterMean(v []float64) float64 {
	sum := 0.0
	for _, x := range v {
		sum += x
	}
	return sum / float64(len(v))
}

func scatter(v []float64) float64 {
	m, sum := scatterMean(v), 0.0
	for _, x := range v {
		sum += (x - m) * (x - m)
	}
	return math.Sqrt(sum / float64(len(v)-1))
}

func TestTransferRefuses(t *testing.T) {
	s := newScene(64, 64, 72)
	one := s.night(1)
	dim := s.night(3)
	for _, raw := range dim {
		raw.Frames[imageio.Light] = s.frame(nil)
	}
	full := s.night(3)
	for name, c := range map[string]struct {
		camera Camera
		raws   []*imageio.Raw
	}{"one shot": {Camera{}, one}, "no light": {Camera{}, dim}, "saturated": {Camera{FullScale: 500}, full}, "nothing": {}} {
		if m, err := PhotonTransfer(context.Background(), c.camera, each(c.raws)); err == nil {
			t.Errorf("%s: %+v", name, m)
		}
	}
	if _, err := Prepare(context.Background(), Camera{}, each(one)); err == nil {
		t.Error("a night with neither gain nor a way to it passes")
	}
	if _, err := Prepare(context.Background(), Camera{ElectronsPerCount: 1}, each(one)); err == nil {
		t.Error("a night with neither read noise nor a way to it passes")
	}
}
