package imageio

import (
	"slices"
	"strings"
	"testing"
)

// A row serves one shot, by its path, its name, or the number that counts it; what might be
// the row of two shots, or of the wrong one, is a Problem and never a flight.
func TestRowsOfShots(t *testing.T) {
	const group = `(?P<n>\d+)_d(?P<depth>\d+)`
	tests := []struct {
		name, pattern, table string
		shots                []string // name, then its TOF or its problem
		unclaimed            string
	}{
		{"two of one base name", "", "n,TOF\na,1\nb,2\n", []string{"x/a ! row a fits y/a too: write the path of the shot in the column n, such as x/a", "x/b 2", "y/a ! row a fits x/a too"}, ""},
		{"two of one number", "", "n,TOF\n1,11\n2,12\n", []string{"a/shot_001 ! row 1 fits b/shot_001 too", "a/shot_002 12", "b/shot_001 ! row 1 fits a/shot_001 too"}, ""},
		{"three of one number", "", "n,TOF\n1,11\n", []string{"a/1x ! row 1 fits b/1x and 1 more too", "b/1x ! row 1 fits a/1x and 1 more too", "c/1x ! row 1 fits a/1x and 1 more too"}, ""},
		{"a path goes before a name, which is not a number then", "", "n,TOF\n1,11\n", []string{"1 11", "shot_1 ! row 1 fits 1 too"}, ""},
		{"paths tell them apart", "", "n,TOF\na/shot_001,1\nb/shot_001.fits,2\n", []string{"a/shot_001 1", "b/shot_001 2"}, ""},
		{"a flight in the name is no number", "", "n,TOF\n1,11\n2,12\n15,99\n", []string{"scan_1_tof15 11", "scan_2_tof15 12"}, "15"},
		{"nor where it is alone", "", "n,TOF\n10,1\n15,2\n", []string{"tof10 ", "tof15 "}, "10 15"},
		{"nor with its unit", "", "n,TOF\n1,11\n20,99\n", []string{"a1_15ms 11", "a2_20ms "}, "20"},
		{"nor with a point", "", "n,TOF\n1,11\n2,12\n5,99\n", []string{"a1_d2 11", "a2_d2.5 12"}, "5"},
		{"unless the table goes by it", "", "tof,TOF\n10,1\n15,2\n", []string{"a_tof10 1", "a_tof15 2"}, ""},
		{"what is the same in all is no number", "", "n,TOF\n3,99\n7,17\n8,18\n", []string{"x/img_7_cam3 17", "x/img_8_cam3 18"}, "3"},
		{"dates and times of day are none", "", "n,TOF\n1,11\n2,12\n", []string{"20260101_120501_0001 11", "20260101_120531_0002 12"}, ""},
		{"of one shot too", "", "n,TOF\n3,13\n20260101,9\n", []string{"scan_3_20260101 13"}, "20260101"},
		{"two that count", "", "n,TOF\n1,11\n16,99\n", []string{"1_d15 ! whether row 1 or 15 is meant by the name is not told: write the path of the shot in the column n, such as 1_d15, or call the number by a group (?P<n>\\d+) in shots.pattern", "2_d16 ! whether row 2 or 16", "3_d17 "}, "1 16"},
		{"two that count, one called as the column", "", "shot,TOF\n1,11\n2,12\n16,99\n", []string{"run15_shot1 11", "run16_shot2 12"}, "16"},
		{"two that count, one named by the pattern", group, "n,TOF\n1,11\n2,12\n15,99\n", []string{"x1_d15 11", "x2_d16 12"}, "15"},
		{"the pattern's name goes before the name", group, "n,TOF\n1,11\n1_d15,99\n", []string{"x/1_d15 11"}, "1_d15"},
		{"the pattern's name is of two shots", group, "n,TOF\n1,11\n", []string{"1_d15 ! row 1 fits 1_d16 too", "1_d16 ! row 1 fits 1_d15 too"}, ""},
		{"what the pattern calls otherwise", `_(?P<depth>\d+)_(?P<tof>\d+)`, "n,depth,TOF\n1,5,11\n2,5,12\n", []string{"x1_5_1 11", "x2_5_2 12"}, ""},
		{"no key of that number", "", "n,TOF\n1,11\n", []string{"shot_2 "}, "1"},
	}
	for _, tt := range tests {
		files := map[string][]byte{"log.csv": []byte(tt.table)}
		for _, s := range tt.shots {
			name, _, _ := strings.Cut(s, " ")
			files[name+".fits"] = cube(t, 0, 1)
		}
		n := scan(t, night(t, files), Layout{Sidecar: "log.csv", Pattern: tt.pattern})
		if got := strings.Join(n.Unclaimed, " "); got != tt.unclaimed {
			t.Errorf("%s: rows of no shot %q, want %q", tt.name, got, tt.unclaimed)
		}
		var got []string
		for i, s := range n.Shots {
			line := s.Name + " " + s.Meta["TOF"]
			if s.Problem != nil {
				line = strings.Replace(s.Name+" ! "+s.Problem.Error(), "side table log.csv: no row of its own: ", "", 1) + s.Meta["TOF"]
				if i < len(tt.shots) && !strings.Contains(tt.shots[i], "write the path") {
					line, _, _ = strings.Cut(line, " is meant")
					line, _, _ = strings.Cut(line, ": write")
				}
			}
			got = append(got, line)
		}
		if !slices.Equal(got, tt.shots) {
			t.Errorf("%s:\n got %s\nwant %s", tt.name, strings.Join(got, "\n     "), strings.Join(tt.shots, "\n     "))
		}
	}
}

// The number of a shot is judged by all names of the night, in whatever order.
func TestRowsWhateverTheOrder(t *testing.T) {
	side, err := parseSidecar([]byte("n,TOF\n1,11\n2,12\n3,13\n"), "")
	if err != nil {
		t.Fatal(err)
	}
	want := map[string]string{"s_1_4": "11", "s_2_4": "12", "u_3": "13"}
	for _, order := range [][]string{{"s_1_4", "s_2_4", "u_3"}, {"u_3", "s_2_4", "s_1_4"}} {
		for _, s := range given(side, nil, order...) {
			if s.Meta["TOF"] != want[s.Name] {
				t.Errorf("%v: %s has %q, want %q", order, s.Name, s.Meta["TOF"], want[s.Name])
			}
		}
	}
}
