package forecast

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"text/tabwriter"

	"fallshadow/fit/predict"
	"fallshadow/model"
)

// Caution is what the help and every forecast say.
const Caution = "A forecast says what a picture will show, not that a setting is safe: lasers, the currents of magnets and vacuum chambers can harm people and machines; keep to the rules of your laboratory."

const (
	nK = 1e9
	um = 1e6
)

// WriteText words the forecast: the gas, the table of flights, advice.
func (f *Forecast) WriteText(w io.Writer) error {
	out := bufio.NewWriter(w)
	f.writeGas(out)
	f.writeFlights(out)
	if err := f.writeAdvice(out); err != nil {
		return err
	}
	fmt.Fprintf(out, "\n%s\n", Caution)
	return out.Flush()
}

func (f *Forecast) writeGas(w io.Writer) {
	g, p := &f.Gas, &f.Plan
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	line := func(name, format string, a ...any) { fmt.Fprintf(t, "%s\t"+format+"\n", append([]any{name}, a...)...) }
	line("atoms", "%.4g", p.Atoms)
	line("temperature", "%.4g nK, T/Tc0 = %.3f", p.T*nK, g.Reduced)
	line("Tc0", "%.4g nK; finite size %+.2f %%", g.Tc0*nK, 100*g.FiniteSize)
	if !math.IsNaN(g.MeanField) {
		line("", "mean field %+.2f %%, with the measured second order, a coefficient quoted from memory, %+.2f %%", 100*g.MeanField, 100*g.BeyondMeanField)
	}
	line("condensate", "%.4g atoms, fraction %.4f (%s; 1 - t^3 is %.4f)", g.Condensate, g.Fraction(), g.Law, g.IdealFraction)
	if !math.IsNaN(g.Mu) {
		line("chemical potential", "%.4g nK (mu/k); N0 a/a_ho = %.3g", g.Mu/model.KB*nK, g.ThomasFermiParameter)
	}
	if !math.IsNaN(g.Collapse) {
		line("collapse", "N0 is %.2f of the number at which this condensate collapses", g.Collapse)
	}
	line("peak in the trap", "%.3g per um^3, phase-space density %.3g, entropy %.2f k an atom (ideal gas)", g.PeakDensity*1e-18, g.PhaseSpace, g.Entropy)
	t.Flush()
	for _, a := range f.Assumed {
		fmt.Fprintf(w, "assumed: %s\n", a)
	}
}

func (f *Forecast) writeFlights(w io.Writer) {
	px := f.Plan.Experiment.Optics.Pixel
	fmt.Fprintf(w, "\nthermal rms widths and condensate radii in um, in pixels of %.3g um; least statistical errors of one shot in per cent, of the fraction as it is; of the peak its %s:\n", px*um, f.depthName())
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintf(t, "flight/ms\twidth1\twidth2\tradius1\tradius2\twidth1/px\tradius1/px\tpeak %s\tN\tN0\tT\tmu\tfraction\t\n", f.divided("sigma0 n/alpha", "sigma0 n/a"))
	for i := range f.Sights {
		s := &f.Sights[i]
		e, g := &s.Errors, &f.Gas
		fmt.Fprintf(t, "%.4g\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t\n", s.Flight*1e3,
			cell("%.1f", s.Width[0]*um), cell("%.1f", s.Width[1]*um), cell("%.1f", s.Radius[0]*um), cell("%.1f", s.Radius[1]*um),
			cell("%.1f", s.Width[0]/px), cell("%.1f", s.Radius[0]/px), cell("%.2f", s.Depth),
			percent(e.Atoms/f.Plan.Atoms), percent(e.Condensate/g.Condensate), percent(e.T/f.Plan.T), percent(e.Mu/g.Mu),
			cell("%.2g", e.Fraction))
	}
	t.Flush()
}

// percent writes a relative error; how much above ten times the value it is tells nothing.
func percent(v float64) string {
	if v > 10 && !math.IsInf(v, 1) {
		return ">1000"
	}
	return cell("%.2g", 100*v)
}

func cell(format string, v float64) string {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return "-"
	}
	return fmt.Sprintf(format, v)
}

// depthName is what the depth of a sight is called.
func (f *Forecast) depthName() string {
	return "optical density (" + f.divided("sigma0 n/alpha", "sigma0 n/a, a = alpha (1 + 4 detuning_gamma^2)") + ")"
}

// divided chooses between the words for a probe on resonance and those for a detuned one.
func (f *Forecast) divided(resonant, detuned string) string {
	if f.Plan.Experiment.Optics.Detuning == 0 {
		return resonant
	}
	return detuned
}

// deep is the depth of a sight beyond which pictures are not to be trusted: multiple
// scattering and stray light bend the law (R. Veyron et al., Phys. Rev. Research 4, 033033
// (2022)).
const deep = 3

