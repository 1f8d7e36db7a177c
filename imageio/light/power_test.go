package light

import "fallshadow/imageio"

// blockPower returns the sum over the 8x8 blocks inside (or outside) the mask of the
// squared mean of atoms less light, and what white noise of the stated variances gives.
func blockPower(e *imageio.Exposure, mask []bool, inside bool) (got, white float64) {
	for by := 0; by+8 <= e.Height; by += 8 {
		for bx := 0; bx+8 <= e.Width; bx += 8 {
			sum, variance, all := 0.0, 0.0, true
			for p := range 64 {
				i := (by+p/8)*e.Width + bx + p%8
				all = all && mask[i] == inside
				sum += e.Atoms[i] - e.Light[i]
				variance += e.Light[i]*(1+e.Noise.LightShot) + e.Noise.Read*e.Noise.Read + e.Noise.LightRead
			}
			if all {
				got += sum * sum / (64 * 64)
				white += variance / (64 * 64)
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
