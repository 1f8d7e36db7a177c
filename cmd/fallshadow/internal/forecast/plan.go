// Package forecast makes a planned shot of a laboratory's settings, and words and draws
// what package fit/predict says of it.
package forecast

import (
	"context"
	"errors"
	"fmt"
	"math"
	"runtime"
	"sync"

	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/fit/bound"
	"fallshadow/fit/predict"
	"fallshadow/model"
)

// Request is what a person plans beyond the settings.
type Request struct {
	Atoms    float64
	T        float64 // K; or
	Reduced  float64 // T/Tc⁰
	From, To float64 // shortest and longest flight, s
	// Intensity is I/Isat of the probe at the cloud, 0 for the usual one.
	Intensity     float64
	Width, Height int // of the picture in saved pixels, 0 for that of the settings
}

// RequestError says what is wrong with a request.
type RequestError struct{ text string }

func (e *RequestError) Error() string { return e.text }

// check refuses what is no cold gas, and no probe.
func (r *Request) check() error {
	const mostAtoms, mostT, mostReduced, mostIntensity = 1e12, 1e-3, 100, 1e3
	fail := func(format string, a ...any) error { return &RequestError{fmt.Sprintf(format, a...)} }
	switch {
	case !(r.Atoms >= 1 && r.Atoms <= mostAtoms):
		return fail("%g atoms: a plan is of 1 to %g", r.Atoms, mostAtoms)
	case r.T == 0 && r.Reduced == 0:
		return fail("a plan needs a temperature above 0: a picture without thermal atoms tells no T, and every real gas has some; take a low one, such as T/Tc0 = 0.2")
	case r.Reduced == 0 && !(r.T > 0 && r.T <= mostT):
		return fail("a temperature of %g nK: a plan is of a gas above 0 and up to %g nK", r.T*nK, mostT*nK)
	case r.T == 0 && !(r.Reduced > 0 && r.Reduced <= mostReduced):
		return fail("T/Tc0 = %g: a plan is of a gas above 0 and up to %d", r.Reduced, mostReduced)
	case !(r.Intensity >= 0 && r.Intensity <= mostIntensity):
		return fail("a probe of %g Isat: a plan is of above 0 and up to %g", r.Intensity, float64(mostIntensity))
	case !(r.From >= 0 && r.To > r.From):
		return fail("the flights need a shortest one below the longest")
	}
	return nil
}

// What is taken where neither settings nor request say it (common practice).
const (
	usualIntensity = 0.2
	usualElectrons = 2000 // a pixel, of a probe without counts_per_isat
	usualReadNoise = 6
	usualSide      = 512
)

// rows is the number of flights of the table.
const rows = 13

// Forecast is a plan seen after several flights.
type Forecast struct {
	Plan     predict.Plan
	Gas      predict.Gas
	Sights   []predict.Sight
	Smooth   []predict.Sight // more flights, without errors
	Assumed  []string        // what nobody stated
	Exposure float64         // s, NaN where the settings lack it
	request  Request
	untold   int // sights whose picture does not tell the numbers
}

// New makes the forecast. It fails where the settings or the request do not make a plan.
func New(ctx context.Context, s *settings.Settings, r Request) (*Forecast, error) {
	f := &Forecast{request: r, Exposure: math.NaN()}
	if s.Probe.ExposureUs.Given {
		f.Exposure = s.Probe.ExposureUs.Value * 1e-6
	}
	if s.Shots.Layout == "density" {
		return nil, errors.New("predict needs a camera that counts: the settings are of ready density images")
	}
	if err := r.check(); err != nil {
		return nil, err
	}
	if err := f.plan(s); err != nil {
		return nil, err
	}
	if f.Plan.T == 0 {
		f.Plan.T = r.Reduced * model.CriticalTemperature(r.Atoms, f.Plan.Experiment.Trap)
	}
	var err error
	if f.Gas, err = f.Plan.Gas(); err != nil {
		return nil, err
	}
	return f, f.look(ctx)
}

