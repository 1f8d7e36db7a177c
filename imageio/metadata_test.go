package imageio

import (
	"maps"
	"math"
	"testing"

	"fallshadow/imageio/fits"
)

// The side table goes before the name, the name before the header, the header of the
// atoms frame before that of the light frame, whatever the case of the keys.
func TestMetadataPrecedence(t *testing.T) {
	atoms := []fits.Card{fits.Integer("TOF", 1, ""), fits.Integer("EVAP", 1, ""), fits.Integer("GAIN", 1, ""), fits.Integer("HEAD", 1, "")}
	light := []fits.Card{fits.Integer("HEAD", 2, ""), fits.Integer("LIGHT", 2, "")}
	dir := night(t, map[string][]byte{
		"tof3_gain3_007_a.fits": cube(t, 0, 1, atoms...),
		"tof3_gain3_007_l.fits": cube(t, 0, 1, light...),
		"scan.csv":              []byte("\ufeffshot;tof;Evap;remark\n6;0;0;\n7;4;4; fine \n"),
	})
	layout := Layout{
		Kind:    "files",
		Suffix:  map[Role]string{Atoms: "_a", Light: "_l"},
		Pattern: `tof(?P<tof>\d+)_gain(?P<gain>\d+)(?P<none>x?)`,
		Sidecar: "scan.csv",
	}
	n := scan(t, dir, layout)
	if len(n.Shots) != 1 || len(n.Strays) != 0 {
		t.Fatalf("%q", show(n))
	}
	raw, err := Read(t.Context(), dir, n.Shots[0], layout)
	if err != nil {
		t.Fatal(err)
	}
	for key, want := range map[string]string{"TOF": "4", "tof": "4", "EVAP": "4", "gain": "3", "HEAD": "1", "LIGHT": "2", "remark": "fine", "shot": "7", "NAXIS1": "3"} {
		if got, ok := raw.Meta.Get(key); !ok || got != want {
			t.Errorf("%s = %q, want %q", key, got, want)
		}
	}
	if v, ok := raw.Meta.Get("none"); ok {
		t.Errorf("an empty group gave %q", v)
	}
}

func TestMetadataNumber(t *testing.T) {
	m := Metadata{"TOF": "1.5D1", "NAME": "cold", "HEX": "0x10", "UNDER": "1_0"}
	if v, err := m.Number("tof"); v != 15 || err != nil {
		t.Errorf("tof = %v, %v", v, err)
	}
	for key, want := range map[string]string{
		"NAME":  `NAME is "cold", not a number`,
		"UNDER": `UNDER is "1_0", not a number`,
		"MASS":  "no MASS in the header, the file name or the side table",
	} {
		if v, err := m.Number(key); err == nil || err.Error() != want || math.IsNaN(v) {
			t.Errorf("%s = %v, %v, want %s", key, v, err, want)
		}
	}
}

func TestDecimalComma(t *testing.T) {
	for text, want := range map[string]bool{"6,750": true, "-1,5e3": true, " 0,5 ": true, "6.75": false, "1,000,000": false, "1,000.5": false, "a,b": false, ",": false, "": false, "3": false} {
		if got := DecimalComma(text); got != want {
			t.Errorf("%q: %v", text, got)
		}
	}
}

func TestMetadataOfHeaders(t *testing.T) {
	dir := night(t, map[string][]byte{
		"a.fits": fixture(t, "fits/testdata/longheader.fits"),
		"b.fits": fixture(t, "fits/testdata/extensions.fits"),
		"c.tif":  fixture(t, "testdata/pages.tif"),
		"d.png":  fixture(t, "testdata/grey16.png"),
	})
	want := map[string]Metadata{
		"a": {"OBSERVER": "it's 5 o'clock / tea", "ESO DET EXPTIME": "1E-05", "FLAG": "T", "EMPTY": "", "COMMENT": "first line\nsecond line", "KEY0299": "149.5"},
		"b": {"TOF": "15.5", "EXTNAME": "ATOMS"},
		"c": {"tof": "12.5", "ImageDescription": "tof = 12.5\nscan: 3"},
		"d": {"tof": "7.25", "exposure": "30 us"},
	}
	for _, s := range scan(t, dir, Layout{}).Shots {
		layout := Layout{}
		if s.Name == "d" {
			layout.Kind = "density"
		}
		raw, err := Read(t.Context(), dir, s, layout)
		if err != nil {
			t.Error(err)
			continue
		}
		for key, value := range want[s.Name] {
			if got, ok := raw.Meta[key]; !ok || got != value {
				t.Errorf("%s: %s = %q, want %q", s.Name, key, got, value)
			}
		}
	}
}

