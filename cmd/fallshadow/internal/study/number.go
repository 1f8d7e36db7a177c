package study

import (
	"context"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
	"text/tabwriter"

	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit/curve"
)

// WriteNumber looks for one common factor of alpha, of the magnification, of the scattering
// length or of the frequency along the line of sight in the chosen shots and words what it finds, with the setting to paste where one is named.
func (n *Night) WriteNumber(ctx context.Context, w io.Writer, c *Chosen) error {
	night := n.curveNight(c.Rows)
	tied := aside(night)
	f, err := night.FindFactor(ctx)
	if err != nil {
		switch {
		case len(tied) == len(c.Rows) && len(causes(tied)) == 1:
			return fmt.Errorf("calibrate the number of atoms from %s: %w", n.Name, notApart{tied[0].Why})
		case len(tied) > 0:
			err = fmt.Errorf("%w; %s", err, mostLeft(tied))
		}
		if len(c.LeftOut) > 0 {
			err = fmt.Errorf("%w; %s", err, mostLeft(c.LeftOut))
		}
		return fmt.Errorf("calibrate the number of atoms from %s: %w", n.Name, err)
	}
	best := f.List[0]
	fmt.Fprintf(w, "%s: %s with both parts and a large condensate, of %d\n", n.Name, count(best.Points, "shot"), len(n.Rows))
	WriteLeftOut(w, "left out", append(slices.Clone(c.LeftOut), tied...))
	fmt.Fprintf(w, "\nas measured: mu from the radii over mu from N0 %s; thermal atoms over what T lets them be, %s: %s\n\n",
		format(f.Mu), thermalLaw(best.Law), format(f.Saturated))
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintln(t, "wrong setting\tthermal part\tfactor on the setting\tchi2\twith calibrations\tdof")
	for _, h := range f.List {
		setting, factor := h.Setting, format(h.Factor)
		if setting == "" {
			setting, factor = "none", ""
		}
		fmt.Fprintf(t, "%s\t%s\t%s\t%s\t%s\t%d\n", setting, thermalLaw(h.Law), factor, chi2(h.Chi2), chi2(h.Total), h.Dof)
	}
	if err := t.Flush(); err != nil {
		return err
	}
	saturation, _, err := night.Saturate(ctx)
	if err != nil {
		return err
	}
	return n.writeNamed(w, f, saturation.Excessive())
}

// notApart is the error of a night whose every shot is left out for one reason.
type notApart struct{ why string }

func (e notApart) Error() string { return "no shot tells a factor: " + e.why }
func (e notApart) Unwrap() error { return curve.ErrNoFactor }

// chi2 writes one, nothing where there is none.
func chi2(v float64) string {
	if math.IsNaN(v) {
		return ""
	}
	return fixed(v, 1)
}

func thermalLaw(law string) string {
	if law == curve.SemiIdeal {
		return "semi-ideal"
	}
	return "saturated"
}

// The chi2 over degrees of freedom, with all settings free within their errors, up to which a
// factor mends a night, as shots scatter somewhat beyond their errors, and up to which the
// night is told well enough to name a setting.
const (
	mends = 3
	names = 2
)

// writeUnmended says that a common factor is not what is wrong, and which shots are off where
// most of them agree with a hypothesis: that is not always the one of least chi2.
func writeUnmended(w io.Writer, f *curve.Factors) {
	best := &f.List[0]
	fmt.Fprintf(w, "no single factor mends the night: with the best, %s, chi2 is still %.3g a degree of freedom, where about 1 is expected; look at the ratios that check prints and at the flags\n", wrong(best), best.TotalPerDof())
	h := slices.MinFunc(f.List, func(a, b curve.Factor) int { return len(a.Far) - len(b.Far) })
	if len(h.Far) == 0 || 2*len(h.Far) > h.Points {
		return
	}
	const most = 8
	shown, more := cut(h.Far, most)
	var list []string
	for _, p := range shown {
		list = append(list, p.Name)
	}
	text := strings.Join(list, ", ")
	if more > 0 {
		text += fmt.Sprintf(" and %d more", more)
	}
	fmt.Fprintln(w, report.Printable(fmt.Sprintf("with %s, %d of %d are more than five errors off: %s", wrong(&h), len(h.Far), h.Points, text)))
}

