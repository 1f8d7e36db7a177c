package study

import (
	"context"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"text/tabwriter"

	"fallshadow/fit/curve"
)

// WriteNumber looks for one common factor of alpha or of the magnification in the chosen
// shots and words what it finds, with the setting to paste where one is named.
func (n *Night) WriteNumber(ctx context.Context, w io.Writer, c *Chosen) error {
	night := n.curveNight(c.Rows)
	tied := aside(night)
	f, err := night.FindFactor(ctx)
	if err != nil {
		if len(tied) > 0 {
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
	fmt.Fprintln(t, "wrong setting\tthermal part\tfactor on the setting\tchi2\tdof")
	for _, h := range f.List {
		setting, factor := h.Setting, format(h.Factor)
		if setting == "" {
			setting, factor = "none", ""
		}
		chi2 := ""
		if !math.IsNaN(h.Chi2) {
			chi2 = fixed(h.Chi2, 1)
		}
		fmt.Fprintf(t, "%s\t%s\t%s\t%s\t%d\n", setting, thermalLaw(h.Law), factor, chi2, h.Dof)
	}
	if err := t.Flush(); err != nil {
		return err
	}
	return n.writeNamed(w, f)
}

func thermalLaw(law string) string {
	if law == curve.SemiIdeal {
		return "semi-ideal"
	}
	return "saturated"
}

// mends is the chi2 over degrees of freedom up to which a factor mends a night: shots scatter
// somewhat beyond their errors.
const mends = 3

// writeUnmended says that a common factor is not what is wrong.
func (n *Night) writeUnmended(w io.Writer, best *curve.Factor) {
	what := "none"
	if best.Setting != "" {
		what = best.Setting + " times " + format(best.Factor)
	}
	fmt.Fprintf(w, "no single factor mends the night: with the best, %s, chi2 is still %.3g a degree of freedom, where about 1 is expected; look at the ratios that check prints and at the flags\n", what, best.PerDof())
	if n.Settings.Fit.Thermal == "bose" {
		fmt.Fprintln(w, "the gas repels and its thermal part was fitted as an ideal gas (fit.thermal = \"bose\"): if thermal atoms felt the condensate, T is low and their number above saturation; put thermal = \"semi-ideal\" into [fit], run batch, and calibrate once more")
	}
}

// writeNamed says which setting it is, if it can be told, and what to write.
func (n *Night) writeNamed(w io.Writer, f curve.Factors) error {
	best := f.List[0]
	fmt.Fprintln(w)
	switch {
	case best.PerDof() > mends:
		n.writeUnmended(w, &best)
		return nil
	case !f.Wrong():
		fmt.Fprintln(w, "no common factor is needed: mu from the radii and from N0 and the thermal numbers agree")
		return nil
	case !f.Decided():
		fmt.Fprintf(w, "something is off by a common factor, but alpha and magnification cannot be told apart: either factor above mends the night, and chi2 differs by %.1f of its scatter where %d are asked for; more shots with a good T would tell\n", f.Lead, curve.DecisiveLead)
		return nil
	}
	setting, table := n.Settings.Probe.Alpha, "probe"
	if best.Setting == curve.Magnification {
		setting, table = n.Settings.Camera.Magnification, "camera"
	}
	note := ""
	if math.IsNaN(best.Factor.Cal) {
		note = " # without the settings that have no stated uncertainty"
	}
	value, sigma := setting.Value*best.Factor.V, setting.Value*best.Error()
	decimals := min(max(1-int(math.Floor(math.Log10(sigma))), 0), 12)
	number := func(v float64) string { return strconv.FormatFloat(v, 'f', decimals, 64) }
	_, err := fmt.Fprintf(w, "%s fits better, by %.1f in chi2: it should be %s times the %s of the settings. The error below has a twentieth of the correction in it for going so far; put it in, run batch, and calibrate once more.\n\n[%s]\n%s = { value = %s, err = %s }%s\n",
		best.Setting, f.Lead, format(best.Factor), decimal(setting.Value), table, best.Setting, number(value), number(sigma), note)
	return err
}
