package check

import (
	"fmt"
	"math"
	"slices"

	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/fit"
	"fallshadow/imageio"
	"fallshadow/model"
)

// The limits of the cautions. At a Doppler shift of a tenth of the linewidth the
// cross-section has fallen by 4 % at the end of the pulse; a recoil blur of a third of the
// resolution widens the spot by 5 %. middling is an efficiency in the plausible range.
const (
	mostShift = 0.1
	mostBlur  = 1.0 / 3
	middling  = 0.5
)

// lightAt returns the median of the light inside the ellipse of the cloud about a place in an
// exposure, or in the whole picture where none was found.
func lightAt(e *imageio.Exposure, x, y float64, r *fit.Result, pixel float64) float64 {
	if e.Light == nil {
		return math.NaN()
	}
	half := func(i int) float64 {
		a := 0.0
		for _, size := range []float64{r.Width[i], r.Radius[i]} {
			if size > a {
				a = size
			}
		}
		return max(a/pixel, 2)
	}
	a, b := half(0), half(1)
	sin, cos := math.Sincos(r.Angle)
	var inside []float64
	for i, v := range e.Light {
		dx, dy := float64(i%e.Width)-x, float64(i/e.Width)-y
		u, w := (dx*cos+dy*sin)/a, (dy*cos-dx*sin)/b
		if e.Good[i] && (r.Model == fit.ModelNone || u*u+w*w <= 1) {
			inside = append(inside, v)
		}
	}
	return median(inside)
}

func median(v []float64) float64 {
	if len(v) == 0 {
		return math.NaN()
	}
	slices.Sort(v)
	return (v[(len(v)-1)/2] + v[len(v)/2]) / 2
}

// writeProbe tells what light the atoms see and what it does to them.
func (v *visit) writeProbe() {
	if v.Settings.Shots.Layout == "density" {
		v.writeDensity()
		return
	}
	v.page.title("Probe")
	v.writeEfficiency()
	var lights []float64
	for _, f := range v.fitted {
		if !math.IsNaN(f.light) {
			lights = append(lights, f.light)
		}
	}
	if len(lights) == 0 {
		return
	}
	level := median(lights)
	rebin := float64(v.Settings.Fit.Rebin * v.Settings.Fit.Rebin)
	o := v.look.Lab.Optics
	v.page.pair("light", "%s electrons a saved pixel in the cloud's place (median)", digits(level/rebin, 4))
	s := level * (1 - o.Stray) / o.Saturation
	v.writeIntensity(s)
	v.writeDensest(s)
}

// writeIntensity tells of I/Isat and of the photons that atoms scatter.
func (v *visit) writeIntensity(s float64) {
	sp, o, exposure := v.look.Lab.Species, v.look.Lab.Optics, v.Settings.Probe.ExposureUs
	if math.IsInf(o.Saturation, 1) {
		v.page.pair("I/Isat", "not known: counts_per_isat is not given")
		return
	}
	v.page.pair("I/Isat", "%.3g in the cloud's place", s)
	if !exposure.Given {
		v.page.pair("photons", "not known: exposure_us is not given")
		return
	}
	tau := exposure.Value * 1e-6
	photons := model.Law{Alpha: o.Alpha, Detuning: o.Detuning, Stray: o.Stray}.PhotonsScattered(tau, s, sp.Linewidth)
	shift := sp.DopplerShift(photons) / (sp.Linewidth / (2 * math.Pi))
	blur := sp.RecoilBlur(photons, tau) * 1e6
	v.page.pair("photons", "%.3g scattered by an atom in %g us", photons, exposure.Value)
	v.page.pair("Doppler shift", "%.2g of the linewidth at the end of the pulse; the limit of caution is %g", shift, mostShift)
	spot := v.Settings.Camera.ResolutionUm.Value
	if spot == 0 {
		spot = o.Pixel * 1e6
	}
	v.page.pair("recoil", "atoms move %.2g um along the beam; blur %.2g um rms, the limit of caution is %.2g",
		sp.RecoilPush(photons, tau)*1e6, blur, spot*mostBlur)
	if shift > mostShift {
		v.trouble.caution("", "an atom scatters %.3g photons and is shifted out of resonance by %.2g linewidths: the number of atoms comes out low; weaken or shorten the probe, or calibrate alpha with this very pulse",
			photons, shift)
	}
	if blur > spot*mostBlur {
		v.trouble.caution("", "an atom scatters %.3g photons, whose recoil blurs the cloud by %.2g um: weaken or shorten the probe", photons, blur)
	}
}

