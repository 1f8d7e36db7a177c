package page

import (
	"cmp"
	"math"
	"net/http"
	"slices"
	"strconv"
	"strings"
	"time"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/picture"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/imageio"
)

// brief is a row in the list of shots.
type brief struct {
	Shot   string   `json:"shot"`
	At     int64    `json:"at"` // when it came, ms since 1970
	Model  string   `json:"model,omitempty"`
	Flags  []string `json:"flags,omitempty"`
	Bad    string   `json:"bad,omitempty"`
	Failed bool     `json:"failed,omitempty"`
	Atoms  string   `json:"atoms,omitempty"`
}

// detail is all of a row.
type detail struct {
	brief
	Files   []string           `json:"files"`
	Reason  string             `json:"reason,omitempty"`
	Flight  string             `json:"flight,omitempty"`
	Scan    []named            `json:"scan,omitempty"`
	Cards   []report.Card      `json:"cards,omitempty"`
	Numbers map[string]float64 `json:"numbers"` // cells of the table, and scan variables
	Words   map[string]string  `json:"words,omitempty"`
	Region  string             `json:"region,omitempty"` // see Night.Drawn
	Same    string             `json:"same,omitempty"`   // the first shot with these pixels
	Told    int64              `json:"told,omitempty"`   // when browsers were told of it, ms since 1970
}

type named struct {
	Name string `json:"name"`
	Text string `json:"text"`
}

func (p *Page) brief(r *ledger.Row) brief {
	return brief{
		Shot: r.Shot, At: p.night.Arrived(r).UnixMilli(), Model: r.Words["model"], Flags: report.Flags(r), Bad: r.Bad, Failed: r.Reason != "",
		Atoms: short(r.Number("atoms")),
	}
}

func (p *Page) detail(r *ledger.Row) detail {
	d := detail{
		brief: p.brief(r), Files: r.Files, Reason: r.Reason, Numbers: map[string]float64{}, Words: r.Words, Same: r.Duplicate,
		Cards: report.Cards(r), Region: p.night.Drawn(r),
	}
	for name, v := range r.Numbers {
		d.Numbers[name] = v
	}
	if v := r.Number("flight_ms"); !math.IsNaN(v) {
		d.Flight = report.Plain(v, 4) + " ms"
	}
	for _, name := range p.night.Scan() {
		text, ok := imageio.Metadata(r.Meta).Get(name)
		if !ok {
			continue
		}
		d.Scan = append(d.Scan, named{name, text})
		if v := scanNumber(r, name); v-v == 0 {
			d.Numbers[name] = v
		}
	}
	return d
}

// short writes a number for a list.
func short(v float64) string {
	if math.IsNaN(v) {
		return ""
	}
	text := strconv.FormatFloat(v, 'e', 2, 64)
	mantissa, power, _ := strings.Cut(text, "e")
	n, _ := strconv.Atoi(power)
	return mantissa + "e" + strconv.Itoa(n)
}

// scanNumber is a scan variable as a number, NaN where it is none.
func scanNumber(r *ledger.Row, name string) float64 {
	v, err := imageio.Metadata(r.Meta).Number(name)
	if err != nil {
		return math.NaN()
	}
	return v
}

// column is a column of the table for the page.
type column struct {
	Name    string `json:"name"`
	Unit    string `json:"unit,omitempty"`
	Meaning string `json:"meaning"`
}

// serveNight says what there is, without the numbers of the shots, which are listed as they
// came.
func (p *Page) serveNight(r *http.Request) (any, error) {
	last := p.stream.last() // before the rows are read, so that nothing falls in between
	list := []brief{}
	var final *ledger.Row
	latest := int64(math.MinInt64)
	for row, err := range p.night.Each(r.Context()) {
		if err != nil {
			return nil, err
		}
		list = append(list, p.brief(row))
		if at := list[len(list)-1].At; at >= latest {
			final, latest = row, at
		}
	}
	slices.SortStableFunc(list, func(a, b brief) int { return cmp.Compare(a.At, b.At) })
	now, next := p.night.Region()
	answer := map[string]any{
		"night": p.name, "event": last, "now": time.Now().UnixMilli(), "told": p.told.Load(),
		"rows": list, "columns": columns(), "scan": p.night.Scan(), "flags": flagSentences(),
		"settings": p.night.SettingsText(), "notes": p.night.Notes(),
		"region": corners(now), "drawn": corners(next),
		"scales": map[string][]string{"density": hexes(picture.DensityColors), "residual": hexes(picture.ResidualColors)},
	}
	if final != nil {
		answer["last"] = p.detail(final)
	}
	return answer, nil
}

func columns() []column {
	list := []column{}
	for _, c := range report.Columns {
		if c.IsNumber() && !strings.HasSuffix(c.Name, "_err") && !strings.HasSuffix(c.Name, "_cal") &&
			!strings.HasSuffix(c.Name, "_low") && !strings.HasSuffix(c.Name, "_high") {
			list = append(list, column{c.Name, c.Unit, c.Meaning})
		}
	}
	return list
}

func flagSentences() map[string]string {
	sentences := map[string]string{}
	for _, f := range report.AllFlags() {
		sentences[f.Name] = f.Sentence
	}
	return sentences
}

// shot returns the row that a request names.
func (p *Page) shot(r *http.Request, name string) (*ledger.Row, error) {
	row, err := p.night.Row(r.Context(), name)
	if err == nil && row == nil {
		err = &refusal{http.StatusNotFound, "there is no such shot in the night"}
	}
	return row, err
}

func (p *Page) serveRow(r *http.Request) (any, error) {
	row, err := p.shot(r, r.URL.Query().Get("shot"))
	if err != nil {
		return nil, err
	}
	return p.detail(row), nil
}

// serveColumn gives a column of all shots with its errors and the ends of its intervals, of
// which a limit has one, in the order of the shots.
func (p *Page) serveColumn(r *http.Request) (any, error) {
	name := r.URL.Query().Get("name")
	scan := p.night.Scan()
	isScan := slices.Contains(scan, name)
	if !isScan && !slices.ContainsFunc(columns(), func(c column) bool { return c.Name == name }) {
		return nil, &refusal{http.StatusNotFound, "there is no such column"}
	}
	shots, cells := []string{}, map[string][]*float64{}
	for _, end := range []string{"", "_err", "_low", "_high"} {
		cells[end] = []*float64{}
	}
	for row, err := range p.night.Each(r.Context()) {
		if err != nil {
			return nil, err
		}
		shots = append(shots, row.Shot)
		for end := range cells {
			v := row.Number(name + end)
			if isScan && end == "" {
				v = scanNumber(row, name)
			}
			cells[end] = append(cells[end], finite(v))
		}
	}
	return map[string]any{"shots": shots, "values": cells[""], "errors": cells["_err"], "lows": cells["_low"], "highs": cells["_high"]}, nil
}

func finite(v float64) *float64 {
	if v-v != 0 {
		return nil
	}
	return &v
}
