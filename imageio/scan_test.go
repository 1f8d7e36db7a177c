package imageio

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// show lists a night, one line a shot, dark and stray.
func show(n Night) []string {
	var lines []string
	for _, s := range n.Shots {
		line := s.Name + ":"
		for _, f := range s.Files {
			line += fmt.Sprintf(" %s=%v", f.Path, f.Role)
		}
		if s.Problem != nil {
			line += " ! " + s.Problem.Error()
		}
		lines = append(lines, line)
	}
	for _, d := range n.Darks {
		lines = append(lines, fmt.Sprintf("dark %s=%v", d.Path, d.Role))
	}
	for _, s := range n.Strays {
		lines = append(lines, "stray "+s.Path+": "+s.Reason)
	}
	return lines
}

func TestScan(t *testing.T) {
	good := cube(t, 0, 3)
	bySuffix := map[Role]string{Atoms: "_atoms", Light: "_light", Dark: "_dark"}
	tests := []struct {
		name   string
		layout Layout
		files  map[string][]byte
		want   []string
	}{
		{"cubes in natural order, by content, strays named", Layout{}, map[string][]byte{
			"shot_10.fits": good, "shot_9.fits": good, "run/shot_1.dat": good, "run/shot_2": good,
			"broken.fits": []byte("random"), "empty.tif": nil,
			"notes.txt": []byte("hello"), "clock.bin": {1, 2, 0xff}, "zero": nil,
			"shot_11.fits.part": good, "shot_12.TMP": good, ".shot_13.fits": good, ".cache/shot_14.fits": good,
			"night.toml": []byte("x = 1"), "results/a.png": good,
		}, []string{
			"broken: broken.fits=unused",
			"empty: empty.tif=unused",
			"run/shot_1: run/shot_1.dat=unused",
			"run/shot_2: run/shot_2=unused",
			"shot_9: shot_9.fits=unused",
			"shot_10: shot_10.fits=unused",
			"stray clock.bin: no camera frames: the content is unknown",
			"stray notes.txt: no camera frames: the content is text",
			"stray shot_11.fits.part: unfinished, by its ending",
			"stray shot_12.TMP: unfinished, by its ending",
			"stray zero: no camera frames: the content is empty",
		}},
		{"two files of one name", Layout{}, map[string][]byte{"a.fits": good, "a.fit": good, "b.fits": good}, []string{
			"a: a.fit=unused a.fits=unused ! a.fit and a.fits have the same name but for the ending: rename one",
			"b: b.fits=unused",
		}},
		{"files by suffix, incomplete and double ones named", Layout{Kind: "files", Suffix: bySuffix}, map[string][]byte{
			"1_atoms.fits": good, "1_light.fits": good, "1_dark.fits": good,
			"2_atoms.fits": good, "2_dark.fits": good,
			"3_atoms.fits": good, "3_atoms.fit": good, "3_light.fits": good, "3_dark.fits": good,
			"5_light.fits": good, "5_dark.fits": good,
			"4.fits": good, "_atoms.fits": good,
		}, []string{
			"1: 1_atoms.fits=atoms 1_light.fits=light 1_dark.fits=dark",
			`2: 2_atoms.fits=atoms 2_dark.fits=dark ! 2: the light frame is missing: no file with "_light" beside 2_atoms.fits`,
			"3: 3_atoms.fit=atoms 3_atoms.fits=atoms 3_light.fits=light 3_dark.fits=dark ! two atoms frames, 3_atoms.fit and 3_atoms.fits: take one away",
			`5: 5_light.fits=light 5_dark.fits=dark ! 5: the atoms frame is missing: no file with "_atoms" beside 5_light.fits`,
			"stray 4.fits: the name fits no frame: atoms is _atoms, light is _light, dark is _dark",
			"stray _atoms.fits: the name fits no frame: atoms is _atoms, light is _light, dark is _dark",
		}},
		{"the longest suffix counts", Layout{Kind: "files", Suffix: map[Role]string{Atoms: "", Light: "_light", Dark: "_dark", DarkOfLight: "_light_dark"}}, map[string][]byte{
			"1.fits": good, "1_light.fits": good, "1_dark.fits": good, "1_light_dark.fits": good,
		}, []string{
			"1: 1.fits=atoms 1_light.fits=light 1_dark.fits=dark 1_light_dark.fits=dark_of_light",
		}},
		{"files by folder", Layout{Kind: "files", Suffix: map[Role]string{Atoms: "atoms/", Light: "light/"}}, map[string][]byte{
			"atoms/1.fits": good, "light/1.fits": good, "run/atoms/1.fits": good, "run/light/1.fits": good, "noatoms/1.fits": good,
		}, []string{
			"1: atoms/1.fits=atoms light/1.fits=light",
			"run/1: run/atoms/1.fits=atoms run/light/1.fits=light",
			"stray noatoms/1.fits: the name fits no frame: atoms is atoms/, light is light/",
		}},
		{"darks of the night and a pattern", Layout{Planes: []Role{Atoms, Light}, DarkPattern: `^dark/`, Pattern: `shot_\d+`}, map[string][]byte{
			"shot_1.fits": good, "dark/10.fits": good, "dark/9.fits": good, "dark/notes.txt": []byte("hi"), "test.fits": good,
		}, []string{
			"shot_1: shot_1.fits=unused",
			"dark dark/9.fits=dark",
			"dark dark/10.fits=dark",
			"stray dark/notes.txt: no camera frames: the content is text",
			`stray test.fits: the path does not match the pattern shot_\d+`,
		}},
		{"nothing", Layout{}, nil, nil},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			dir := night(t, tt.files)
			if got := show(scan(t, dir, tt.layout)); !slices.Equal(got, tt.want) {
				t.Errorf("\n got %s\nwant %s", strings.Join(got, "\n     "), strings.Join(tt.want, "\n     "))
			}
		})
	}
}

