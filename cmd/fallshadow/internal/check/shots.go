package check

import (
	"cmp"
	"fmt"
	"image"
	"math"
	"slices"
	"strconv"
	"strings"

	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/imageio/fits"
)

// writeShots tells what would be read.
func (v *visit) writeShots() {
	v.page.title("Shots")
	v.page.pair("layout", "%s", v.layout())
	v.page.pair("shots", "%s", v.found())
	if sizes := v.sizes(); len(sizes) > 0 {
		v.page.pair("frames", "%s", strings.Join(sizes, "; "))
		v.writeField()
	}
	if n := len(v.look.DarkFiles); n > 0 {
		v.page.pair("dark files", "%s: %s", plural(n, "file"), some(darkNames(v)))
	}
	if len(v.shots) > v.unread() {
		v.page.pair("flight", "%s", v.flightSource())
		for _, name := range v.Settings.Shots.Scan {
			v.page.pair("scan variable", "%s", v.scanSource(name))
		}
	}
	v.writeSideTable()
	v.writeStrays()
	if len(v.shots) > 0 {
		v.page.line("")
		v.page.table(v.lines(), true)
	}
}

// writeStrays names the files that are passed over, by reason.
func (v *visit) writeStrays() {
	var list []matter
	for _, s := range v.look.Strays {
		list = note(list, s.Path, s.Reason)
	}
	name := "passed over"
	for _, m := range list {
		v.page.pair(name, "%s", report.Printable(m.String()))
		name = ""
	}
}

func darkNames(v *visit) (names []string) {
	for _, f := range v.look.DarkFiles {
		names = append(names, f.Path)
	}
	return names
}

// layout says what makes a shot.
func (v *visit) layout() string {
	s := &v.Settings.Shots
	planes := strings.Join(s.Planes, ", ")
	switch {
	case s.Layout == "density":
		return "density: one density image a shot, of " + s.DensityUnit
	case len(s.Suffixes) > 0:
		var parts []string
		for i, p := range s.Planes {
			parts = append(parts, fmt.Sprintf("%s %q", p, s.Suffixes[i]))
		}
		return s.Layout + ": " + strings.Join(parts, ", ")
	}
	return s.Layout + ": " + planes
}

// found counts shots and files.
func (v *visit) found() string {
	files := 0
	for _, s := range v.look.Shots {
		files += len(s.Files)
	}
	text := fmt.Sprintf("%d in %s", len(v.shots), plural(files, "file"))
	unusable := len(v.shots) - len(v.usable())
	switch {
	case len(v.shots) == 0:
		text = "none"
	case !v.look.Ready():
		text += ", none of which a batch can fit"
	case unusable > 0:
		text += fmt.Sprintf(", %d of which a batch would fail", unusable)
	}
	return text
}

// sizes counts the frames by their size, the most frequent first.
func (v *visit) sizes() []string {
	frames := map[image.Point]int{}
	for i := range v.shots {
		if n := v.shots[i].frames; n > 0 {
			frames[v.shots[i].size] += n
		}
	}
	var sizes []image.Point
	for size := range frames {
		sizes = append(sizes, size)
	}
	slices.SortFunc(sizes, func(a, b image.Point) int {
		return cmp.Or(frames[b]-frames[a], a.X-b.X, a.Y-b.Y)
	})
	var out []string
	for _, s := range sizes {
		out = append(out, fmt.Sprintf("%d of %d x %d pixels", frames[s], s.X, s.Y))
	}
	return out
}

// writeField tells how much of the object is in view.
func (v *visit) writeField() {
	pixel := v.Settings.ObjectPixel() * 1e6 / float64(v.Settings.Fit.Rebin)
	size := v.commonSize()
	v.page.pair("field of view", "%s x %s um in the plane of the atoms, %s um a pixel",
		digits(float64(size.X)*pixel, 4), digits(float64(size.Y)*pixel, 4), digits(pixel, 4))
	if r := v.Settings.Region; !r.Auto() {
		v.page.pair("region", "columns %d to %d, rows %d to %d: %s x %s um", r.X, r.X+r.Width-1, r.Y, r.Y+r.Height-1,
			digits(float64(r.Width)*pixel, 4), digits(float64(r.Height)*pixel, 4))
	}
	if n := v.Settings.Fit.Rebin; n > 1 {
		v.page.pair("rebinning", "%d x %d pixels are summed before the fit: %.4g um", n, n, v.Settings.ObjectPixel()*1e6)
	}
}

