package fit

import "math"

// The images of a room, smeared: the transmission, c of forward, and the derivatives of the
// transmission by the density's parameters.
const (
	imageT     = 0
	imageC     = 1
	imageFirst = 2
	numImages  = imageFirst + firstLight
)

// regionBuffers are the memory of the pass over a room. The Jacobian of a row, but for a
// common factor, stands in rows; the same weighted, and the weighted residual, in columns.
type regionBuffers struct {
	forward forward
	plate   roomPlate
	images  [numImages][]float64
	shapes  [firstLight]kernelShape
	planes  [3]kernelShape
	from    []int // parameter of each row

	line          []float64
	rows, columns []float64
	rr            lanes
	blocks        []productSums
}

// regionNormal adds the pixels of the box to the normal matrix and gradient, and returns
// their sum of squares.
func (p *problem) regionNormal(q *params, in box, h, g []float64) float64 {
	if in.empty() {
		return 0
	}
	b := &p.buf.region
	b.begin(p, in, h != nil)
	b.paint(p, q, h != nil)
	b.rr = lanes{}
	clear(b.blocks)
	for j := range b.plate.h - 2*b.plate.margin {
		b.transmission(j)
		b.forward.line(j + b.plate.margin)
		m := b.plate.margin
		b.forward.compare(&b.rr, j+m, m, m+b.plate.inner, b.forward.t[m:m+b.plate.inner])
		if h != nil {
			b.jacobian(j)
			b.multiply()
		}
	}
	if h != nil {
		b.add(h, g)
	}
	return b.rr.total()
}

// begin makes ready for the box and for the parameters that steer the fit.
func (b *regionBuffers) begin(p *problem, in box, full bool) {
	r := &b.plate
	if b.forward.kernels == nil {
		b.forward.kernels = bestKernels()
	}
	if r.owner != p {
		r.make(p, in, b.forward.kernels)
	}
	n := r.stride + 2*kernelLanes
	b.line = growTo(b.line, n)
	b.images[imageT] = growTo(b.images[imageT], r.inner*r.h)
	b.from = b.from[:0]
	if !full {
		return
	}
	b.images[imageC] = growTo(b.images[imageC], r.inner*r.h)
	for i := range firstLight {
		if p.used(i) {
			b.from = append(b.from, i)
			b.images[imageFirst+i] = growTo(b.images[imageFirst+i], r.inner*r.h)
		}
	}
	b.from = append(b.from, pLight, pLightX, pLightY)
	rows := (len(b.from) + productRows - 1) / productRows
	columns := (len(b.from) + productColumns) / productColumns // one more for the residual
	b.rows, b.columns = growTo(b.rows, rows*productRows*r.inner), growTo(b.columns, columns*productColumns*r.inner)
	clear(b.rows)
	clear(b.columns)
	b.blocks = growTo(b.blocks, rows*columns)
}

// paint fills the images with the sharp cloud, weighted with the light and smeared.
func (b *regionBuffers) paint(p *problem, q *params, full bool) {
	f, r := &b.forward, &b.plate
	sharp, core := p.geometry(q, 0), p.core(q)
	f.set(p, p.fine, &r.plate, &sharp)
	f.thick = math.Inf(1)
	for j := range r.h {
		f.line(j)
		f.fill(0, r.stride)
		f.condense(p, &core)
		f.carry(j, 0, r.stride)
		b.weigh(j)
		b.smear(imageT, j, f.t)
		if !full {
			continue
		}
		b.smear(imageC, j, f.c)
		f.kernels.times(f.k[:r.stride], f.k[:r.stride], f.d[:r.stride])
		b.shape(p, &sharp, &core)
		for _, i := range b.from[:len(b.from)-3] {
			f.kernels.shape(b.line[:r.stride], f.g[:r.stride], f.h[:r.stride], f.k[:r.stride], &b.shapes[i], f.bose.from(0))
			b.smear(imageFirst+i, j, b.line)
		}
	}
	b.settle(full)
}

// weigh multiplies the row with the light.
func (b *regionBuffers) weigh(j int) {
	f, r := &b.forward, &b.plate
	if len(r.beam) == 0 {
		return
	}
	beam := r.beam[j*r.stride : (j+1)*r.stride]
	for _, v := range [...][]float64{f.t, f.c, f.d, f.g, f.h} {
		f.kernels.times(v[:r.stride], v[:r.stride], beam)
	}
}

func (b *regionBuffers) smear(image, j int, row []float64) {
	r := &b.plate
	b.forward.kernels.smear(b.images[image][j*r.inner:(j+1)*r.inner], row, r.margin, 1, r.taps)
}

// shape writes each parameter's derivative of the depth along the row as factors of g, h and
// k. Powers of X stand in falling order.
func (b *regionBuffers) shape(p *problem, geo *geometry, c *core) {
	s, y := &b.shapes, b.forward.y
	part, edge := geo.ampGrown*geo.unit, 3*c.peak
	*s = [firstLight]kernelShape{}
	s[pThermal].g = geo.unit
	s[pAlpha] = kernelShape{g: part * geo.slope, h: parabola{0, 0, -part}}
	s[pCondensate].k = p.columnShape(c, y)
	for i := range 2 {
		s[pWidth1+i].h = along(i, geo.cos, geo.sin, y, part/geo.v[i])
		s[pRadius1+i].k = along(i, c.cos, c.sin, y, edge/c.square[i])
	}
	if p.ties.merged(pWidth1) {
		s[pWidth1].h.add(&s[pWidth2].h)
	}
	if p.ties.merged(pRadius1) {
		s[pRadius1].k.add(&s[pRadius2].k)
	}
	s[pX].h, s[pX].k = parabola{0, part * geo.axx, part * geo.axy * y}, parabola{0, edge * c.xx, edge * c.xy * y}
	s[pY].h, s[pY].k = parabola{0, part * geo.axy, part * geo.ayy * y}, parabola{0, edge * c.xy, edge * c.yy * y}
	s[pAngle].h = across(geo.cos, geo.sin, y, -part*(1/geo.v[0]-1/geo.v[1]))
	s[pAngle].k = across(c.cos, c.sin, y, -edge*(1/c.square[0]-1/c.square[1]))
}

