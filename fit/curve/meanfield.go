package curve

import (
	"context"
	"fmt"
	"math"

	"fallshadow/model"
)

// By how much μ from the radii may differ from μ_TF(N0), in part and in its errors: over
// condensates whose N0 a/ā is above LeastParameter Thomas-Fermi is good to less than that.
const (
	MuOff    = 0.05
	MuErrors = 3
)

// MeanField is what the condensates of a night say of the interaction.
type MeanField struct {
	Slope Estimate // of ln μ against ln N0: 2/5 in Thomas-Fermi
	Ratio Estimate // mean of μ from the radii over μ_TF(N0)
	Quality
	Release *Release // nil without a series in flight
}

// CheckMeanField fits μ from the radii against N0 over condensates whose N0 a/ā is above 30;
// nil with fewer than three of them, and in a gas that is not repulsive.
func (n *Night) CheckMeanField(ctx context.Context) (*MeanField, error) {
	points := n.large()
	if len(points) < 3 || !n.Gas.repulsive() {
		return nil, nil
	}
	middle := geometricMean(points, (*Point).condensate)
	line := n.problem(points, relation{size: 1, mu: true, eval: func(_ *Point, v *Vector, g *scales, theta, h []float64) {
		h[0] = math.Log(v[Mu]/g.mu(middle)) - theta[0] - theta[1]*math.Log(v[Condensate]/middle)
	}})
	e, q, err := line.fit(ctx, []float64{0, 0.4})
	if err != nil {
		return nil, err
	}
	mean := n.problem(points, relation{size: 1, mu: true, eval: func(_ *Point, v *Vector, g *scales, theta, h []float64) {
		h[0] = v[Mu]/g.mu(v[Condensate]) - theta[0]
	}})
	ratio, _, err := mean.fit(ctx, []float64{1})
	if err != nil {
		return nil, err
	}
	m := &MeanField{Slope: e[1], Ratio: ratio[0], Quality: q}
	m.Release, err = n.release(points)
	return m, err
}

// large returns the points that tell μ of a Thomas-Fermi condensate.
func (n *Night) large() []*Point {
	length := n.Gas.Trap.Length(n.Gas.Mass)
	return n.pick(func(p *Point) bool {
		return p.radii() && p.Shifted() && p.Cov[Condensate][Condensate] > 0 &&
			p.Vector[Condensate]*n.Gas.ScatteringLength/length > LeastParameter
	})
}

// Release is the energy that a series in flight shows the condensate to set free.
type Release struct {
	Flights int      // different times of flight
	Energy  Estimate // J per atom, for the mean number of the series; Cal is NaN
	Ratio   Estimate // over (2/7) μ_TF(N0); Cal is NaN
	Atoms   float64  // that mean number
}

// release measures how the sizes grow. The radii that the pictures showed, R_i = b_i(t)
// √(2μ/m)/ω_i with the measured μ, give m ΣR_i²/14, whose slope against t² is the release
// energy per atom once the condensate flies freely. The same slope of the radii that N0
// would have is the expected one, so that what is left of the interaction cancels. Each
// shot is scaled to the mean number by N0^(2/5). Less than three flights, or flights within
// 20 % of one another, give nil.
func (n *Night) release(points []*Point) (*Release, error) {
	g := n.Gas.scales()
	flights := map[float64][3]float64{} // the growth of the radii
	shortest, longest := math.Inf(1), 0.0
	for _, p := range points {
		shortest, longest = math.Min(shortest, p.Flight), math.Max(longest, p.Flight)
		if _, known := flights[p.Flight]; known {
			continue
		}
		b, err := model.ExpandCondensate(n.Gas.Trap, p.Flight, n.Gas.Release)
		if err != nil {
			return nil, fmt.Errorf("release of %s: %w", p.Name, err)
		}
		flights[p.Flight] = b
	}
	if len(flights) < 3 || !(longest > 1.2*shortest) {
		return nil, nil
	}
	r := &Release{Flights: len(flights), Atoms: geometricMean(points, (*Point).condensate)}
	var x, y, expected, errs []float64
	for _, p := range points {
		scale := math.Pow(r.Atoms/p.Vector[Condensate], 0.4)
		size := func(mu float64) (sum float64) {
			for _, v := range model.RadiiSquared(mu*scale, n.Gas.Mass, n.Gas.Trap, flights[p.Flight]) {
				sum += n.Gas.Mass * v / 14
			}
			return sum
		}
		shown := size(p.Vector[Mu])
		x, y = append(x, p.Flight*p.Flight), append(y, shown)
		expected = append(expected, size(g.mu(p.Vector[Condensate])))
		errs = append(errs, shown*math.Hypot(p.relative(Mu), 0.4*p.relative(Condensate)))
	}
	slope, want := line(x, y, errs), line(x, expected, errs)
	r.Ratio = Estimate{slope.V / want.V, slope.Err / want.V, math.NaN()}
	energy := model.ReleaseEnergy(g.mu(r.Atoms))
	r.Energy = Estimate{r.Ratio.V * energy, r.Ratio.Err * energy, math.NaN()}
	return r, nil
}

// line returns the slope of a weighted straight line, its error scaled by the scatter.
func line(x, y, errs []float64) Estimate {
	var w, wx, wy, wxx, wxy float64
	for i := range x {
		k := 1 / (errs[i] * errs[i])
		w, wx, wy, wxx, wxy = w+k, wx+k*x[i], wy+k*y[i], wxx+k*x[i]*x[i], wxy+k*x[i]*y[i]
	}
	det := w*wxx - wx*wx
	slope, level := (w*wxy-wx*wy)/det, (wxx*wy-wx*wxy)/det
	q := Quality{Points: len(x), Dof: len(x) - 2}
	for i := range x {
		d := (y[i] - level - slope*x[i]) / errs[i]
		q.Chi2 += d * d
	}
	return Estimate{slope, math.Sqrt(w/det) * q.scale(), math.NaN()}
}
