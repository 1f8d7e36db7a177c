package picture

import "image/color"

// levels is how many colours a scale has; the palette's last entry stands for pixels
// that do not count.
const levels = 255

// stop is a place on the way of a scale through OKLab.
type stop struct{ l, chroma, hue float64 }

// densityWay climbs evenly in lightness from near black over violet, blue and sea green
// to cream. Lightness alone orders it, for every kind of colour vision and in grey print.
var densityWay = []stop{
	{0.10, 0.030, 300}, {0.28, 0.120, 288}, {0.46, 0.130, 258}, {0.64, 0.115, 212}, {0.82, 0.105, 158}, {0.97, 0.060, 105},
}

// residualWay falls from blue to a dark middle and climbs to amber: the two hues that
// every common kind of colour vision tells apart, and a middle that does not glare at
// night.
var residualWay = []stop{
	{0.86, 0.090, 235}, {0.62, 0.135, 248}, {0.20, 0.012, 265}, {0.66, 0.140, 62}, {0.90, 0.110, 85},
}

// DensityColors and ResidualColors are the scales of the two maps, from low to high; the
// last entry marks pixels that do not count.
var (
	DensityColors  = scale(densityWay)
	ResidualColors = scale(residualWay)
)

// ways is in how many short steps a way is measured.
const ways = 4096

// scale walks along a way in steps that look equal.
func scale(way []stop) color.Palette {
	points := make([]lab, ways+1)
	length := make([]float64, ways+1)
	for i := range points {
		points[i] = along(way, float64(i)/ways)
		if i > 0 {
			length[i] = length[i-1] + points[i].distance(points[i-1])
		}
	}
	colors := make(color.Palette, 0, levels+1)
	at := 0
	for k := range levels {
		want := length[ways] * float64(k) / (levels - 1)
		for at < ways && length[at] < want {
			at++
		}
		colors = append(colors, points[at].rgba())
	}
	return append(colors, polar(0.45, 0, 0).rgba())
}

// along returns the place at the fraction t of a way, straight from stop to stop.
func along(way []stop, t float64) lab {
	t *= float64(len(way) - 1)
	i := min(int(t), len(way)-2)
	p, q := way[i], way[i+1]
	return polar(p.l, p.chroma, p.hue).mix(polar(q.l, q.chroma, q.hue), t-float64(i)).muted()
}
