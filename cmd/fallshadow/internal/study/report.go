package study

import (
	"bytes"
	"context"
	_ "embed"
	"fmt"
	"html/template"
	"io"
	"math"
	"regexp"
	"slices"
	"strings"

	"fallshadow/cmd/fallshadow/internal/figure"
	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit"
	"fallshadow/fit/curve"
	"fallshadow/model"
)

//go:embed report.html
var reportText string

var reportTemplate = template.Must(template.New("report").Funcs(template.FuncMap{"numbers": unbroken}).Parse(reportText))

// unbroken returns text as HTML in which no line ends inside a number with its errors.
func unbroken(text string) template.HTML {
	return template.HTML(withErrors.ReplaceAllString(template.HTMLEscapeString(text), `<span class="n">$0</span>`))
}

var withErrors = regexp.MustCompile(`-?[0-9.]+(\([0-9.-]+\))+`)

// The most that a report shows of long lists; the rest is counted.
const (
	mostThumbnails = 24
	mostListed     = 60
)

// page is what the template of the report is filled with.
type page struct {
	Night              string
	Shots, Used        int
	Among              string
	Facts              [][2]string
	Curve              template.HTML
	CurveNote          string
	Laws               []lawLine
	Transition         []string
	Predictions        []predictionLine
	Checks             []string
	Cautions           []string
	Trends             []trend
	Flags              []flagLine
	Thumbnails         []thumbnail
	MoreThumbnails     int
	NoThumbnails       string
	LeftOut            []LeftOut
	MoreLeftOut        int
	Settings, Unstated string
	SigmasOf           string
}

type lawLine struct {
	Title, Chi2, Deviation, Share, Note string
	Best                                bool
}

type predictionLine struct{ Name, Ratio, Sigmas, Note string }

type trend struct {
	Title string
	SVG   template.HTML
	Note  string
}

type flagLine struct {
	Name, Sentence, Shots string
	Count, More           int
}

type thumbnail struct {
	Shot, Why string
	Numbers   []string
	Image     template.URL
}

// WriteReport writes the night as one page of HTML that needs no other file: the curve,
// the numbers, trends, flags, pictures of flagged shots and the settings. The same ledger
// and folder give the same bytes. drawn is the figure to show as the curve.
func (a *Analysis) WriteReport(ctx context.Context, w io.Writer, drawn *Drawn) error {
	p := page{Night: a.Night.Name, Shots: len(a.Night.Rows), Used: len(a.Chosen.Rows), Among: a.among(), CurveNote: drawn.Note,
		Settings: a.Night.Settings.Text(), Unstated: strings.Join(a.Night.Settings.Unstated(), ", ")}
	var err error
	if p.Curve, err = inline(drawn.Figure, 96, 74); err != nil {
		return err
	}
	a.fillNumbers(&p)
	if p.Trends, err = a.trends(); err != nil {
		return err
	}
	a.fillFlags(&p)
	p.LeftOut, p.MoreLeftOut = cut(slices.Concat(a.Chosen.LeftOut, drawn.LeftOut), mostListed)
	if err := a.fillThumbnails(ctx, &p); err != nil {
		return err
	}
	var b bytes.Buffer
	if err := reportTemplate.Execute(&b, p); err != nil {
		return fmt.Errorf("write the report: %w", err)
	}
	_, err = w.Write(b.Bytes())
	return err
}

// cut returns the first of a list and how many more there are.
func cut[T any](list []T, most int) ([]T, int) {
	if len(list) <= most {
		return list, 0
	}
	return list[:most], len(list) - most
}

// inline returns a figure as an element of a page.
func inline(f *figure.Figure, width, height float64) (template.HTML, error) {
	var b bytes.Buffer
	if err := f.Render(&b, "svg", width, height); err != nil {
		return "", err
	}
	_, element, _ := strings.Cut(b.String(), "<svg")
	return template.HTML("<svg" + element), nil
}

func (a *Analysis) fillNumbers(p *page) {
	for _, q := range []struct{ name, head string }{{"atoms", "N"}, {"T_nK", "T (nK)"}, {"fraction", "N0/N"}, {"t_reduced", "T/Tc0"}, {"mu_nK", "mu/k (nK)"}, {"flight_ms", "flight (ms)"}, {"peak_od", "peak sigma0 n"}} {
		if text := a.span(q.name); text != "" {
			p.Facts = append(p.Facts, [2]string{q.head, text})
		}
	}
	best := curve.Best(a.Comparisons)
	for i, c := range a.Comparisons {
		p.Laws = append(p.Laws, lawLine{c.Law.Title, fmt.Sprintf("%.3g", c.PerDof()), format(c.Deviation), format(c.Amplitude), c.Law.Note, i == best && a.Describes()})
	}
	a.fillTransition(p)
	if m := a.MeanField; m != nil {
		p.Checks = append(p.Checks, fmt.Sprintf("mu from the radii goes as N0 to the power %s (2/5 in Thomas-Fermi)", format(m.Slope)),
			fmt.Sprintf("mu from the radii over mu from N0: %s", format(m.Ratio)))
		if r := m.Release; r != nil {
			p.Checks = append(p.Checks, fmt.Sprintf("release energy %.4g nK (E/k) from %d flights, over (2/7) mu(N0): %s", r.Energy.V/model.KB*1e9, r.Flights, format(r.Ratio)))
		}
	}
	if t := a.Attractive; t != nil {
		p.Checks = append(p.Checks, fmt.Sprintf("attractive gas: collapse at N0 = %.0f; the largest condensate has %.2f of it", t.Critical, t.Largest))
	}
	p.Cautions = a.doubts()
	for _, c := range causes(a.Aside) {
		p.Cautions = append(p.Cautions, fmt.Sprintf("%s left out of laws and transition: %s", count(len(c.shots), "shot"), c))
	}
	if a.plainForm() {
		p.Cautions = append(p.Cautions, plainFormCaution)
	}
	if text := a.numberOff(); text != "" {
		p.Cautions = append(p.Cautions, text)
	}
}

