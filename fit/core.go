package fit

import "math"

// core is the condensate of a picture: q = xx·X² + 2xy·XY + yy·Y² is 1 at the edge of the
// Thomas-Fermi column, one rms away from the centre of a gaussian.
type core struct {
	peak       float64 // in depth
	xx, xy, yy float64
	cos, sin   float64
	square     [2]float64
}

func (p *problem) core(q *params) core {
	e := p.tmpl.condensateOf(q)
	inv := ellipse{[2]float64{1 / e.square[0], 1 / e.square[1]}, e.angle}.shape()
	return core{q[pCondensate] / p.scale(), inv.XX, inv.XY, inv.YY, math.Cos(e.angle), math.Sin(e.angle), e.square}
}

// condense adds the condensate to the depth of the row and fills k: the Thomas-Fermi column
// is peak·k³ with k = √(1−q), the gaussian peak·3k with k = exp(−q/2)/3.
func (f *forward) condense(p *problem, c *core) {
	n := f.plate.stride
	line := f.bose.from(0)
	line.q2, line.q1, line.q0, line.peak = c.xx, 2*c.xy*f.y, c.yy*f.y*f.y, c.peak
	if !p.tmpl.gaussian {
		f.kernels.edge(f.k[:n], f.d[:n], line)
		return
	}
	for i := range n {
		x := line.x0 + float64(i)*line.dx
		f.k[i] = math.Exp(-0.5*((line.q2*x+line.q1)*x+line.q0)) / 3
		f.d[i] += 3 * c.peak * f.k[i]
	}
}