func (f *Forecast) writeAdvice(w io.Writer) error {
	fmt.Fprintln(w)
	thin, err := f.Plan.First(&f.Gas, f.request.From, f.request.To, func(s *predict.Sight) bool { return s.Depth < deep })
	if err != nil {
		return err
	}
	out, err := f.Plan.First(&f.Gas, f.request.From, f.request.To, func(s *predict.Sight) bool { return !f.Plan.Inside(s) })
	if err != nil {
		return err
	}
	fmt.Fprintln(w, "- "+f.depthAdvice(thin))
	fmt.Fprintln(w, "- "+f.wingAdvice(out))
	if !math.IsNaN(thin) && !math.IsNaN(out) && thin > out {
		fmt.Fprintln(w, "- no flight has both: detune the probe for a thinner cloud, or take a larger field of view")
	}
	for _, line := range f.warnings() {
		fmt.Fprintln(w, "- "+line)
	}
	return nil
}

func (f *Forecast) depthAdvice(thin float64) string {
	switch {
	case math.IsNaN(thin):
		return fmt.Sprintf("the peak %s stays above %d up to %.3g ms: fly longer or detune the probe", f.depthName(), deep, f.request.To*1e3)
	case thin <= f.request.From*1.002:
		return fmt.Sprintf("the peak %s is below %d at all these flights", f.depthName(), deep)
	}
	return fmt.Sprintf("the peak %s falls below %d after %.3g ms", f.depthName(), deep, thin*1e3)
}

func (f *Forecast) wingAdvice(out float64) string {
	w, h := f.Plan.Experiment.Width, f.Plan.Experiment.Height
	switch {
	case math.IsNaN(out):
		return fmt.Sprintf("the wings, to twice their rms, fit into the picture of %d x %d pixels at all these flights", w, h)
	case out <= f.request.From*1.002:
		return fmt.Sprintf("the wings do not fit into the picture of %d x %d pixels at any of these flights", w, h)
	}
	return fmt.Sprintf("the wings, to twice their rms, leave the picture of %d x %d pixels after %.3g ms", w, h, out*1e3)
}

// warnings are what else to look out for.
func (f *Forecast) warnings() (list []string) {
	say := func(on bool, format string, a ...any) {
		if on {
			list = append(list, fmt.Sprintf(format, a...))
		}
	}
	g, p := &f.Gas, &f.Plan
	last := f.Sights[len(f.Sights)-1]
	if best := f.best(); best != nil {
		say(true, "of these flights with a peak below %d and the wings inside, %.3g ms tells T of one shot best, to %.2g %%", deep, best.Flight*1e3, 100*best.Errors.T/p.T)
	}
	say(f.untold > 0, "after %d of these flights the picture does not tell the numbers of such a cloud (-)", f.untold)
	say(g.Condensate > 0 && last.Radius[1] < 3*p.Experiment.Optics.Blur, "the resolution is above a third of the condensate's radius even after the longest flight: it decides the result")
	say(g.Condensate > 0 && g.ThomasFermiParameter > 0 && g.ThomasFermiParameter < 30, "N0 a/a_ho of %.2g is small: the Thomas-Fermi form is off by several per cent in mu", g.ThomasFermiParameter)
	say(g.Collapse > 1, "so large a condensate collapses: its atoms will not be there")
	say(g.CollisionsPerRadian > 0.3, "atoms collide %.2g times in 1/omega of the tightest axis: the release is not free, and the widths along the axes will give different T (mean of the three is T)", g.CollisionsPerRadian)
	say(g.CollisionsPerRadian <= 0.3 && g.Slowest > 1, "atoms collide %.2g times in 1/omega of the loosest axis: it starts to expand hydrodynamically", g.Slowest)
	if s := p.Saturation(); s > 0 && !math.IsNaN(f.Exposure) {
		push := p.Push(f.Exposure)
		say(true, "an atom scatters %.3g photons in the pulse: Doppler shift %.2g Gamma at its end, recoil blur %.2g um rms", push.Photons, push.Doppler, push.Blur*um)
		say(push.Doppler > 0.25, "that shift changes the cross-section during the pulse: shorten or weaken it")
	}
	return list
}

// best returns the sight with the least error of T, below T itself, among those that can be
// trusted, nil without any.
func (f *Forecast) best() *predict.Sight {
	var best *predict.Sight
	for i := range f.Sights {
		s := &f.Sights[i]
		if s.Errors.T > 0 && s.Errors.T < f.Plan.T && s.Depth < deep && f.Plan.Inside(s) && (best == nil || s.Errors.T < best.Errors.T) {
			best = s
		}
	}
	return best
}
