package picture

import (
	"math"

	"fallshadow/fit"
)

// Cut is σ0 n along a line through the centre of the cloud, averaged over
// Strip pixels across; Total goes through the camera's blur as the data did. Distances
// are from the centre; NaN where no pixel counts.
type Cut struct {
	Angle                      float64 // from +x towards +y, rad
	Strip                      int
	Um, Data, Thermal, Total   []float64
	StartX, StartY, EndX, EndY float64 // ends of the line, pixels of the maps
}

// strip is how many pixels across a cut are averaged.
const strip = 5

// newCut samples the maps along a line, a point a pixel, data and model alike.
func newCut(m *fit.Maps, x, y, angle, pixelUm float64) Cut {
	c := Cut{Angle: angle, Strip: strip}
	sin, cos := math.Sincos(angle)
	inside := func(d float64) bool {
		px, py := x+d*cos, y+d*sin
		return px >= 0 && py >= 0 && px <= float64(m.Width-1) && py <= float64(m.Height-1)
	}
	reach := int(math.Hypot(float64(m.Width), float64(m.Height)))
	for d := -reach; d <= reach; d++ {
		s := float64(d)
		if !inside(s) {
			continue
		}
		if len(c.Um) == 0 {
			c.StartX, c.StartY = x+s*cos, y+s*sin
		}
		c.EndX, c.EndY = x+s*cos, y+s*sin
		c.add(m, s, s*pixelUm, x, y, sin, cos)
	}
	return c
}

// add averages the pixels nearest to the points across the cut at distance s.
func (c *Cut) add(m *fit.Maps, s, um, x, y, sin, cos float64) {
	var data, thermal, total float64
	n := 0.0
	for k := -(strip - 1) / 2; k <= strip/2; k++ {
		i := int(math.Round(x + s*cos - float64(k)*sin))
		j := int(math.Round(y + s*sin + float64(k)*cos))
		if i < 0 || j < 0 || i >= m.Width || j >= m.Height {
			continue
		}
		o := j*m.Width + i
		if d := float64(m.Density[o]); d-d == 0 {
			data += d
			thermal += float64(m.Thermal[o])
			total += float64(m.Seen[o])
			n++
		}
	}
	c.Um = append(c.Um, um)
	c.Data = append(c.Data, data/n)
	c.Thermal = append(c.Thermal, thermal/n)
	c.Total = append(c.Total, total/n)
}