// plan fills in the experiment; f.Assumed notes what had to be made up.
func (f *Forecast) plan(s *settings.Settings) error {
	assume := func(format string, a ...any) { f.Assumed = append(f.Assumed, fmt.Sprintf(format, a...)) }
	own := *s
	if !own.Camera.ElectronsPerCount.Given {
		own.Camera.ElectronsPerCount = settings.Number{Value: 1, Given: true}
		if own.Probe.CountsPerIsat.Given {
			assume("1 electron per count")
		}
	}
	if !own.Camera.ReadNoise.Given {
		own.Camera.ReadNoise = settings.Number{Value: usualReadNoise, Given: true}
		assume("read noise of %d electrons", usualReadNoise)
	}
	lab, err := own.Lab()
	if err != nil {
		return err
	}
	intensity := f.request.Intensity
	if intensity == 0 {
		intensity = usualIntensity
	}
	light := intensity * lab.Optics.Saturation / (1 - lab.Optics.Stray) // what atoms can absorb is the rest
	switch {
	case math.IsInf(light, 1):
		light = usualElectrons * float64(own.Fit.Rebin*own.Fit.Rebin)
		assume("%d electrons a saved pixel of a weak probe, since counts_per_isat is not set", usualElectrons)
	case f.request.Intensity == 0:
		assume("a probe of %g Isat (--intensity)", usualIntensity)
	}
	w, h := f.size(&own, assume)
	rebin := own.Fit.Rebin
	w, h = w/rebin, h/rebin
	read := own.Camera.ReadNoise.Value * float64(rebin)
	f.Plan = predict.Plan{Atoms: f.request.Atoms, T: f.request.T, Experiment: bound.Experiment{
		Species: lab.Species, Trap: lab.Trap, View: lab.View, Release: lab.Release, Optics: bound.Optics(lab.Optics),
		Width: w, Height: h, X: float64(w-1) / 2, Y: float64(h-1) / 2,
		Light:     func(_, _ float64) float64 { return light },
		Noise:     bound.Noise{Read: read, LightShot: 1, LightRead: read * read},
		FreeAngle: own.Fit.Angle == "free",
	}}
	return nil
}

// size returns the sides of the picture in saved pixels.
func (f *Forecast) size(s *settings.Settings, assume func(string, ...any)) (w, h int) {
	switch {
	case f.request.Width > 0:
		return f.request.Width, f.request.Height
	case !s.Region.Auto():
		return s.Region.Width, s.Region.Height
	}
	assume("a picture of %d x %d saved pixels with the cloud in the middle (--picture)", usualSide, usualSide)
	return usualSide, usualSide
}

// look sees the plan after all flights; the errors are shared out to processors.
func (f *Forecast) look(ctx context.Context) error {
	const smooth = 8 // between two rows
	for i := range (rows-1)*smooth + 1 {
		flight := f.request.From + (f.request.To-f.request.From)*float64(i)/((rows-1)*smooth)
		s, err := f.Plan.See(&f.Gas, flight)
		if err != nil {
			return err
		}
		f.Smooth = append(f.Smooth, s)
		if i%smooth == 0 {
			f.Sights = append(f.Sights, s)
		}
	}
	errs := make([]error, len(f.Sights))
	next := make(chan int)
	var workers sync.WaitGroup
	for range runtime.GOMAXPROCS(0) {
		workers.Go(func() {
			for i := range next {
				errs[i] = f.Plan.Measure(ctx, &f.Gas, &f.Sights[i])
			}
		})
	}
	for i := range f.Sights {
		next <- i
	}
	close(next)
	workers.Wait()
	if ctx.Err() != nil {
		return context.Cause(ctx)
	}
	return f.settle(errs)
}

// settle leaves the errors of flights empty whose picture does not tell them, and fails
// where that is so after all flights.
func (f *Forecast) settle(errs []error) error {
	for i, err := range errs {
		if err != nil {
			nan := math.NaN()
			f.Sights[i].Errors = bound.Errors{T: nan, Thermal: nan, Condensate: nan, Atoms: nan, Fraction: nan, Mu: nan}
			f.untold++
		}
	}
	if f.untold < len(errs) {
		return nil
	}
	return &untoldError{f.Sights[0], f.Sights[len(f.Sights)-1], f.Plan.Experiment.Optics.Pixel, errors.Join(errs...)}
}

// untoldError says that no picture of a plan tells its numbers.
type untoldError struct {
	first, last predict.Sight
	pixel       float64
	cause       error
}

func (e *untoldError) Error() string {
	return fmt.Sprintf("no picture of these flights tells the numbers of such a cloud: from %.4g to %.4g ms its peak optical density (sigma0 n/alpha on resonance) goes from %.2g to %.2g and its half size along axis 1 from %.2g to %.2g pixels; check the number of atoms and the temperature, or take other flights or another picture",
		e.first.Flight*1e3, e.last.Flight*1e3, e.first.Depth, e.last.Depth, e.first.Reach[0]/e.pixel, e.last.Reach[0]/e.pixel)
}

func (e *untoldError) Unwrap() error { return e.cause }