func TestSidecar(t *testing.T) {
	shot := Shot{Name: "run/shot_007", Files: []ShotFile{{"run/shot_007.fits", Unused}}}
	tests := []struct {
		name, table, key string
		want             Metadata
	}{
		{"by number", "shot,tof\n6,1\n7,2\n", "", Metadata{"shot": "7", "tof": "2"}},
		{"by number with zeros", "shot,tof\n007,2\n", "", Metadata{"shot": "007", "tof": "2"}},
		{"by number written as real", "shot,tof\n7.0,2\n", "", Metadata{"shot": "7.0", "tof": "2"}},
		{"by name", "name,tof\nrun/shot_007,2\n", "", Metadata{"name": "run/shot_007", "tof": "2"}},
		{"by base name", "name,tof\nshot_007,2\n", "", Metadata{"name": "shot_007", "tof": "2"}},
		{"by path", "name,tof\nrun/shot_007.fits,2\n", "", Metadata{"name": "run/shot_007.fits", "tof": "2"}},
		{"by file name", "name,tof\nshot_007.fits,2\n", "", Metadata{"name": "shot_007.fits", "tof": "2"}},
		{"the name goes before the number", "name,tof\n7,1\nshot_007,2\n", "", Metadata{"name": "shot_007", "tof": "2"}},
		{"by a named column", "tof,shot\n7,1\n3,7\n", "shot", Metadata{"shot": "7", "tof": "3"}},
		{"tabs, blanks, CRLF", "shot\ttof\tnote\r\n7\t 2 \ta, b\r\n", "", Metadata{"shot": "7", "tof": "2", "note": "a, b"}},
		{"empty cells say nothing", "shot,tof,\n7,,5\n", "", Metadata{"shot": "7"}},
		{"no row", "shot,tof\n8,1\n", "", Metadata{}},
	}
	for _, tt := range tests {
		dir := night(t, map[string][]byte{"scan.csv": []byte(tt.table)})
		side, err := readSidecar(dir, Layout{Sidecar: "scan.csv", SidecarKey: tt.key})
		if err != nil {
			t.Errorf("%s: %v", tt.name, err)
			continue
		}
		shots := []Shot{shot}
		side.assign(shots, nil)
		if got := shots[0].Meta; !maps.Equal(got, tt.want) || shots[0].Problem != nil {
			t.Errorf("%s: %v, %v, want %v", tt.name, got, shots[0].Problem, tt.want)
		}
	}
}

func TestSidecarBroken(t *testing.T) {
	tests := []struct{ table, key, want string }{
		{"", "", "side table scan.csv: truncated: no header line"},
		{"shot,tof\n1,2\n1,3\n", "", "side table scan.csv: line 3: broken: a second row for 1"},
		{"shot,tof\n1,2\n01,3\n", "", "side table scan.csv: line 3: broken: a second row for 01"},
		{"shot,tof\n1\n", "", "side table scan.csv: broken: record on line 2: wrong number of fields"},
		{"shot,tof\n\"1,2\n", "", `side table scan.csv: broken: parse error on line 2, column 6: extraneous or missing " in quoted-field`},
		{"shot,tof\n,2\n", "", "side table scan.csv: line 2: broken: the column shot is empty"},
		{"shot,tof\n1,2\n", "name", `side table scan.csv: no column "name" among shot, tof`},
	}
	for _, tt := range tests {
		dir := night(t, map[string][]byte{"scan.csv": []byte(tt.table)})
		_, err := Scan(t.Context(), dir, Layout{Sidecar: "scan.csv", SidecarKey: tt.key})
		if err == nil || err.Error() != tt.want {
			t.Errorf("%q: %v, want %s", tt.table, err, tt.want)
		}
	}
}
