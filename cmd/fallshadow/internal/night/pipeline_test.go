package night

import (
	"context"
	"fmt"
	"image"
	"math"
	"os"
	"strconv"
	"testing"

	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/cmd/fallshadow/internal/simulate"
	"fallshadow/fit"
	"fallshadow/imageio"
	"fallshadow/imageio/light"
)

const pipelineScenario = `
name = "big"
about = "rubidium in large frames under moving fringes, for benchmarks"
seed = 7
shots = 48
[gas]
law = "ideal"
[path]
atoms = [300000, 120000]
atoms_jitter = 0.05
t_reduced = [1.25, 0.35]
scan = [310, 230]
[flight]
ms = [24]
[picture]
width_px = 1024
height_px = 1024
x_px = 510
y_px = 512
jitter_px = 2
[camera]
offset_counts = 104
pattern_counts = 1
hot_pixels = 20
hot_electrons = 2000
[probe]
intensity_isat = 0.3
x_px = 500
y_px = 520
waist_px = 1200
power_noise = 0.02
[fringes]
count = 6
contrast = 0.03
period_px = [7, 60]
wander_rad = 1.5
jitter_rad = 0.2
`

const pipelineSettings = `
[atom]
species = "87Rb"
[trap]
axis1_hz = { value = 20.0, err = 0.1 }
axis2_hz = { value = 90.0, err = 0.5 }
sight_hz = { value = 120.0, err = 0.5 }
angle_deg = 4.0
[camera]
pixel_um = 6.45
magnification = { value = 2.0, err = 0.02 }
electrons_per_count = 1.0
read_noise_electrons = 6.0
resolution_um = { value = 3.0, err = 0.3 }
[probe]
alpha = { value = 2.0, err = 0.05 }
counts_per_isat = { value = 9000.0, err = 300.0 }
[flight]
from = "TOF"
zero_ms = { value = 0.0, err = 0.02 }
[shots]
planes = ["atoms", "light", "dark"]
scan = ["EVAP"]
[region]
x = 260
y = 262
width = 500
height = 500
[fit]
basis_size = 40
`

// pipelineNight draws the night in a folder of its own, unless FALLSHADOW_BENCH, which says of how
// many shots, is not set.
func pipelineNight(b *testing.B) (dir string, s *settings.Settings) {
	shots, err := strconv.Atoi(os.Getenv("FALLSHADOW_BENCH"))
	if err != nil {
		b.Skip("FALLSHADOW_BENCH does not say how many shots of 1024x1024 pixels to draw")
	}
	scenario, err := simulate.Parse([]byte(pipelineScenario), "big")
	if err != nil {
		b.Fatal(err)
	}
	n, err := simulate.New(scenario.WithShots(shots), []byte(pipelineSettings), "big")
	if err != nil {
		b.Fatal(err)
	}
	dir = b.TempDir() + "/night"
	if err := n.Write(context.Background(), dir, 2, nil); err != nil {
		b.Fatal(err)
	}
	if s, err = settings.Parse([]byte(pipelineSettings), "big"); err != nil {
		b.Fatal(err)
	}
	return dir, s
}

// cpuSeconds is the processor time that this process has had, where the system tells.
var cpuSeconds = func(*testing.B) float64 { return math.NaN() }

// BenchmarkPipeline runs a night of cubes of 1024x1024 pixels, of which 500x500 are fitted,
// from the files to the table, and the parts of one shot by themselves. Shots a second of
// processor time are those of one core that has nothing else to do.
func BenchmarkPipeline(b *testing.B) {
	dir, s := pipelineNight(b)
	for workers := 1; workers <= 2; workers++ {
		b.Run(fmt.Sprintf("workers=%d", workers), func(b *testing.B) {
			shots, before := 0, cpuSeconds(b)
			for range b.N {
				o := Options{Dir: dir, Out: b.TempDir(), Settings: s, Workers: workers}
				out, err := Batch(context.Background(), o, quietProgress{})
				if err != nil || out.Failed > 0 {
					b.Fatal(err, out)
				}
				shots += len(out.Rows)
			}
			b.ReportMetric(float64(shots)/b.Elapsed().Seconds(), "shots/s")
			b.ReportMetric(float64(shots)/(cpuSeconds(b)-before), "shots/cpu-s")
		})
	}
	benchParts(b, dir, s)
}

// benchParts times what is done for the shot in the middle of a night.
func benchParts(b *testing.B, dir string, s *settings.Settings) {
	ctx := context.Background()
	scanned, err := imageio.Scan(ctx, dir, s.Layout())
	if err != nil {
		b.Fatal(err)
	}
	load := func(ctx context.Context, at int) (*imageio.Raw, error) {
		return imageio.Read(ctx, dir, scanned.Shots[at], s.Layout())
	}
	all := func(yield func(*imageio.Raw) bool) {
		for at := range scanned.Shots {
			if raw, err := load(ctx, at); err != nil || !yield(raw) {
				return
			}
		}
	}
	n := len(scanned.Shots)
	w, err := setUp(ctx, s, image.Rectangle{}, &frames{all: all, n: n, load: load})
	if err != nil {
		b.Fatal(err)
	}
	raw, err := load(ctx, n/2)
	if err != nil {
		b.Fatal(err)
	}
	part := func(name string, do func() error) {
		b.Run(name, func(b *testing.B) {
			for range b.N {
				if err := do(); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
	workspace := fit.NewWorkspace()
	exposure, err := w.night.Expose(raw)
	if err != nil {
		b.Fatal(err)
	}
	flight, err := s.Flight(raw.Meta)
	if err != nil {
		b.Fatal(err)
	}
	var place *fit.Place
	part("read", func() error { _, err := load(ctx, n/2); return err })
	part("expose", func() error { _, err := w.night.Expose(raw); return err })
	part("lend", func() error {
		one := light.NewReferences(w.night, 1, n, load)
		_, err := one.Set(ctx, n/2)
		return err
	})
	part("locate", func() (err error) {
		place, err = fit.Locate(ctx, w.picture(exposure), &w.lab, flight, w.options, workspace)
		return err
	})
	lit := exposure
	part("basis", func() (err error) {
		lit, err = w.references.Apply(ctx, n/2, exposure, light.Cloud{Mask: place.Mask, Transmission: place.Transmission})
		return err
	})
	options := w.options
	options.Near = place
	part("fit", func() error {
		_, err := fit.Cloud(ctx, w.picture(lit), &w.lab, flight, options, workspace)
		return err
	})
}
