package light

import (
	"context"
	"testing"

	"fallshadow/imageio"
)

// benchNight is 48 shots of 256x256 pixels and their masks, which grow from shot to shot.
func benchNight(b *testing.B) (*Night, []*imageio.Raw, []*imageio.Exposure, []Cloud) {
	s := newScene(256, 256, 3).fringed(6, 0.06)
	s.jitter, s.power = 0.35, 0.03
	raws := s.night(48)
	n := prepare(b, s.camera(), raws)
	exposures, clouds := make([]*imageio.Exposure, len(raws)), make([]Cloud, len(raws))
	for i, raw := range raws {
		exposures[i] = expose(b, n, raw)
		clouds[i] = disc(256, 128, 128, 40+float64(i))
	}
	return n, raws, exposures, clouds
}

// BenchmarkReference is the cost of a basis of 40 light frames for shots whose masks all
// differ: equations, trial and light, the light frames in memory. The metric asked for is
// ns per pixel and basis frame.
func BenchmarkReference(b *testing.B) {
	const k = 40
	n, raws, exposures, clouds := benchNight(b)
	refs := NewReferences(n, k, len(raws), loader(raws))
	for i, e := range exposures {
		if _, err := refs.Apply(context.Background(), i, e, clouds[i]); err != nil {
			b.Fatal(err)
		}
	}
	b.ResetTimer()
	for i := 0; b.Loop(); i++ {
		j := i % len(exposures)
		if _, err := refs.Apply(context.Background(), j, exposures[j], clouds[j]); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/(256*256*k), "ns/pixel/frame")
}

// BenchmarkReferenceNight is the same from the first load of every light frame on: their
// darks, outliers, block values and products are paid for.
func BenchmarkReferenceNight(b *testing.B) {
	const k = 40
	n, raws, exposures, clouds := benchNight(b)
	b.ResetTimer()
	for b.Loop() {
		refs := NewReferences(n, k, len(raws), loader(raws))
		for i, e := range exposures {
			if _, err := refs.Apply(context.Background(), i, e, clouds[i]); err != nil {
				b.Fatal(err)
			}
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(256*256*k*len(raws)), "ns/pixel/frame")
}

func BenchmarkExpose(b *testing.B) {
	n, raws, _, _ := benchNight(b)
	b.ResetTimer()
	for i := 0; b.Loop(); i++ {
		if _, err := n.Expose(raws[i%len(raws)]); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/(256*256), "ns/pixel")
}
