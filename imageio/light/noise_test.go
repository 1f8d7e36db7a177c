package light

import (
	"context"
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"

	"fallshadow/imageio"
)

// odRow is a row of testdata/reference/od_noise.csv: the variance of
// alpha ln(B/A) + (B-A)/S in closed form and by four million draws of another program.
type odRow struct{ b, s, alpha, d, r, dark, depth, a, variance, drawn, bias, biasDrawn float64 }

func odRows(t *testing.T) []odRow {
	f, err := os.Open("../../testdata/reference/od_noise.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	records, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows []odRow
	for _, record := range records[1:] {
		var v [12]float64
		for i, cell := range record {
			if v[i], err = strconv.ParseFloat(cell, 64); err != nil {
				t.Fatal(err)
			}
		}
		rows = append(rows, odRow{v[0], v[1], v[2], v[3], v[4], v[5], v[6], v[7], v[8], v[9], v[10], v[11]})
	}
	return rows
}

// through carries the noise of an exposure through the law of the table.
func (o odRow) through(n imageio.Noise) float64 {
	ga, gb := o.alpha/o.a+1/o.s, o.alpha/o.b+1/o.s
	v := ga*ga*(o.a+n.Read*n.Read) + gb*gb*(n.LightShot*o.b+n.LightRead)
	if n.DarkIsShared {
		return v + (ga-gb)*(ga-gb)*n.Dark
	}
	return v + (ga*ga+gb*gb)*n.Dark
}

// TestNoiseOfDensity holds the noise figures against od_noise.csv, and frames drawn with
// the table's counts against the figures of their exposures.
func TestNoiseOfDensity(t *testing.T) {
	for _, row := range odRows(t) {
		stated := row.through(imageio.Noise{
			Read: math.Sqrt(row.d + row.r*row.r), LightShot: 1, LightRead: row.d + row.r*row.r,
			Dark: row.dark, DarkIsShared: true,
		})
		within(t, "formula against the table's draws", stated/row.drawn, 1, 0.01)
		within(t, "formula against the table's", stated/row.variance, 1, 1e-6)

		const side, lo, hi = 160, 28, 132
		s := newScene(side, side, 41)
		s.electrons, s.read = row.b, math.Sqrt(max(row.d+row.r*row.r, 1))
		s.depth = func(x, y float64) float64 {
			if x >= lo && x < hi && y >= lo && y < hi {
				return math.Log(row.b / row.a)
			}
			return 0
		}
		raws := s.night(9)
		e := expose(t, prepare(t, s.camera(), raws), raws[3])
		var sum, squares, count float64
		for i := range e.Atoms {
			if x, y := i%side, i/side; x < lo || x >= hi || y < lo || y >= hi || !e.Good[i] {
				continue
			}
			od := row.alpha*math.Log(e.Light[i]/e.Atoms[i]) + (e.Light[i]-e.Atoms[i])/row.s
			sum += od
			squares += od * od
			count++
		}
		m := sum / count
		measured := squares/count - m*m
		within(t, "draws against the exposure's noise", measured/row.through(e.Noise), 1, 5*math.Sqrt(2/count)+0.01)
	}
}

// TestFaintIsUnbiased checks at 20 electrons a pixel that masking, digitising and scaling
// leave mean counts and the scale of the light where they are, to a thousandth or four
// standard errors.
func TestFaintIsUnbiased(t *testing.T) {
	s := newScene(128, 128, 42)
	s.electrons = 20
	const shots = 24
	raws := s.night(shots)
	n := prepare(t, s.camera(), raws)
	var atoms, scale, pixels float64
	for _, raw := range raws {
		e := expose(t, n, raw)
		scale += e.Noise.LightShot / shots
		for i, g := range e.Good {
			if g {
				atoms += e.Atoms[i]
				pixels++
			}
		}
	}
	within(t, "electrons", atoms/pixels, 20, 0.02+4*math.Sqrt((20+36*1.1)/pixels))
	within(t, "scale", scale, 1, 0.001+4*math.Sqrt(2*(20+36)/(400*pixels*0.44)))
}

// TestReferenceNoise checks that the scatter of the light itself, own and basis, binned
// or not, is what Noise says. The probe is flat and still, so all scatter is noise.
func TestReferenceNoise(t *testing.T) {
	for _, bin := range []int{1, 2} {
		for _, k := range []int{1, 4, 12} {
			s := newScene(160, 160, 43)
			s.electrons, s.power, s.gain = 400, 0.02, 2
			raws := s.night(13)
			c := s.camera()
			c.Bin = bin
			n := prepare(t, c, raws)
			e := expose(t, n, raws[5])
			refs := NewReferences(n, k, len(raws), loader(raws))
			out, err := refs.Apply(context.Background(), 5, e, Cloud{Mask: make([]bool, len(e.Light))})
			if err != nil {
				t.Fatal(err)
			}
			if want := map[bool]string{true: "own", false: "basis"}[k == 1]; out.Reference != want {
				t.Errorf("k = %d: reference %s", k, out.Reference)
			}
			mean, variance, _ := clipped(out.Light)
			stated := out.Noise.LightShot*mean + out.Noise.LightRead + out.Noise.Dark
			within(t, "variance of the light", variance/stated, 1, 5*math.Sqrt(2/float64(len(out.Light)))+0.01)
			if got := out.Noise.LightShot * float64(k); !(got > 0.9 && got < 2.5) { // Cauchy: at least 1/k; more by what the coefficients learn of noise
				t.Errorf("k = %d: shot noise %g per electron, about 1/k expected", k, out.Noise.LightShot)
			}
		}
	}
}
