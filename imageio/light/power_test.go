package light

import "fallshadow/imageio"

// blockPower returns the sum over the 8x8 blocks inside (or outside) the mask of the
// squared mean of atoms less light, and what white noise of the stated variances gives.
func blockPower(e *imageio.Exposure, mask []bool, inside bool, side int) (got, white float64) {
	pixels := side * side
	for by := 0; by+side <= e.Height; by += side {
		for bx := 0; bx+side <= e.Width; bx += side {
			sum, variance, all := 0.0, 0.0, true
			for p := range pixels {
				i := (by+p/side)*e.Width + bx + p%side
				all = all && mask[i] == inside
				sum += e.Atoms[i] - e.Light[i]
				variance += e.Light[i]*(1+e.Noise.LightShot) + e.Noise.Read*e.Noise.Read + e.Noise.LightRead
			}
			if all {
				got += sum * sum / float64(pixels*pixels)
				white += variance / float64(pixels*pixels)
			}
		}
	}
	return got, white
}

// disc masks a disc of a square picture.
func disc(side int, x, y, radius float64) Cloud {
	mask := make([]bool, side*side)
	for i := range mask {
		dx, dy := float64(i%side)-x, float64(i/side)-y
		mask[i] = dx*dx+dy*dy < radius*radius
	}
	return Cloud{Mask: mask}
}
