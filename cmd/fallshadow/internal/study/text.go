package study

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"slices"
	"strings"
	"text/tabwriter"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit/curve"
	"fallshadow/model"
)

// WriteText words the analysis for a person.
func (a *Analysis) WriteText(w io.Writer) error {
	out := bufio.NewWriter(w)
	a.writeShots(out)
	a.writeLaws(out)
	a.writeTransition(out)
	a.writeMeanField(out)
	a.writeAttractive(out)
	fmt.Fprintln(out, "\nerrors in parentheses: statistical, then that of the calibrations, which moves all shots together; (-) where a setting has no stated uncertainty"+a.unstated())
	return out.Flush()
}

func (a *Analysis) unstated() string {
	if names := a.Night.Settings.Unstated(); len(names) > 0 {
		return ": " + strings.Join(names, ", ")
	}
	return ""
}

func (a *Analysis) writeShots(w io.Writer) {
	fmt.Fprintf(w, "%s: %s of %d take part, %s\n", a.Night.Name, count(len(a.Chosen.Rows), "shot"), len(a.Night.Rows), a.among())
	WriteLeftOut(w, "left out", a.Chosen.LeftOut)
	WriteLeftOut(w, "left out of laws and transition", a.Aside)
}

// among counts kinds of shots that take part.
func (a *Analysis) among() string {
	both, flagged, provisional := 0, 0, 0
	for i, r := range a.Chosen.Rows {
		if a.Curve.Points[i].Condensed() {
			both++
		}
		if len(r.Flags) > 0 {
			flagged++
		}
		if r.Provisional {
			provisional++
		}
	}
	text := fmt.Sprintf("%d of them with thermal part and condensate", both)
	if flagged > 0 {
		text += fmt.Sprintf(", %d flagged", flagged)
	}
	if provisional > 0 {
		text += fmt.Sprintf(", %d provisional until batch has run", provisional)
	}
	return text
}

func (a *Analysis) writeLaws(w io.Writer) {
	if len(a.Comparisons) == 0 {
		fmt.Fprintln(w, "\nfewer than three shots have both parts and a T of their own: no comparison with the laws")
		return
	}
	fmt.Fprintf(w, "\nfraction f = N0/N against T/Tc0(N) of %s, chi2 with the covariance of thermal number, N0 and T:\n", count(a.Comparisons[0].Points, "shot"))
	best := curve.Best(a.Comparisons)
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintln(t, "law\tchi2/shot\tmean f - law\tshare of the law\t")
	for i, c := range a.Comparisons {
		mark := ""
		if i == best && a.Describes() {
			mark = "least chi2"
		}
		fmt.Fprintf(t, "%s\t%.3g\t%s\t%s\t%s\n", c.Law.Title, c.PerDof(), format(c.Deviation), format(c.Amplitude), mark)
	}
	t.Flush()
	for _, line := range a.doubts() {
		fmt.Fprintln(w, report.Printable(line))
	}
	fmt.Fprintln(w, "share: x in f = ideal + x (law - ideal), 0 for the ideal gas and 1 for the law")
	for _, c := range a.Comparisons {
		fmt.Fprintf(w, "%s: %s\n", c.Law.Title, c.Law.Note)
	}
	if a.plainForm() {
		fmt.Fprintln(w, "caution: "+plainFormCaution)
	}
}

// plainFormCaution goes with plainForm; the figures are those of simulated semi-ideal nights.
const plainFormCaution = "the thermal part exceeds saturation as that of a semi-ideal gas does, and the fit gave it its ideal form. Where a condensate keeps thermal atoms out of the middle, that form reads T some 5 to 10 % low, and share and Tc lean on it; thermal = \"semi-ideal\" in [fit] of the settings fits such clouds"

// plainForm says that thermal parts were fitted without the field of the condensate while
// they exceed saturation as those that feel it do.
func (a *Analysis) plainForm() bool {
	return a.Transition.Saturation.Excessive() && slices.ContainsFunc(a.Chosen.Rows, func(r *ledger.Row) bool {
		thermal, _, both := strings.Cut(r.Words["form"], "+")
		return both && (thermal == "bose" || thermal == "gauss")
	})
}