// columnShape is the condensate's profile for a peak of 1 as a factor of k.
func (p *problem) columnShape(c *core, y float64) parabola {
	f := 1 / p.scale()
	if p.tmpl.gaussian {
		return parabola{0, 0, 3 * f}
	}
	return parabola{-c.xx * f, -2 * c.xy * y * f, (1 - c.yy*y*y) * f}
}

// along is f times the square of the distance along axis 0 or 1, turned by an angle, on the
// row y; across is f times the product of both distances.
func along(axis int, cos, sin, y, f float64) parabola {
	if axis == 1 {
		cos, sin = -sin, cos
	}
	return parabola{f * cos * cos, 2 * f * cos * sin * y, f * sin * sin * y * y}
}

func across(cos, sin, y, f float64) parabola {
	return parabola{-f * cos * sin, f * (cos*cos - sin*sin) * y, f * cos * sin * y * y}
}

// settle smears the images along the columns, each by itself, so that the rows under the taps
// stay in the nearest cache: row j of the room, from 0, comes to stand in row j of the image,
// which nothing below needs.
func (b *regionBuffers) settle(full bool) {
	b.across(imageT)
	if !full {
		return
	}
	b.across(imageC)
	for _, i := range b.from[:len(b.from)-3] {
		b.across(imageFirst + i)
	}
}

func (b *regionBuffers) across(image int) {
	r, v := &b.plate, b.images[image]
	for j := range r.h - 2*r.margin {
		b.forward.kernels.smear(v[j*r.inner:(j+1)*r.inner], v, (j+r.margin)*r.inner, r.inner, r.taps)
	}
}

// image is row j of the room in an image, from 0.
func (b *regionBuffers) image(image, j int) []float64 {
	return b.images[image][j*b.plate.inner : (j+1)*b.plate.inner]
}

// transmission leaves row j of the room in t.
func (b *regionBuffers) transmission(j int) {
	r := &b.plate
	t := b.forward.t[r.margin : r.margin+r.inner]
	if len(r.beam) == 0 {
		copy(t, b.image(imageT, j))
		return
	}
	b.forward.kernels.times(t, b.image(imageT, j), r.inverse[j*r.inner:(j+1)*r.inner])
}

// jacobian fills rows and columns for row j of the room.
func (b *regionBuffers) jacobian(j int) {
	f, r, n := &b.forward, &b.plate, b.plate.inner
	w, e := f.w[r.margin:r.margin+n], f.e[r.margin:r.margin+n]
	if len(r.beam) > 0 {
		inverse := r.inverse[j*n : (j+1)*n]
		f.kernels.times(w, w, inverse)
		f.kernels.times(w, w, inverse)
		f.kernels.times(e, e, inverse)
	}
	shapes := len(b.from) - 3
	for i, from := range b.from[:shapes] {
		copy(b.rows[i*n:(i+1)*n], b.image(imageFirst+from, j))
	}
	b.lights(b.image(imageC, j), j)
	for i := range b.from {
		f.kernels.times(b.columns[i*n:(i+1)*n], w, b.rows[i*n:(i+1)*n])
	}
	copy(b.columns[len(b.from)*n:], e)
}

// lights fills the rows of the light's parameters.
func (b *regionBuffers) lights(c []float64, j int) {
	geo, n, first := &b.forward.geo, b.plate.inner, len(b.from)-3
	b.planes = [3]kernelShape{
		{g: -1},
		{h: parabola{0, -geo.iw, (geo.xc - geo.x0) * geo.iw}},
		{g: (geo.yc - b.plate.row(j+b.plate.margin)) * geo.ih},
	}
	line := b.forward.bose.from(b.plate.margin)
	for i := range b.planes {
		b.forward.kernels.shape(b.rows[(first+i)*n:(first+i+1)*n], c, c, c, &b.planes[i], line)
	}
}

// multiply adds the products of rows and columns on and above the diagonal.
func (b *regionBuffers) multiply() {
	n := b.plate.inner
	columns := len(b.columns) / (productColumns * n)
	for i := range len(b.rows) / (productRows * n) {
		for k := i * productRows / productColumns; k < columns; k++ {
			b.forward.kernels.products(&b.blocks[i*columns+k], b.rows[i*productRows*n:], b.columns[k*productColumns*n:], n, n)
		}
	}
}

// add adds the sums to the normal matrix and the gradient.
func (b *regionBuffers) add(h, g []float64) {
	columns := len(b.columns) / (productColumns * b.plate.inner)
	for i, p := range b.from {
		for k := i; k <= len(b.from); k++ {
			block := &b.blocks[i/productRows*columns+k/productColumns]
			v := block[i%productRows*productColumns+k%productColumns].total()
			if k == len(b.from) {
				g[p] += v
				continue
			}
			q := b.from[k]
			h[p*numParams+q] += v
			if p != q {
				h[q*numParams+p] += v
			}
		}
	}
}