func (a *Analysis) fillTransition(p *page) {
	t := &a.Transition
	if math.IsNaN(t.Hottest) && math.IsNaN(t.Coldest) {
		return
	}
	p.Transition = append(p.Transition, a.found())
	if s := t.Saturation; s != nil {
		p.Transition = append(p.Transition, fmt.Sprintf("by saturation at fixed T: Tc/Tc0 = %s%s", format(s.Ratio), excess(s)))
	} else {
		p.Transition = append(p.Transition, "by saturation at fixed T: not told, "+t.Unsaturated)
	}
	for _, o := range t.Onsets {
		p.Transition = append(p.Transition, fmt.Sprintf("by onset as %s: Tc over that of the law %s, chi2/dof %s", o.Law.Title, format(o.Ratio), perDof(o.Quality)))
	}
	p.SigmasOf = a.sigmasOf()
	if m := a.Measured(); m != nil {
		for _, q := range t.Predictions {
			p.Predictions = append(p.Predictions, predictionLine{q.Name, fmt.Sprintf("%.4f", q.Ratio), sigmas(q.Sigmas(*m)), q.Note})
		}
	}
}

// span returns the least and the largest value of a quantity, one where they are the same.
func (a *Analysis) span(name string) string {
	q, err := a.Night.Quantity(name)
	if err != nil {
		return ""
	}
	values := slices.DeleteFunc(a.Night.values(a.Chosen, q), func(v float64) bool { return v != v })
	if len(values) == 0 {
		return ""
	}
	low, high := fmt.Sprintf("%.4g", slices.Min(values)), fmt.Sprintf("%.4g", slices.Max(values))
	if low == high {
		return low
	}
	return low + " to " + high
}

// trends draws what a night should hold still, or change slowly.
func (a *Analysis) trends() (list []trend, err error) {
	for _, t := range []struct{ name, title, label string }{
		{"atoms", "atom number", "*N*"}, {"T_nK", "temperature", "*T*  (nK)"}, {"fraction", "condensate fraction", "*N*_{0} / *N*"},
		{"peak_od", "peak sigma0 n", "peak *σ*_{0}*n*"}, {"x_px", "centre, column", "*x*  (px)"}, {"y_px", "centre, row", "*y*  (px)"},
		{"chi2_cloud", "chi2 under the cloud", "*χ*^{2} / dof"}, {"thermal_over_saturated", "thermal atoms over their saturated number", "*N*_{th} / *N*_{sat}"},
	} {
		d, err := a.Plot(Axes{X: "number", Y: t.name})
		if err != nil {
			continue // no shot has it
		}
		d.Figure.Y.Label = figure.Markup(t.label)
		if len(list) > 0 {
			for i := range d.Figure.Points {
				d.Figure.Points[i].Legend = ""
			}
		}
		svg, err := inline(d.Figure, 80, 42)
		if err != nil {
			return nil, err
		}
		list = append(list, trend{t.title, svg, d.Note})
	}
	return list, nil
}

// fillFlags counts the flags of all shots of the night.
func (a *Analysis) fillFlags(p *page) {
	shots := map[string][]string{}
	for i := range a.Night.Rows {
		r := &a.Night.Rows[i]
		for _, f := range report.Flags(r) {
			shots[f] = append(shots[f], r.Shot)
		}
	}
	for _, f := range report.AllFlags() {
		if names := shots[f.Name]; len(names) > 0 {
			shown, more := cut(names, 24)
			f = report.Worded(f, shots[fit.FlagDensityNoReference] != nil)
			p.Flags = append(p.Flags, flagLine{f.Name, f.Sentence, strings.Join(shown, ", "), len(names), more})
		}
	}
}

// fillThumbnails draws the first of the shots that failed or have a flag.
func (a *Analysis) fillThumbnails(ctx context.Context, p *page) error {
	var rows []*ledger.Row
	for i := range a.Night.Rows {
		if r := &a.Night.Rows[i]; r.Reason != "" || r.Bad != "" || len(report.Flags(r)) > 0 {
			rows = append(rows, r)
		}
	}
	rows, p.MoreThumbnails = cut(rows, mostThumbnails)
	if len(rows) == 0 {
		return nil
	}
	var names []string
	for _, r := range rows {
		names = append(names, r.Shot)
	}
	images, err := a.Night.thumbnails(ctx, names)
	if ctx.Err() != nil {
		return context.Cause(ctx)
	}
	if err != nil {
		p.NoThumbnails = "the shots are not where they were fitted: " + err.Error()
	}
	for _, r := range rows {
		p.Thumbnails = append(p.Thumbnails, thumbnail{r.Shot, reasons(r), concise(r), images[r.Shot]})
	}
	return nil
}

// reasons says what is the matter with a shot.
func reasons(r *ledger.Row) string {
	var list []string
	if r.Reason != "" {
		list = append(list, "failed: "+r.Reason)
	}
	if r.Bad != "" {
		list = append(list, "a person's word: "+r.Bad)
	}
	return strings.Join(append(list, report.Flags(r)...), ", ")
}

// concise writes the main numbers of a shot.
func concise(r *ledger.Row) []string {
	var list []string
	for _, c := range []struct{ column, head, unit string }{{"atoms", "N", ""}, {"fraction", "N0/N", ""}, {"T_nK", "T", " nK"}} {
		if text := report.Concise(r, c.column); text != "" {
			list = append(list, c.head+" "+text+c.unit)
		}
	}
	return list
}