// writeEfficiency recomputes counts_per_isat from Isat, exposure, pixel and an efficiency.
func (v *visit) writeEfficiency() {
	s := v.look.Settings
	given := s.Probe.CountsPerIsat
	one := *s
	one.Probe.CountsPerIsat = settings.Quantity{Value: 1, Given: true}
	perCount := one.Efficiency()
	if math.IsNaN(perCount) {
		v.page.pair("counts at Isat", "%s; exposure_us is not given, so that they cannot be recomputed", givenOrNot(given))
		return
	}
	v.page.pair("counts at Isat", "%s; Isat x exposure x pixel area is %s photons, so that at an efficiency of %g it would be %s",
		givenOrNot(given), digits(s.Camera.ElectronsPerCount.Value/perCount, 4), middling, digits(middling/perCount, 4))
	if !given.Given {
		return
	}
	e := s.Efficiency()
	v.page.pair("efficiency", "%.3g electrons a photon, by counts_per_isat; %g to %g is plausible", e, settings.LeastEfficiency, settings.MostEfficiency)
	if e < settings.LeastEfficiency || e > settings.MostEfficiency {
		v.trouble.problem("", "counts_per_isat = %g means %.3g electrons for a photon that passes the atoms, where %g to %g is plausible: check it, electrons_per_count, exposure_us and the pixel (at %g it would be %s)",
			given.Value, e, settings.LeastEfficiency, settings.MostEfficiency, middling, digits(middling/perCount, 4))
	}
}

func givenOrNot(q settings.Quantity) string {
	if q.Given {
		return fmt.Sprintf("%g given", q.Value)
	}
	return "not given"
}

// writeDensest tells of the densest cloud that was fitted, in light of s = I/Isat.
func (v *visit) writeDensest(s float64) {
	peak, name := v.densest()
	if name == "" {
		return
	}
	o := v.look.Lab.Optics
	law := model.Law{Alpha: o.Alpha, Detuning: o.Detuning, Stray: o.Stray}
	apparent := -math.Log(law.Transmit(peak, s))
	text := fmt.Sprintf("%.3g in %s, %s, where %.2g %% of the light comes through", peak, name, v.opticalDensity(peak), 100*math.Exp(-apparent))
	if o.Stray > 0 {
		text += fmt.Sprintf("; stray light caps ln(I0/I) at %.3g", law.Ceiling())
	}
	v.page.pair("peak sigma0 n", "%s", text)
}

// opticalDensity tells what a weak probe at its detuning would see of a peak of sigma0 n.
func (v *visit) opticalDensity(peak float64) string {
	o := v.look.Lab.Optics
	if o.Detuning == 0 {
		return fmt.Sprintf("optical density (sigma0 n/alpha) %.3g", peak/o.Alpha)
	}
	return fmt.Sprintf("optical density (sigma0 n/a, a = alpha (1 + 4 detuning_gamma^2)) %.3g", peak/(o.Alpha*(1+4*o.Detuning*o.Detuning)))
}

func (v *visit) densest() (peak float64, name string) {
	for _, f := range v.fitted {
		if od := f.facts.Fit.PeakOD; od > peak {
			peak, name = od, v.look.Shots[f.shot].Name
		}
	}
	return peak, name
}

// From this blur, in parts of the smallest radius or width, and this apparent peak density on
// an image of ln(I0/I) fitted as density has lost a percent of its atoms: the optics blur the
// light and not the density.
const (
	blurLoses = 0.05
	peakLoses = 1
)

// writeDensity tells what there is to say of the light where there are no frames.
func (v *visit) writeDensity() {
	peak, name := v.densest()
	if name == "" {
		return
	}
	v.page.title("Density")
	o := v.look.Lab.Optics
	v.page.pair("peak sigma0 n", "%.3g in %s, %s", peak, name, v.opticalDensity(peak))
	smallest := math.Inf(1)
	for _, f := range v.fitted {
		for _, size := range slices.Concat(f.facts.Fit.Width[:], f.facts.Fit.Radius[:]) {
			if size < smallest {
				smallest = size
			}
		}
	}
	if peak > peakLoses*o.Alpha*(1+4*o.Detuning*o.Detuning) && o.Blur > blurLoses*smallest {
		v.trouble.caution("", "the optics blur light, but without frames the blur can only be corrected as one of the density: dense clouds lose up to a few percent of their atoms; save the raw frames")
	}
}
