package check

import (
	"math"
	"slices"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/fit"
	"fallshadow/imageio"
)

func TestSpread(t *testing.T) {
	for n := range 40 {
		list := make([]int, n)
		for i := range list {
			list[i] = 10 + i
		}
		order := spread(list)
		if n == 16 && !slices.Equal(order[:3], []int{18, 14, 22}) {
			t.Errorf("16 shots begin with %v, want the middle and the quarters", order[:3])
		}
		slices.Sort(order)
		if !slices.Equal(order, list) {
			t.Errorf("of %d shots %v are taken", n, order)
		}
	}
}

// TestPeak holds hot pixels, odd values and counts beyond 16 bits against the rule: a
// thousandth of the pixels are above the common peak.
func TestPeak(t *testing.T) {
	pix := make([]float32, 4000)
	for i := range pix {
		pix[i] = float32(i % 1000)
	}
	for i, v := range []float32{60000, 50000, 40000, float32(math.NaN()), float32(math.Inf(1)), -5} {
		pix[100*i] = v
	}
	if p := peakOf(pix); p.highest != 60000 || p.common != 999 {
		t.Errorf("got %+v, want 60000 and 999", p)
	}
	for i := range pix {
		pix[i] = 3e6
	}
	if p := peakOf(pix); p.highest != 3e6 || math.Abs(p.common-3e6) > 3e6/65535 {
		t.Errorf("got %+v, want 3e6 twice", p)
	}
	if p := peakOf(make([]float32, 9)); p != (peak{}) {
		t.Errorf("darkness has the peak %+v", p)
	}
}

// TestLightAt: the light is that of the cloud's ellipse, turned as the cloud is, without
// bad pixels.
func TestLightAt(t *testing.T) {
	const w, h, a, b = 60, 50, 16.0, 4.0
	angle := math.Pi / 6
	e := &imageio.Exposure{Width: w, Height: h, Light: make([]float64, w*h), Good: make([]bool, w*h)}
	for i := range e.Light {
		dx, dy := float64(i%w)-30, float64(i/w)-24
		u, v := dx*math.Cos(angle)+dy*math.Sin(angle), dy*math.Cos(angle)-dx*math.Sin(angle)
		e.Good[i] = i%7 != 0
		switch {
		case !e.Good[i]:
			e.Light[i] = 1e6
		case u*u/(a*a)+v*v/(b*b) <= 1:
			e.Light[i] = 500
		default:
			e.Light[i] = 100
		}
	}
	nan := math.NaN()
	r := &fit.Result{Model: fit.ModelCondensate, Angle: angle, Radius: [2]float64{a * 2e-6, b * 2e-6}, Width: [2]float64{nan, nan}}
	if v := lightAt(e, 30, 24, r, 2e-6); v != 500 {
		t.Errorf("in the cloud's place the light is %g, want 500", v)
	}
	r.Model = fit.ModelNone
	if v := lightAt(e, 30, 24, r, 2e-6); v != 100 {
		t.Errorf("in the whole picture the light is %g, want 100", v)
	}
	if v := lightAt(&imageio.Exposure{}, 30, 24, r, 2e-6); !math.IsNaN(v) {
		t.Errorf("a density image has the light %g", v)
	}
}

// TestAspect: widths go with the square root of T or mu, so that a ratio of 1.21 between
// the axes is an aspect 1.1 times the predicted one, with half its relative error.
func TestAspect(t *testing.T) {
	v := &visit{}
	v.Settings = parsed(t)
	nan := math.NaN()
	r := &fit.Result{Radius: [2]float64{6e-5, 3e-5}, Width: [2]float64{9e-5, 9e-5},
		Checks: fit.Checks{MuRatio: 1.21, MuRatioErr: 0.0242, TRatio: 1, TRatioErr: 0.1}}
	if m, p := v.aspect(r); m != "2.200(22)" || p != "2" {
		t.Errorf("measured %s, predicted %s", m, p)
	}
	r.Radius, r.Checks.MuRatio = [2]float64{nan, nan}, nan
	if m, p := v.aspect(r); m != "1.000(50)" || p != "1" {
		t.Errorf("measured %s, predicted %s", m, p)
	}
	r.Checks.TRatio = nan
	if m, p := v.aspect(r); m != "" || p != "" {
		t.Errorf("nothing measured, but %s and %s", m, p)
	}
	v.Settings.Fit.Tie = "free"
	r.Checks.TRatio, r.Width = 1.21, [2]float64{2.2e-5, 1e-5}
	if m, p := v.aspect(r); !strings.HasPrefix(m, "2.20") || p != "2" {
		t.Errorf("a free fit: measured %s, predicted %s", m, p)
	}
}

