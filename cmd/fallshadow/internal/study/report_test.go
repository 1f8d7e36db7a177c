package study

import (
	"bytes"
	"context"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"fallshadow/fit"
	"fallshadow/imageio/fits"
)

func written(t *testing.T, n *Night) string {
	t.Helper()
	a := analysed(t, n)
	d, err := a.Plot(Axes{X: DefaultX, Y: DefaultY})
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	if err := a.WriteReport(context.Background(), &b, d); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

var outside = regexp.MustCompile(`(?i)(src|href|url)\s*[=(]\s*["']?(https?:|//|file:|[a-z0-9_./-]+\.(css|js|png|svg))`)

// TestReport: one page that needs nothing else, with everything of the night in it, names
// escaped, and the same bytes each time.
func TestReport(t *testing.T) {
	n := made(t, 40)
	n.Root = t.TempDir()
	drawShot(t, n.Root, "flagged.fits")
	n.Rows[3].Shot = "<script>x</script>"
	n.Rows[3].Bad = "lost & found"
	n.Rows[20].Shot, n.Rows[20].Flags = "flagged", []string{fit.FlagDense}
	n.Rows[21].Reason = "no light in it"
	page := written(t, n)
	if page != written(t, n) {
		t.Error("two reports of a night differ")
	}
	for _, want := range []string{"38 of 40 shots take part", "least chi2", "by saturation at fixed T", "quoted from memory", "<code>dense</code>",
		"&lt;script&gt;x", "lost &amp; found", "no light in it", "data:image/png;base64,", "species = &#34;87Rb&#34;", "thermal atoms over their saturated number"} {
		if !strings.Contains(page, want) {
			t.Errorf("the report lacks %q", want)
		}
	}
	if n := strings.Count(page, "data:image/png"); n != 1 {
		t.Errorf("%d pictures, one shot has frames", n)
	}
	if n := strings.Count(page, "<svg"); n != 9 {
		t.Errorf("%d figures, want the curve and eight trends", n)
	}
	for _, no := range []string{"<script", "<text", "<?xml", "<!DOCTYPE svg", "NaN"} {
		if strings.Contains(page, no) {
			t.Errorf("the report has %s in it", no)
		}
	}
	if found := outside.FindString(page); found != "" {
		t.Errorf("the report refers to %s", found)
	}
}

// drawShot writes a shot of three frames with a shadow in the middle.
func drawShot(t *testing.T, dir, name string) {
	t.Helper()
	const side = 400
	planes := make([][]uint16, 3)
	for k, level := range []uint16{1100, 1100, 100} {
		planes[k] = make([]uint16, side*side)
		for i := range planes[k] {
			planes[k][i] = level
		}
	}
	for y := 180; y < 220; y++ {
		for x := 180; x < 220; x++ {
			planes[0][y*side+x] = 300
		}
	}
	f, err := os.Create(filepath.Join(dir, name))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if err := fits.WriteCube(f, side, side, planes, nil); err != nil {
		t.Fatal(err)
	}
}

// TestReportOfAFolderThatIsGone still has everything but the pictures.
func TestReportOfAFolderThatIsGone(t *testing.T) {
	n := made(t, 10)
	n.Root = filepath.Join(t.TempDir(), "gone")
	n.Rows[5].Flags = []string{fit.FlagCut}
	if page := written(t, n); !strings.Contains(page, "not where they were fitted") || strings.Contains(page, "data:image") {
		t.Error("a folder that is gone is not told")
	}
}

// TestUnbroken: numbers stay on a line with their errors, and markup is still escaped.
func TestUnbroken(t *testing.T) {
	for text, want := range map[string]string{
		"Tc/Tc0 = 0.9925(64)(-); <b>": `Tc/Tc0 = <span class="n">0.9925(64)(-)</span>; &lt;b&gt;`,
		"as -3.4(2.1), chi2 2":        `as <span class="n">-3.4(2.1)</span>, chi2 2`,
	} {
		if got := string(unbroken(text)); got != want {
			t.Errorf("%s gives %s", text, got)
		}
	}
}

// TestBigReport: what a report shows of many shots does not grow with them.
func TestBigReport(t *testing.T) {
	n := made(t, 2000)
	n.Root = t.TempDir()
	for i := range n.Rows {
		if i%10 == 0 {
			n.Rows[i].Flags = []string{fit.FlagDense}
		}
	}
	page := written(t, n)
	if len(page) > 1<<20 {
		t.Errorf("%d bytes without pictures", len(page))
	}
	if !strings.Contains(page, "and 176 more") {
		t.Error("the rest of the flagged shots is not counted")
	}
}
