package picture

import (
	"bytes"
	"image/png"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"golang.org/x/image/font/sfnt"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/fit"
)

func sheetRow(shot string) *ledger.Row {
	r := &ledger.Row{Shot: shot, Flags: []string{"dense"}, Words: map[string]string{"model": "bimodal"}}
	for column, v := range map[string]float64{"flight_ms": 16, "atoms": 123456, "atoms_err": 800, "atoms_cal": 3000, "T_nK": 67, "T_nK_low": 46, "T_nK_high": 99} {
		r.SetNumber(column, v)
	}
	r.Currency.Frames = ledger.Digest{1}
	return r
}

// A sheet can be read as a picture, is the same every time, and is known for what it was
// drawn from. FALLSHADOW_SCREENS names a folder to keep one in.
func TestFolder(t *testing.T) {
	f := Folder{t.TempDir()}
	r := sheetRow("evening/shot_7")
	if f.Has(r) {
		t.Error("a sheet is there before it was drawn")
	}
	var first []byte
	for range 2 {
		if err := f.Draw(r, cloud()); err != nil {
			t.Fatal(err)
		}
		data, err := os.ReadFile(filepath.Join(f.Dir, "evening", "shot_7.png"))
		if err != nil {
			t.Fatal(err)
		}
		if first != nil && !bytes.Equal(first, data) {
			t.Error("two sheets of one shot differ")
		}
		first = data
	}
	img, err := png.Decode(bytes.NewReader(first))
	if err != nil || img.Bounds().Dx() != sheetWidth {
		t.Fatalf("%v, %v", img, err)
	}
	if !f.Has(r) {
		t.Error("the sheet is not known")
	}
	for _, change := range []func(){
		func() { r.Currency.Settings = ledger.Digest{2} },
		func() { r.Shot = "evening/shot_8" },
	} {
		if change(); f.Has(r) {
			t.Error("the sheet of something else is taken for this one")
		}
	}
	if dir := os.Getenv("FALLSHADOW_SCREENS"); dir != "" {
		if err := os.WriteFile(filepath.Join(dir, "sheet.png"), first, 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// A shot without maps has no sheet, one with an empty picture has, and no name leads out
// of the folder.
func TestFolderAtTheEdges(t *testing.T) {
	f := Folder{t.TempDir()}
	facts := cloud()
	facts.Fit.Model = fit.ModelNone
	if err := f.Draw(sheetRow("empty"), facts); err != nil || !f.Has(sheetRow("empty")) {
		t.Errorf("an empty picture: %v", err)
	}
	facts.Fit.Maps = nil
	if err := f.Draw(sheetRow("unseen"), facts); err != nil || f.Has(sheetRow("unseen")) {
		t.Errorf("no maps: %v", err)
	}
	if err := f.Draw(sheetRow("../out"), cloud()); err == nil || f.Has(sheetRow("../out")) {
		t.Error("a sheet was written outside")
	}
}

// TestRuns: powers of ten stand above the line and indices below it, in letters that the fonts have.
func TestRuns(t *testing.T) {
	for text, want := range map[string][]run{
		"1.4×10⁻⁴ nK": {{"1.4×10", 0}, {"−4", raised}, {" nK", 0}},
		"σ₀n/α":       {{"σ", 0}, {"0", lowered}, {"n/α", 0}},
		"12\u2009345": {{"12\u00a0345", 0}},
		"":            nil,
	} {
		if got := runs(text); !slices.Equal(got, want) {
			t.Errorf("%q is %v", text, got)
		}
	}
	var buf sfnt.Buffer
	for _, r := range runs(report.Plain(1.4e-4, 3) + report.Plain(-2.35e17, 3) + "⁰¹³⁶⁸⁹₀μσα±×−µ\u2009") {
		for _, letter := range r.text {
			for _, face := range []*sfnt.Font{regular, bold} {
				if i, err := face.GlyphIndex(&buf, letter); err != nil || i == 0 {
					t.Errorf("no glyph for %q", letter)
				}
			}
		}
	}
}

// A raised letter is drawn above a level one.
func TestRaised(t *testing.T) {
	lowest := func(text string) (y int) {
		c := newCanvas(60, 60, paper)
		c.text(10, 40, text, 30, regular, ink, 0)
		for i := range 60 * 60 {
			if c.RGBAAt(i%60, i/60) != paper {
				y = i / 60
			}
		}
		return y
	}
	if up, on, down := lowest("⁰"), lowest("0"), lowest("₀"); !(up < on-5 && on < down-2) {
		t.Errorf("the lowest ink is at %d, %d, %d", up, on, down)
	}
}

func BenchmarkSheet(b *testing.B) {
	v, r := New(cloud()), sheetRow("a")
	for b.Loop() {
		Sheet(r, v)
	}
}