func TestOneFileAFrame(t *testing.T) {
	for _, c := range []struct {
		files []string
		want  string
	}{
		{[]string{"a_1_with.tif", "a_1_without.tif", "a_2_with.tif", "a_2_without.tif", "b.tif"}, `["_with", "_without"]`},
		{[]string{"run/atoms/1.png", "run/light/1.png", "run/atoms/2.png", "run/light/2.png"}, `["atoms/", "light/"]`},
		{[]string{"a_1.fits", "a_2.fits", "a_3.fits"}, ""},
		{[]string{"cat.png", "dog.png"}, ""},
		{nil, ""},
	} {
		got := oneFileAFrame(c.files)
		if c.want == "" && got != "" || !strings.Contains(got, c.want) {
			t.Errorf("%v: %q, want %q", c.files, got, c.want)
		}
	}
}

func TestPage(t *testing.T) {
	var p page
	p.pair("one name", "%s", strings.Repeat("word ", 30))
	p.table([][]string{{"shot", "n", "empty", "remarks"}, {"a", "1", "", ""}, {"bcdef", "12", "", "odd"}}, true)
	want := "  one name        " + strings.TrimSpace(strings.Repeat("word ", 15)) + "\n" +
		strings.Repeat(" ", 18) + strings.TrimSpace(strings.Repeat("word ", 15)) + "\n" +
		"  shot    n  remarks\n  a       1\n  bcdef  12  odd\n"
	if got := p.String(); got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
}

func TestTroubleGathers(t *testing.T) {
	var tr trouble
	for _, where := range []string{"a", "b", "c", "d", "e"} {
		tr.problem(where, "broken")
	}
	tr.problem("", "all wrong")
	var p page
	tr.write(&p)
	if got := p.String(); got != "\nProblems (2)\n   1. a, b, c and 2 more: broken\n   2. all wrong\n" {
		t.Errorf("got %q", got)
	}
}

// TestLines: of a long list shots that would fail are shown, all of them up to a number.
func TestLines(t *testing.T) {
	for _, c := range []struct {
		shots, failed int
		lines         int
		want          string
	}{{12, 0, 12, ""}, {20, 0, 7, "... 14 more"}, {20, 12, 19, "... 2 more"}, {200, 120, 47, "... 154 more 80 of them would fail"}} {
		v := &visit{shots: make([]shot, c.shots), look: &night.Look{Shots: make([]night.Seen, c.shots)}}
		v.Settings = parsed(t)
		for i := range c.failed {
			v.shots[4+i].refuse("unfinished")
		}
		lines := v.lines()[1:]
		text := ""
		for _, l := range lines {
			text += strings.Join(strings.Fields(strings.Join(l, " ")), " ") + "\n"
		}
		if len(lines) != c.lines || !strings.Contains(text, c.want) {
			t.Errorf("%d of %d shots fail: %d lines, want %d with %q:\n%s", c.failed, c.shots, len(lines), c.lines, c.want, text)
		}
	}
}

func TestDigits(t *testing.T) {
	for _, c := range []struct {
		x    float64
		want string
	}{{27277.4, "27280"}, {0.33, "0.33"}, {3.225, "3.225"}, {1e12, "1e+12"}, {-1234567, "-1235000"}, {0, "0"}} {
		if got := digits(c.x, 4); got != c.want {
			t.Errorf("%g is written %s, want %s", c.x, got, c.want)
		}
	}
}