func (a *Analysis) writeTransition(w io.Writer) {
	t := &a.Transition
	if math.IsNaN(t.Hottest) && math.IsNaN(t.Coldest) {
		return // no shot tells T/Tc0
	}
	fmt.Fprintln(w, "\ntransition: "+a.found())
	if s := t.Saturation; s != nil {
		fmt.Fprintf(w, "  by saturation at fixed T: Tc/Tc0 = %s%s (chi2/dof %s, %s)\n", format(s.Ratio), excess(s), perDof(s.Quality), count(s.Points, "shot"))
	} else {
		fmt.Fprintf(w, "  by saturation at fixed T: not told, %s\n", t.Unsaturated)
	}
	for _, o := range t.Onsets {
		fmt.Fprintf(w, "  by onset, f below %g as %s: Tc over that of the law = %s (chi2/dof %s, %s)\n",
			curve.OnsetFraction, o.Law.Title, format(o.Ratio), perDof(o.Quality), count(o.Points, "shot"))
	}
	measured := a.Measured()
	if measured == nil {
		return
	}
	fmt.Fprintf(w, "theory for Tc/Tc0 of %.3g atoms, and how far the value by saturation is above it in its %s:\n", t.Atoms, a.sigmasOf())
	tab := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	for _, p := range t.Predictions {
		fmt.Fprintf(tab, "  %s\t%.4f\t%s\t%s\n", p.Name, p.Ratio, sigmas(p.Sigmas(*measured)), p.Note)
	}
	tab.Flush()
}

// excess words what the thermal part holds beyond saturation, where the gas can have that.
func excess(s *curve.Saturation) string {
	if math.IsNaN(s.Excess.V) {
		return ""
	}
	return ", thermal part with " + format(s.Excess) + " of the semi-ideal excess beyond saturation"
}

// Measured returns the Tc/Tc⁰ that is compared with theory, nil where there is none.
func (a *Analysis) Measured() *curve.Estimate {
	if a.Transition.Saturation == nil {
		return nil
	}
	return &a.Transition.Saturation.Ratio
}

// sigmasOf names the errors in which the measured Tc is compared with theory.
func (a *Analysis) sigmasOf() string {
	if m := a.Measured(); m != nil && math.IsNaN(m.Cal) {
		return "statistical errors only, since settings that move it have no stated uncertainty"
	}
	return "errors, statistical and of the calibrations"
}

// found says at which T/Tc0 condensates were found.
func (a *Analysis) found() string {
	switch t := &a.Transition; {
	case math.IsNaN(t.Hottest):
		return fmt.Sprintf("no condensate found, down to T/Tc0 = %.3f", t.Coldest)
	case math.IsNaN(t.Coldest):
		return fmt.Sprintf("condensates in every shot, up to T/Tc0 = %.3f", t.Hottest)
	default:
		return fmt.Sprintf("condensates up to T/Tc0 = %.3f, none found from %.3f on", t.Hottest, t.Coldest)
	}
}

func (a *Analysis) writeMeanField(w io.Writer) {
	m := a.MeanField
	if m == nil {
		return
	}
	fmt.Fprintf(w, "\nmean field, %s with N0 a/a_ho above 30:\n", count(m.Points, "condensate"))
	fmt.Fprintf(w, "  mu from the radii goes as N0^%s, Thomas-Fermi 2/5 (chi2/dof %s); mu from the radii over mu from N0: %s\n", format(m.Slope), perDof(m.Quality), format(m.Ratio))
	if r := m.Release; r != nil {
		fmt.Fprintf(w, "  release energy from %d flights: %.4g nK (E/k) for %.3g atoms, over (2/7) mu(N0): %s\n",
			r.Flights, r.Energy.V/model.KB*1e9, r.Atoms, format(r.Ratio))
	}
	if text := a.numberOff(); text != "" {
		fmt.Fprintln(w, "  caution: "+text)
	}
}

func (a *Analysis) writeAttractive(w io.Writer) {
	t := a.Attractive
	if t == nil {
		return
	}
	fmt.Fprintf(w, "\nattractive gas: collapse at N0 = %.0f in this trap; 0.575 a_ho/|a| of an isotropic one is %.0f, the gaussian variation gives %.0f\n", t.Critical, t.Isotropic, t.Variational)
	if t.Shot != "" {
		fmt.Fprintf(w, "  nearest: %s with %.2f of it\n", report.Printable(t.Shot), t.Largest)
	}
}
