package synth

import (
	"fmt"
	"math"
	"math/rand/v2"
)

// Camera is what turns light into 16-bit counts:
//
//	counts = round(offset + pattern + (Poisson(light + dark) + read noise)/gain)
//
// held within 0 and the full scale.
type Camera struct {
	ElectronsPerCount float64 // > 0
	ReadNoise         float64 // electrons rms of one read
	Offset            float64 // mean counts without light
	OffsetPattern     float64 // fixed pattern of the offset, counts rms from pixel to pixel
	DarkElectrons     float64 // dark current, electrons per exposure
	FullScale         int     // largest count, up to 65535; 0 takes 65535
	Hot               int     // number of hot pixels
	HotElectrons      float64 // mean dark current of a hot pixel, electrons per exposure
	Seed              uint64  // of the fixed pattern and the places of hot pixels
}

// Sensor is a camera with its fixed pattern and its hot pixels. It is only read when
// frames are drawn, so several goroutines may share it.
type Sensor struct {
	Camera
	width, height int
	offset        []float64 // counts
	dark          []float64 // electrons per exposure
	hot           []int     // row*width + column
}

// sensorStream keeps the fixed pattern apart from any shot's numbers of the same seed.
const sensorStream = 0x5e2502

// NewSensor lays out the pixels of a camera; the same camera and size give the same
// sensor. It fails on figures that no camera can have.
func NewSensor(c Camera, width, height int) (*Sensor, error) {
	if c.FullScale == 0 {
		c.FullScale = math.MaxUint16
	}
	if err := c.check(width, height); err != nil {
		return nil, err
	}
	rng := rand.New(rand.NewPCG(c.Seed, sensorStream))
	s := &Sensor{Camera: c, width: width, height: height}
	s.offset = make([]float64, width*height)
	s.dark = make([]float64, width*height)
	for i := range s.offset {
		s.offset[i] = c.Offset + c.OffsetPattern*rng.NormFloat64()
		s.dark[i] = c.DarkElectrons
	}
	s.hot = rng.Perm(width * height)[:c.Hot]
	for _, i := range s.hot {
		s.dark[i] = c.HotElectrons * (0.5 + rng.Float64())
	}
	return s, nil
}

func (c Camera) check(width, height int) error {
	for _, v := range []float64{c.ReadNoise, c.Offset, c.OffsetPattern, c.DarkElectrons, c.HotElectrons} {
		if math.IsNaN(v) || math.IsInf(v, 0) || v < 0 {
			return fmt.Errorf("camera: a figure is %g; give finite numbers of zero or more", v)
		}
	}
	switch {
	case width < 1 || height < 1 || width > maxSide || height > maxSide:
		return fmt.Errorf("camera: a sensor of %d by %d pixels; give 1 to %d each way", width, height, maxSide)
	case !(c.ElectronsPerCount > 0) || math.IsInf(c.ElectronsPerCount, 0):
		return fmt.Errorf("camera: %g electrons per count; give a positive number", c.ElectronsPerCount)
	case c.FullScale < 1 || c.FullScale > math.MaxUint16:
		return fmt.Errorf("camera: full scale of %d counts; give 1 to %d", c.FullScale, math.MaxUint16)
	case c.Hot < 0 || c.Hot > width*height:
		return fmt.Errorf("camera: %d hot pixels of %d", c.Hot, width*height)
	}
	return nil
}

// HotPixels returns the places of the hot pixels as row*width + column.
func (s *Sensor) HotPixels() []int { return append([]int(nil), s.hot...) }

// Expose reads one frame of the expected electrons per pixel; nil is a dark frame.
func (s *Sensor) Expose(electrons []float64, rng *rand.Rand) []uint16 {
	counts := make([]uint16, len(s.offset))
	for i := range counts {
		mean := s.dark[i]
		if electrons != nil {
			mean += electrons[i]
		}
		charge := poisson(mean, rng) + s.ReadNoise*rng.NormFloat64()
		v := math.Round(s.offset[i] + charge/s.ElectronsPerCount)
		counts[i] = uint16(min(max(v, 0), float64(s.FullScale)))
	}
	return counts
}
