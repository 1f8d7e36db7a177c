package fit

import (
	"fmt"
	"testing"
)

// benchProblem is the picture of BenchmarkDensityPass in counts, with or without blur and
// with a room of half its sides around the centre.
func benchProblem(k *kernelSet, inRoom bool) (*problem, params) {
	const side = 512
	tmpl := template{pixel: 1, thermal: ellipse{[2]float64{51 * 51, 38 * 38}, 0.2}, condensate: ellipse{[2]float64{50 * 50, 27 * 27}, 0.2}}
	pic := &Picture{Width: side, Height: side, Noise: Noise{Read: 6, LightShot: 1, LightRead: 36, Dark: 1, DarkIsShared: true}}
	for i := range side * side {
		pic.Light = append(pic.Light, 4000+float64(i*7919%251))
		pic.Atoms = append(pic.Atoms, 3900+float64(i*7919%257))
		pic.Good = append(pic.Good, true)
	}
	optics := Optics{Pixel: 1, Alpha: 2, Saturation: 9000}
	p := &problem{tmpl: &tmpl, law: newLaw(&optics), buf: new(buffers)}
	p.buf.forward.kernels, p.buf.region.forward.kernels = k, k
	p.level = new(level)
	p.level.view(pic, &optics)
	p.fine = p.level
	q := params{pThermal: 0.8, pX: 250, pY: 262, pLight: 0.02}
	if inRoom {
		q[pCondensate] = 1.1
		p.blur = 1
		p.room = room{side / 4, side / 4, side * 3 / 4, side * 3 / 4}
	}
	p.level.freezeData()
	return p, q
}

func BenchmarkPass(b *testing.B) {
	for _, k := range allKernels() {
		for _, inRoom := range []bool{false, true} {
			b.Run(fmt.Sprintf("%s/room=%v", k.name, inRoom), func(b *testing.B) {
				p, q := benchProblem(k, inRoom)
				h, g := make([]float64, numParams*numParams), make([]float64, numParams)
				pixels := p.level.w * p.level.h
				if inRoom { // the pixels outside are there, but cost little
					pixels /= 4
				}
				p.normal(&q, h, g)
				b.ReportAllocs()
				b.ResetTimer()
				for range b.N {
					p.normal(&q, h, g)
				}
				b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*pixels), "ns/pixel")
			})
		}
	}
}
