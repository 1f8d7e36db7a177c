package picture

import (
	"bytes"
	"image/png"
	"os"
	"path/filepath"
	"testing"

	"fallshadow/cmd/fallshadow/internal/ledger"
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

func BenchmarkSheet(b *testing.B) {
	v, r := New(cloud()), sheetRow("a")
	for b.Loop() {
		Sheet(r, v)
	}
}
