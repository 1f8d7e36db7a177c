// Package synth draws the camera frames of absorption images: a probe with its shape,
// power noise and fringes, atoms that take light away by the saturated absorption law,
// optics that blur, a camera that counts. The cloud comes in as a function of position;
// nothing here is shared with the code that fits.
package synth

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
)

// Cloud is σ0 n at a point of the picture: x to the right and y downwards in pixels, the
// centre of the first pixel at (0,0). It must be finite and not negative.
type Cloud func(x, y float64) float64

// Scene is one shot before the camera.
type Scene struct {
	Width, Height int
	Cloud         Cloud // nil: no atoms
	// Granularity is the number of atoms in a whole pixel where σ0 n = 1, that is the
	// pixel's area over σ0. Above zero each cell of the sub-grid holds a Poisson number
	// of whole atoms; zero draws the smooth mean.
	Granularity float64
	Law         Law
	Probe       Probe
	Blur        float64 // optical resolution, rms in px
	// Oversample is the number of cells along a pixel on which the cloud and the light
	// are sampled; 0 takes 3, or more where the blur is too narrow for that.
	Oversample int
}

// Expected is the mean of what a camera counts, in electrons above the dark, row by row.
type Expected struct {
	Width, Height int
	Atoms, Light  []float64
}

// Frames are the pictures of one shot in counts, row by row.
type Frames struct {
	Width, Height      int
	Atoms, Light, Dark []uint16
}

// Planes returns the frames in the order atoms, light, dark.
func (f Frames) Planes() [][]uint16 { return [][]uint16{f.Atoms, f.Light, f.Dark} }

// maxSide bounds a picture's side; a larger one is taken for a mistake.
const maxSide = 1 << 14

func (s *Scene) check() error {
	bad := func(v float64) bool { return math.IsNaN(v) || math.IsInf(v, 0) || v < 0 }
	switch {
	case s.Width < 1 || s.Height < 1 || s.Width > maxSide || s.Height > maxSide:
		return fmt.Errorf("draw scene: a picture of %d by %d pixels; give 1 to %d each way", s.Width, s.Height, maxSide)
	case bad(s.Blur) || s.Blur > float64(min(s.Width, s.Height)):
		return fmt.Errorf("draw scene: blur of %g px; give an rms below the size of the picture", s.Blur)
	case bad(s.Granularity):
		return fmt.Errorf("draw scene: %g atoms per pixel at unit density; give zero or more", s.Granularity)
	case s.Oversample < 0 || s.Oversample > 32:
		return fmt.Errorf("draw scene: oversampling by %d; give 0 to 32", s.Oversample)
	}
	return errors.Join(s.Law.check(), s.Probe.check())
}

// Expect returns the mean counts of both frames. The light frame's probe differs from
// that of the atoms frame by power noise, slope noise and fringe jitter, drawn from rng.
//
// The transmitted light is sampled on the sub-grid, where the absorption law acts point
// by point, then blurred by a gaussian and integrated over the pixels in one step. Light
// from outside the frame enters by the blur as it would in a real picture.
func (s *Scene) Expect(rng *rand.Rand) (Expected, error) {
	if err := s.check(); err != nil {
		return Expected{}, err
	}
	phases := s.Probe.settle(rng)
	atoms, err := s.develop(s.Cloud, phases, rng)
	if err != nil {
		return Expected{}, err
	}
	light, err := s.develop(nil, phases, rng)
	return Expected{s.Width, s.Height, atoms, light}, err
}

// Draw exposes the atoms, light and dark frames of the scene on a sensor of its size.
// The same scene, sensor and generator state give the same counts.
func (s *Scene) Draw(sensor *Sensor, rng *rand.Rand) (Frames, error) {
	if sensor.width != s.Width || sensor.height != s.Height {
		return Frames{}, fmt.Errorf("draw scene: a picture of %dx%d on a sensor of %dx%d", s.Width, s.Height, sensor.width, sensor.height)
	}
	mean, err := s.Expect(rng)
	if err != nil {
		return Frames{}, err
	}
	return Frames{
		Width: s.Width, Height: s.Height,
		Atoms: sensor.Expose(mean.Atoms, rng),
		Light: sensor.Expose(mean.Light, rng),
		Dark:  sensor.Expose(nil, rng),
	}, nil
}

// develop returns the electrons per pixel of one frame, the probe behind the cloud.
func (s *Scene) develop(cloud Cloud, phases []float64, rng *rand.Rand) ([]float64, error) {
	q := s.cells()
	taps := spread(q, s.Blur)
	margin := (len(taps) - q) / 2
	xs := make([]float64, s.Width*q+2*margin)
	for i := range xs {
		xs[i] = cellAt(i-margin, q)
	}
	beam := s.Probe.beam(phases, xs, rng)
	row := make([]float64, len(xs))
	lines := make([][]float64, s.Height*q+2*margin)
	for j := range lines {
		y := cellAt(j-margin, q)
		beam.row(row, y)
		if err := s.absorb(row, cloud, xs, y, rng); err != nil {
			return nil, err
		}
		lines[j] = gather(make([]float64, s.Width), row, taps, q)
	}
	return stack(lines, s.Height, taps, q), nil
}

// absorb takes from a row of light what the cloud at height y keeps back.
func (s *Scene) absorb(row []float64, cloud Cloud, xs []float64, y float64, rng *rand.Rand) error {
	if cloud == nil {
		return nil
	}
	for i, light := range row {
		d := cloud(xs[i], y)
		if math.IsNaN(d) || math.IsInf(d, 0) || d < 0 {
			return fmt.Errorf("draw scene: cloud of σ0 n = %g at x %.2f, y %.2f px; a density is finite and not negative", d, xs[i], y)
		}
		row[i] = s.Law.through(s.grain(d, rng), light)
	}
	return nil
}

// cells returns the oversampling: the cell must not be wider than the blur, or the sum
// over cells is no longer the integral.
func (s *Scene) cells() int {
	if s.Oversample > 0 {
		return s.Oversample
	}
	if s.Blur <= 0 {
		return 3
	}
	return min(max(3, int(math.Ceil(1/s.Blur))), 9)
}

// grain replaces the mean density of a cell by that of a whole number of atoms.
func (s *Scene) grain(d float64, rng *rand.Rand) float64 {
	if s.Granularity == 0 {
		return d
	}
	q := float64(s.cells())
	perDensity := s.Granularity / (q * q)
	return poisson(d*perDensity, rng) / perDensity
}

// cellAt returns the centre of cell i in px, q cells to the pixel, cell 0 being the first
// of pixel 0.
func cellAt(i, q int) float64 { return (float64(i)+0.5)/float64(q) - 0.5 }
