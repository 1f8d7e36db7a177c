package check

import (
	"strings"
	"testing"
)

// TestCameraFromDarksOfTheNight: shots without darks of their own have the camera measured
// with the night's, whether the settings give the gain or not, and are told what to do where
// there is but one.
func TestCameraFromDarksOfTheNight(t *testing.T) {
	dir := simulated(t, "rubidium", 6, "planes = ", "layout = \"files\"\nsuffixes = [\"_a\", \"_l\", \"_d\"]\nplanes = ")
	const planes, suffixes = `"_l", "_d"]`, `planes = ["atoms", "light", "dark"]`
	edits := func(darks string, more ...string) []string {
		return append(more, planes, `"_l"]`, suffixes, "planes = [\"atoms\", \"light\"]\ndark_files = [\""+darks+"\"]")
	}
	for _, given := range []bool{true, false} {
		more, want := []string{}, "gain 1 electrons a count, from the settings; "
		if !given {
			more, want = []string{"electrons_per_count = 1.0", "", "read_noise_electrons = 6.0", ""}, "gain "
		}
		out, text := look(t, dir, 0, edits("*_d.fits", more...)...)
		if out.Usable != 6 || out.Problems != 0 {
			t.Errorf("%d usable, %d problems", out.Usable, out.Problems)
		}
		says(t, text, want+`(1\.0|0\.99)\d*\(\d+\)( electrons a count,)? measured from 5 pairs`, "6 in the master dark")
	}
	_, text := look(t, dir, 0, edits("*_0001_d.fits", "electrons_per_count = 1.0", "", "read_noise_electrons = 6.0", "")...)
	says(t, text, "two dark frames, theirs or the night's: there are fewer; state it", "electrons_per_count")
	if strings.Contains(text, "no file in the folder") {
		t.Errorf("a dark file that is there is missed:\n%s", text)
	}
	_, none := look(t, dir, 0, edits("darks/*.fits")...)
	says(t, none, `dark_files: no file in the folder is called darks/\*\.fits`)
	if !strings.Contains(text, "none of which a batch can fit") {
		t.Errorf("goes on:\n%s", text)
	}
}
