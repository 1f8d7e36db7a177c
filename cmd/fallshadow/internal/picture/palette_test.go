package picture

import (
	"image/color"
	"math"
	"testing"
)

// back returns a screen colour in OKLab, by the inverse matrices of the same source.
func back(c color.Color) lab {
	v := linearOf(c)
	l := math.Cbrt(0.4122214708*v[0] + 0.5363325363*v[1] + 0.0514459929*v[2])
	m := math.Cbrt(0.2119034982*v[0] + 0.6806995451*v[1] + 0.1073969566*v[2])
	s := math.Cbrt(0.0883024619*v[0] + 0.2817188376*v[1] + 0.6299787005*v[2])
	return lab{
		0.2104542553*l + 0.7936177850*m - 0.0040720468*s,
		1.9779984951*l - 2.4285922050*m + 0.4505937099*s,
		0.0259040371*l + 0.7827717662*m - 0.8086757660*s,
	}
}

func linearOf(c color.Color) (v [3]float64) {
	r := color.RGBAModel.Convert(c).(color.RGBA)
	for i, x := range []uint8{r.R, r.G, r.B} {
		f := float64(x) / 255
		if f <= 0.04045 {
			v[i] = f / 12.92
		} else {
			v[i] = math.Pow((f+0.055)/1.055, 2.4)
		}
	}
	return v
}

// OKLab of the primaries as the paper's author prints them for sRGB red, and white.
func TestOKLab(t *testing.T) {
	tests := []struct {
		c    color.RGBA
		want lab
	}{
		{color.RGBA{255, 255, 255, 255}, lab{1, 0, 0}},
		{color.RGBA{255, 0, 0, 255}, lab{0.627955, 0.224863, 0.125846}}, // value from memory
		{color.RGBA{0, 0, 0, 255}, lab{0, 0, 0}},
	}
	for _, test := range tests {
		if d := back(test.c).distance(test.want); !(d <= 1e-4) {
			t.Errorf("%v is %v, want %v", test.c, back(test.c), test.want)
		}
		if got := back(test.c).rgba(); got != test.c {
			t.Errorf("there and back %v became %v", test.c, got)
		}
	}
}

// Steps of eight levels look alike within a fifth, which is the rounding to 8 bits, and
// lightness only climbs.
func TestDensityScaleIsEven(t *testing.T) {
	const step = 8
	var steps []float64
	sum := 0.0
	for i := 0; i+step < levels; i += step {
		p, q := back(DensityColors[i]), back(DensityColors[i+step])
		if !(q.l > p.l) {
			t.Errorf("lightness falls from level %d to %d", i, i+step)
		}
		steps = append(steps, p.distance(q))
		sum += p.distance(q)
	}
	mean := sum / float64(len(steps))
	for i, s := range steps {
		if !(math.Abs(s/mean-1) <= 0.2) {
			t.Errorf("step %d is %.4f, the mean %.4f", i, s, mean)
		}
	}
}

// dichromats are the simulation matrices over linear sRGB of Viénot, Brettel and Mollon,
// Color Res. Appl. 24, 243 (1999), for lacking red and green cones (values from memory,
// as they are commonly printed).
var dichromats = map[string][3][3]float64{
	"protan": {{0.11238, 0.88762, 0}, {0.11238, 0.88762, 0}, {0.00401, -0.00401, 1}},
	"deutan": {{0.29275, 0.70725, 0}, {0.29275, 0.70725, 0}, {-0.02234, 0.02234, 1}},
}

// seen is a colour as a dichromat sees it.
func seen(c color.Color, m [3][3]float64) lab {
	v := linearOf(c)
	var out [3]float64
	for i := range out {
		for k := range v {
			out[i] += m[i][k] * v[k]
		}
	}
	return back(color.RGBA{gamma(out[0]), gamma(out[1]), gamma(out[2]), 255})
}

// Without red or green cones the density scale still climbs, no two colours a sixteenth
// of the scale apart look alike, and the two sides of the residuals differ.
func TestScalesForDichromats(t *testing.T) {
	for name, m := range dichromats {
		for i := 0; i+16 < levels; i++ {
			p, q := seen(DensityColors[i], m), seen(DensityColors[i+16], m)
			if !(q.l > p.l && p.distance(q) >= 0.03) {
				t.Errorf("%s: levels %d and %d differ by %.3f", name, i, i+16, p.distance(q))
			}
		}
		for _, i := range []int{0, 30, 60} {
			p, q := seen(ResidualColors[i], m), seen(ResidualColors[levels-1-i], m)
			if !(p.distance(q) >= 0.12) {
				t.Errorf("%s: residuals %d from the ends differ by %.3f", name, i, p.distance(q))
			}
		}
	}
}
