package bound

import (
	"context"
	"fmt"

	"fallshadow/model"
)

// sight is what the absorption law and the camera make of the density at the truth. In a
// picture of density the light and the slope are 1 and the push is 0.
type sight struct {
	painter
	light   []float64 // electrons without atoms
	passed  []float64 // κ, the blurred fraction of it that is counted
	slope   []float64 // dt/d(σ0 n) of the sharp fraction
	push    []float64 // dt/d ln I of it
	weight  []float64 // 1/V
	taps    []float64
	scratch []float64
}

// newSight looks at the cloud with the parameters at. The gaussian that blurs the fraction
// has the variance s² + p²/12 in the object plane: resolution and pixel.
func newSight(ctx context.Context, e *Experiment, at *values) (*sight, error) {
	c, err := newPainter(e)
	if err != nil {
		return nil, err
	}
	n := e.Width * e.Height
	blur := e.Optics.Blur / e.Optics.Pixel
	s := &sight{
		painter: c, light: make([]float64, n), passed: make([]float64, n), slope: make([]float64, n),
		push: make([]float64, n), weight: make([]float64, n), scratch: make([]float64, n),
		taps: gaussianTaps(blur*blur + 1.0/12),
	}
	if err := s.density(ctx, at, s.passed); err != nil {
		return nil, err
	}
	if e.isDensity() {
		for i := range n {
			s.light[i], s.passed[i], s.slope[i], s.weight[i] = 1, 1, 1, 1/(e.DensitySigma*e.DensitySigma)
		}
		return s, nil
	}
	if err := s.expose(); err != nil {
		return nil, err
	}
	convolve(s.passed, s.scratch, e.Width, e.Height, s.taps)
	s.weigh()
	return s, nil
}

// expose turns the density in passed into the sharp fraction of the light.
func (s *sight) expose() error {
	o := &s.Optics
	law := model.Law{Alpha: o.Alpha, Detuning: o.Detuning, Stray: o.Stray}
	for i, od := range s.passed {
		x, y := i%s.Width, i/s.Width
		l := s.Light(float64(x), float64(y))
		if err := (setting{fmt.Sprintf("light of pixel (%d, %d)", x, y), l, false}).validate(); err != nil {
			return err
		}
		intensity := l * (1 - o.Stray) / o.Saturation
		t, dod, ds := law.TransmitDeriv(od, intensity)
		s.light[i], s.passed[i], s.slope[i], s.push[i] = l, t, dod, intensity*ds
	}
	return nil
}

func (s *sight) weigh() {
	n := &s.Noise
	for i, k := range s.passed {
		l := s.light[i]
		dark := 1 + k*k
		if n.DarkIsShared {
			dark = (1 - k) * (1 - k)
		}
		s.weight[i] = 1 / (k*l + n.Read*n.Read + k*k*(n.LightShot*l+n.LightRead) + dark*n.Dark)
	}
}

// column writes the derivative of the expected counts
//
//	M = k L (G * t(σ0 n, k I)),  k = exp(c + c_x (x−x̄)/w + c_y (y−ȳ)/h),
//
// by a parameter to dst: that of the density is a difference, the law's is exact.
func (s *sight) column(ctx context.Context, p Parameter, at *values, step float64, dst []float64) error {
	if p >= Light {
		for i := range dst {
			dst[i] = s.push[i] * s.plane(p, i)
		}
		convolve(dst, s.scratch, s.Width, s.Height, s.taps)
		for i := range dst {
			dst[i] = s.light[i] * (dst[i] + s.passed[i]*s.plane(p, i))
		}
		return nil
	}
	q := only(p, *at)
	err := richardson(dst, s.scratch, step, func(h float64, dst []float64) error {
		moved := q
		moved[p] += h
		return s.density(ctx, &moved, dst)
	})
	if err != nil {
		return err
	}
	for i := range dst {
		dst[i] *= s.slope[i]
	}
	convolve(dst, s.scratch, s.Width, s.Height, s.taps)
	for i := range dst {
		dst[i] *= s.light[i]
	}
	return nil
}

// plane is the derivative of ln k at pixel i.
func (s *sight) plane(p Parameter, i int) float64 {
	switch p {
	case LightX:
		return (float64(i%s.Width) - float64(s.Width-1)/2) / float64(s.Width)
	case LightY:
		return (float64(i/s.Width) - float64(s.Height-1)/2) / float64(s.Height)
	}
	return 1
}

// only empties the part that a parameter does not move.
func only(p Parameter, q values) values {
	switch p {
	case Thermal, T, Alpha:
		q[Condensate] = 0
	case Condensate, Mu:
		q[Thermal] = 0
	}
	return q
}