// wrong words what a hypothesis takes for wrong.
func wrong(h *curve.Factor) string {
	if h.Setting == "" {
		return "none"
	}
	return h.Setting + " times " + format(h.Factor)
}

// scattered says that shots differ by more than their errors, where they do.
func scattered(best *curve.Factor) string {
	if best.TotalPerDof() <= names {
		return ""
	}
	return fmt.Sprintf("; but shots differ by more than that, chi2 is %.3g a degree of freedom", best.TotalPerDof())
}

// writeNamed says which setting it is, if it can be told, and what to write.
func (n *Night) writeNamed(w io.Writer, f curve.Factors, excessive bool) error {
	best := f.List[0]
	fmt.Fprintln(w)
	if excessive && n.Settings.Fit.Thermal != "semi-ideal" {
		fmt.Fprintf(w, "the thermal part exceeds saturation as that of a semi-ideal gas does, and was fitted as an ideal one (fit.thermal = %q): if thermal atoms felt the condensate, T is low and their number above saturation; put thermal = \"semi-ideal\" into [fit], run batch, and calibrate once more\n", n.Settings.Fit.Thermal)
	}
	switch {
	case !(best.TotalPerDof() <= mends):
		writeUnmended(w, &f)
	case !f.Wrong():
		fmt.Fprintf(w, "no common factor is needed: mu from the radii and from N0 and the thermal numbers agree within the errors of the shots and of the settings%s\n", scattered(&best))
	case math.IsNaN(f.Lead):
		fmt.Fprintln(w, "something is off by a common factor, but no setting is named: the minimum of a hypothesis above was not found")
	case !f.Decided():
		fmt.Fprintf(w, "something is off by a common factor, but %s and %s cannot be told apart: either factor above mends the night, and chi2 differs by %.1f of its scatter where %d are asked for; more shots with a good T would tell\n", best.Setting, f.Rival, f.Lead, curve.DecisiveLead)
	case !(best.TotalPerDof() <= names):
		fmt.Fprintf(w, "something is off by a common factor and %s mends it best, but chi2 is %.3g a degree of freedom, where below %d is asked for to name a setting: look at the flags and leave out shots with --without or --where\n", best.Setting, best.TotalPerDof(), names)
	default:
		return n.writeSetting(w, &best, &f)
	}
	return nil
}

// writeSetting names the setting, and what would look like it.
func (n *Night) writeSetting(w io.Writer, best *curve.Factor, f *curve.Factors) error {
	setting, table, others := n.Settings.Probe.Alpha, "probe", "trap frequencies, flight and scattering length"
	switch best.Setting {
	case curve.Magnification:
		setting, table = n.Settings.Camera.Magnification, "camera"
	case curve.ScatteringLength:
		setting, table, others = n.Settings.Atom.ScatteringLengthA0, "atom", "trap frequencies and flight"
	case curve.Sight:
		setting, table, others = n.Settings.Trap.SightHz, "trap", "the other trap frequencies, flight and scattering length"
	}
	note := ""
	if math.IsNaN(best.Factor.Cal) {
		note = " # without the settings that have no stated uncertainty"
	}
	fmt.Fprintf(w, "%s fits better than %s, by %.1f in chi2: if %s are right, it should be %s times the %s of the settings. The error below has a twentieth of the correction in it for going so far; put it in, run batch, and calibrate once more.\n",
		best.Setting, f.Rival, f.Lead, others, format(best.Factor), decimal(setting.Value))
	if f.Twin != nil {
		fmt.Fprintf(w, "%s times %s mends the night as well: make sure of the trap frequencies before you change %s.\n", f.Twin.Setting, format(f.Twin.Factor), best.Setting)
	}
	value, sigma := setting.Value*best.Factor.V, setting.Value*best.Error()
	decimals := min(max(1-int(math.Floor(math.Log10(sigma))), 0), 12)
	number := func(v float64) string { return strconv.FormatFloat(v, 'f', decimals, 64) }
	_, err := fmt.Fprintf(w, "\n[%s]\n%s = { value = %s, err = %s }%s\n", table, best.Setting, number(value), number(sigma), note)
	return err
}