// commonSize is the size of frame that most shots have.
func (v *visit) commonSize() (size image.Point) {
	n := map[image.Point]int{}
	for i := range v.shots {
		if s := v.shots[i].size; v.shots[i].frames > 0 {
			if n[s]++; n[s] > n[size] {
				size = s
			}
		}
	}
	return size
}

// lines is the table of shots: all of them, or the first, the last, those that a batch
// would fail, and those with remarks where they are the lesser part.
func (v *visit) lines() [][]string {
	scan := v.Settings.Shots.Scan
	head := append([]string{"shot", "files", "frames", "pixels", "flight/ms"}, scan...)
	lines := [][]string{append(head, "atoms peak", "light peak", "remarks")}
	skipped, failed := 0, 0
	flush := func() {
		if skipped > 0 {
			row := make([]string, len(lines[0]))
			row[0] = fmt.Sprintf("... %d more", skipped)
			if failed > 0 {
				row[len(row)-1] = fmt.Sprintf("%d of them would fail", failed)
			}
			lines = append(lines, row)
			skipped, failed = 0, 0
		}
	}
	shown, names := v.shown(), brief(v.names(), 28)
	for i := range v.shots {
		if !shown[i] {
			skipped++
			if v.shots[i].unusable {
				failed++
			}
			continue
		}
		flush()
		lines = append(lines, v.row(i, names[i]))
	}
	return lines
}

// shown chooses the shots that have a line of their own.
func (v *visit) shown() []bool {
	const first, last, most, mostFailed = 4, 2, 12, 40
	remarked, failed, n := 0, 0, len(v.shots)
	for i := range v.shots {
		if len(v.shots[i].remarks) > 0 {
			remarked++
		}
	}
	list := make([]bool, n)
	for i := range list {
		s := &v.shots[i]
		list[i] = v.Every || n <= most || i < first || i >= n-last || len(s.remarks) > 0 && 2*remarked < n
		if s.unusable {
			failed++
			list[i] = list[i] || failed <= mostFailed
		}
	}
	return list
}

func (v *visit) names() (list []string) {
	for _, s := range v.look.Shots {
		list = append(list, s.Name)
	}
	return list
}

func (v *visit) row(i int, name string) []string {
	s, seen := &v.shots[i], v.look.Shots[i]
	row := []string{name, strconv.Itoa(len(seen.Files)), "", "", ""}
	if s.frames > 0 {
		row[2] = strconv.Itoa(s.frames)
		row[3] = fmt.Sprintf("%dx%d", s.size.X, s.size.Y)
	}
	if _, err := v.Settings.Flight(seen.Meta); seen.Err == nil && err == nil {
		row[4] = strconv.FormatFloat(s.flight*1e3, 'g', 6, 64)
	}
	for _, q := range v.Settings.Scan(seen.Meta) {
		row = append(row, report.Printable(tidy(q.Text)))
	}
	for _, p := range s.peaks {
		text := ""
		if s.raw {
			text = strconv.FormatFloat(math.Round(p.common), 'f', 0, 64)
		}
		row = append(row, text)
	}
	return append(row, strings.Join(s.remarks, " "))
}

// tidy shortens a number to six digits and a text to twelve characters.
func tidy(text string) string {
	if x, err := fits.ParseNumber(text); err == nil {
		return number(x)
	}
	return clip(text, 12)
}

// clip shortens a text to n characters.
func clip(text string, n int) string {
	if r := []rune(text); len(r) > n {
		return string(r[:n-1]) + "~"
	}
	return text
}
