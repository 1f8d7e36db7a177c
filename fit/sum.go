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
		k := math.Exp(f.plane)
		for i, d := range model {
			if o := j*l.w + i; window(float64(i), float64(j)) {
				all.add(s.pixelDensity(p, o, k, f.plane+float64(i)*f.tilt, d), d, l.atoms[o])
			}
			k *= f.growth
		}
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
	sat := k * l.smooth[o] * l.saturate
	t := s.ws.kappa[o] / k
	vl, vd := l.variances(o)
	a := math.Max(k*t*l.smooth[o], 1)
	light := k * math.Max(l.smooth[o], 1)
	da, dl := p.law.a/a+sat/light, p.law.a/light+sat/light
	va := a + l.readVariance(o)
	r := seenDensity{d, da*da*va + dl*dl*k*k*vl + (p.law.a/a-p.law.a/light)*(p.law.a/a-p.law.a/light)*vd, 0, true}
	if l.atoms[o] < 3*math.Sqrt(l.readVariance(o)) || l.light[o] <= 0 {
		return r
	}
	v := p.law.od(l.atoms[o]/(k*l.light[o]), k*l.light[o]*l.saturate)
	if finite(v) {
		r.value = v - p.law.a*(va/(2*a*a)-k*k*vl/(2*light*light))
		r.pull = p.law.a + sat*(1-t)
	}
	return r
}

// window says whether a place belongs to the cloud: 4.5 widths or 1.4 radii.
func (s *session) window(st *state) func(x, y float64) bool {
	thermal := s.tmpl.thermalOf(&st.p).reach(st.p[pX], st.p[pY])
	cond := s.tmpl.condensateOf(&st.p).reach(st.p[pX], st.p[pY])
	most := 2.0
	if s.tmpl.gaussian {
		most = 20
	}
	return func(x, y float64) bool {
		return st.kind.thermal && thermal(x, y) < 20.25 || st.kind.condensate && cond(x, y) < most
	}
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
