package fit

import "math"

// sum adds up the density pixel by pixel inside a window that holds the cloud, each by the
// inverted law; bad and black pixels take the model's density. The bias of a logarithm of
// noisy counts is taken off: ⟨od⟩−od = α[v_A/2A² − v_L/2L²]. It follows on residuals, whose κ it
// uses.
func (s *session) sum(st *state, r *Result) {
	l := s.levels[0]
	window := s.window(st)
	p := s.problem(0, &st.p, st.kind)
	var all tally
	p.density(&st.p, func(j int, _, model []float64) {
		f := &p.buf.forward
		window.row(float64(j), l.w, func(a, b int) {
			k := math.Exp(f.plane + float64(a)*f.tilt)
			for i, d := range model[a:b] {
				o := j*l.w + a + i
				all.add(s.pixelDensity(p, o, k, f.plane+float64(a+i)*f.tilt, d), d, l.atoms[o])
				k *= f.growth
			}
		})
	})
	scale := s.tmpl.pixel * s.tmpl.pixel / s.lab.Species.Sigma0()
	r.Sum = all.total * scale
	r.SumErr = math.Sqrt(all.variance+all.pull*all.pull*st.variance(pLight)) * scale
	if l.linear || all.counts > fewCounts*float64(all.pixels) {
		r.Checks.AtomsOverSum = all.fitted / all.total
	}
}

// seenDensity is σ0 n of one pixel, its variance, and its derivative to the light's logarithm.
type seenDensity struct {
	value, variance, pull float64
	good                  bool
}

// tally are the sums over the pixels of a cloud.
type tally struct {
	total, fitted, variance, pull, counts float64
	pixels                                int
}

func (t *tally) add(v seenDensity, model, counts float64) {
	t.fitted += model
	t.total += v.value
	t.variance += v.variance
	t.pull += v.pull
	if v.good {
		t.counts += counts
		t.pixels++
	}
}

// fewCounts is the mean number of electrons a pixel below which the sum of logarithms is not
// held against the fit: their bias is then more than its first term.
const fewCounts = 60

// pixelDensity returns what the inverted law makes of a pixel, under the light's scale k and its
// logarithm. d is the model's density there.
func (s *session) pixelDensity(p *problem, o int, k, plane, d float64) seenDensity {
	l := p.level
	if l.count[o] == 0 {
		return seenDensity{value: d}
	}
	if l.linear {
		return seenDensity{l.atoms[o] - plane, l.sigma * l.sigma, 1, true}
	}
	smooth := k * max(l.smooth[o], 0)
	sat := smooth * l.saturate
	t := s.ws.kappa[o] / k
	vl, vd := l.variances(o)
	read := l.readVariance(o)
	a, light := max(t*smooth, 1), max(smooth, k)
	ia, il := p.law.a/a, p.law.a/light // of the logarithm's derivatives
	da, dl := ia+sat/light, il+sat/light
	va := a + read
	r := seenDensity{d, da*da*va + dl*dl*k*k*vl + (ia-il)*(ia-il)*vd, 0, true}
	if x := l.atoms[o]; x < 0 || x*x < 9*read || l.light[o] <= 0 {
		return r
	}
	v := p.law.od(l.atoms[o]/(k*l.light[o]), k*l.light[o]*l.saturate)
	if finite(v) {
		r.value = v - 0.5*(ia*ia*va-il*il*k*k*vl)/p.law.a
		r.pull = p.law.a + sat*(1-t)
	}
	return r
}

// window is where the cloud is summed: 4.5 widths or √2 radii.
func (s *session) window(st *state) cover {
	most := 2.0
	if s.tmpl.gaussian {
		most = 20
	}
	return s.cover(st, 20.25, most)
}

// density visits the rows of the level with σ0 n of the thermal part and of both, the condensate
// without blur.
func (p *problem) density(q *params, visit func(j int, thermal, both []float64)) {
	geo, core := p.geometry(q, p.blurOn(p.level)), p.core(q)
	f, n := &p.buf.forward, p.level.w
	f.set(p, p.level, p.level.plate, &geo)
	thermal := make([]float64, n)
	scale := p.scale()
	for j := range p.level.h {
		f.line(j)
		f.fill(0, f.plate.stride)
		for i := range thermal {
			thermal[i] = f.d[i] * scale
		}
		f.condense(p, &core)
		for i := range f.d[:n] {
			f.d[i] *= scale
		}
		visit(j, thermal, f.d[:n])
	}
}
