package watch

import (
	"context"
	"fmt"
	"image"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/simulate"
)

const wideScenario = `name = "wide"
about = "a small cloud in a large frame"
seed = 3
shots = %d
[gas]
law = "ideal"
[path]
atoms = [120000, 120000]
t_reduced = [0.8, 0.8]
[flight]
ms = [20]
[picture]
width_px = 640
height_px = 600
x_px = %d
y_px = %d
[camera]
offset_counts = 104
[probe]
intensity_isat = 0.35
x_px = 320
y_px = 300
waist_px = 900
power_noise = 0.02
`

// wideShots draws shots with the cloud at a place, and returns their files.
func wideShots(t *testing.T, shots, x, y int) (files []string, lab []byte) {
	t.Helper()
	_, lab, err := simulate.Preset("rubidium")
	if err != nil {
		t.Fatal(err)
	}
	s, err := simulate.Parse([]byte(fmt.Sprintf(wideScenario, shots, x, y)), "wide")
	if err != nil {
		t.Fatal(err)
	}
	s.Seed += uint64(x)
	n, err := simulate.New(s, lab, "rubidium")
	if err != nil {
		t.Fatal(err)
	}
	dir := filepath.Join(t.TempDir(), "drawn")
	if err := n.Write(context.Background(), dir, 2, nil); err != nil {
		t.Fatal(err)
	}
	if files, err = filepath.Glob(filepath.Join(dir, "*.fits")); err != nil || len(files) != shots {
		t.Fatalf("%v, %v", files, err)
	}
	return files, lab
}

// In a large frame shots are fitted in a window about the cloud once its place is known;
// a cloud that has moved out of it is found again, and the window follows.
func TestWindowFollowsTheCloud(t *testing.T) {
	here, lab := wideShots(t, 3, 200, 180)
	there, _ := wideShots(t, 3, 470, 420)
	dir := filepath.Join(t.TempDir(), "night")
	write(t, filepath.Join(dir, "fallshadow.toml"), lab)
	h := newHall()
	w, _ := run(t, Options{Dir: dir, Workers: 1}, h)
	all := image.Rect(0, 0, 640, 600)
	show := func(n int, file string) image.Rectangle {
		name := fmt.Sprintf("wide_%d", n)
		data, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		write(t, filepath.Join(dir, name+".fits"), data)
		h.until(t, name, func() bool { return h.pictures[name] != nil })
		w.desk.wait() // for the bench of the next window
		return h.pictures[name].Region
	}
	if r := show(1, here[0]); !image.Pt(200, 180).In(r) {
		t.Errorf("the first shot is fitted in %v", r)
	}
	small := show(2, here[1])
	if !image.Pt(200, 180).In(small) || area(small)*3 > area(all) {
		t.Errorf("the second shot is fitted in %v", small)
	}
	if r := show(3, here[2]); r != small {
		t.Errorf("the third shot is fitted in %v, the second was in %v", r, small)
	}
	if r := show(4, there[0]); !image.Pt(470, 420).In(r) {
		t.Errorf("the cloud that moved was found in %v", r)
	}
	if r := show(5, there[1]); !image.Pt(470, 420).In(r) || r == small {
		t.Errorf("afterwards shots are fitted in %v", r)
	}
	for _, r := range rowsOf(t, w) {
		want := image.Pt(200, 180)
		if strings.Compare(r.Shot, "wide_4") >= 0 {
			want = image.Pt(470, 420)
		}
		if d := math.Hypot(r.Number("x_px")-float64(want.X), r.Number("y_px")-float64(want.Y)); !(d <= 1) {
			t.Errorf("%s is %.1f px off its place", r.Shot, d)
		}
		if n := r.Number("atoms"); !(math.Abs(n/120000-1) <= 0.05) {
			t.Errorf("%s has %g atoms", r.Shot, n)
		}
	}
}