func TestScanFails(t *testing.T) {
	tests := []struct {
		layout Layout
		want   string
	}{
		{Layout{Kind: "cubes"}, `layout kind "cubes" is none of cube, extensions, files, density`},
		{Layout{Planes: []Role{Atoms, Atoms, Light}}, "layout: two frames are called atoms"},
		{Layout{Planes: []Role{Atoms, Dark}}, "layout: a shot needs an atoms and a light frame"},
		{Layout{Planes: []Role{Atoms, Light, Density}}, "layout: a density image does not mix with raw frames"},
		{Layout{Planes: []Role{Atoms, Light, 17}}, "layout: unknown role 17"},
		{Layout{Kind: "files"}, "layout: a shot needs an atoms and a light frame"},
		{Layout{Kind: "files", Suffix: map[Role]string{Atoms: "_a", Light: "_a"}}, `layout: atoms and light have the same suffix "_a"`},
		{Layout{Pattern: "("}, "layout pattern: error parsing regexp: missing closing ): `(`"},
		{Layout{DarkPattern: "*"}, "layout dark pattern: error parsing regexp: missing argument to repetition operator: `*`"},
		{Layout{Sidecar: "scan.csv"}, "side table scan.csv: no such file or directory"},
	}
	dir := t.TempDir()
	for _, tt := range tests {
		if _, err := Scan(t.Context(), dir, tt.layout); err == nil || err.Error() != tt.want {
			t.Errorf("%+v: %v, want %s", tt.layout, err, tt.want)
		}
	}
	if _, err := Scan(t.Context(), filepath.Join(dir, "none"), Layout{}); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("a folder that is not there: %v", err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := Scan(ctx, dir, Layout{}); !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled: %v", err)
	}
}

func TestScanOddFiles(t *testing.T) {
	dir := night(t, map[string][]byte{"a.fits": cube(t, 0, 3), "far/b.fits": nil})
	link := func(from, to string) {
		if err := os.Symlink(from, filepath.Join(dir, to)); err != nil {
			t.Skip("no symbolic links here:", err)
		}
	}
	link("a.fits", "c.fits")
	link("nowhere", "d.fits")
	link("far", "e.fits")
	want := []string{
		"a: a.fits=unused",
		"c: c.fits=unused",
		"far/b: far/b.fits=unused",
		"stray d.fits: cannot be read: no such file or directory",
		"stray e.fits: a link to a folder, which is not followed",
	}
	if got := show(scan(t, dir, Layout{})); !slices.Equal(got, want) {
		t.Errorf("\n got %s\nwant %s", strings.Join(got, "\n     "), strings.Join(want, "\n     "))
	}
	linked := filepath.Join(t.TempDir(), "night")
	if err := os.Symlink(dir, linked); err != nil {
		t.Fatal(err)
	}
	if got := show(scan(t, linked, Layout{})); !slices.Equal(got, want) {
		t.Errorf("through a link: %q", got)
	}
}
