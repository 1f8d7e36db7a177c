package simulate

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"fallshadow/model"
	"fallshadow/model/bose"
)

// pushedShot returns a condensed shot of the semi-ideal preset with its thermal column.
func pushedShot(t *testing.T) (Truth, machine, func(x, y float64) float64) {
	t.Helper()
	n := preset(t, "mean-field", 9)
	truth, err := n.Truth(5)
	if err != nil {
		t.Fatal(err)
	}
	c, err := layOut(&truth, n.Scenario, n.machine)
	if err != nil {
		t.Fatal(err)
	}
	return truth, n.machine, c.thermal
}

// The sum over classes at κ = 0 is the thermal number of package model, which comes by
// another quadrature.
func TestShellHoldsTheThermalNumber(t *testing.T) {
	truth, m, _ := pushedShot(t)
	kT := model.KB * truth.T
	s := shell{shape: model.Shape{XX: 1, YY: 1}, hill: truth.Mu / kT, smear: 1}
	r := model.Radii(truth.Mu, m.species.Mass, m.trap)
	lambda := model.ThermalWavelength(truth.T, m.species.Mass)
	atoms := 4 * math.Pi * r[0] * r[1] * r[2] / (lambda * lambda * lambda) * s.transform(1)(0, 0)
	gas, err := model.SemiIdealAt(truth.T, truth.Mu, m.species.Mass, m.species.ScatteringLength, m.trap)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "thermal number", atoms/gas.Thermal, 1, 2e-5)
}

// With a vanishing condensate the cloud is the saturated ideal gas.
func TestPushedOutWithoutHillIsIdeal(t *testing.T) {
	n := preset(t, "mean-field", 9)
	truth, err := n.Truth(5)
	if err != nil {
		t.Fatal(err)
	}
	truth.Mu = 1e-4 * model.KB * truth.T
	column, err := pushedOut(&truth, n.Scenario.Picture, n.machine)
	if err != nil {
		t.Fatal(err)
	}
	m := n.machine
	b, err := model.ExpandThermal(m.trap, truth.Flight, m.release)
	if err != nil {
		t.Fatal(err)
	}
	shape := m.view.Project(model.ThermalVariances(truth.T, m.species.Mass, m.trap, b))
	peak := model.ThermalColumn(truth.Thermal, 0, shape, 0, 0)
	for _, at := range [][2]float64{{0, 0}, {2e-5, 0}, {0, 3e-5}, {5e-5, -4e-5}, {1e-4, 1e-4}, {2e-4, 0}} {
		want := model.ThermalColumn(truth.Thermal, 0, shape, at[0], at[1])
		// The hill h moves g_2 by −h ln h at most, 9e-4 here.
		near(t, "column", column(at[0], at[1])/peak, want/peak, 1e-3)
	}
}

// Atoms drawn one by one in phase space and flown make the same picture.
func TestPushedOutAgainstFlownAtoms(t *testing.T) {
	truth, m, column := pushedShot(t)
	const atoms, cells = 400000, 16
	reach := 3 * truth.Width[0]
	cell := 2 * reach / cells
	seen := make([]float64, cells*cells)
	rng := rand.New(rand.NewPCG(5, 6))
	for range atoms {
		x, y := fly(truth, m, rng)
		i, j := int(math.Floor((x+reach)/cell)), int(math.Floor((y+reach)/cell))
		if i >= 0 && i < cells && j >= 0 && j < cells {
			seen[j*cells+i]++
		}
	}
	chi, classes := 0.0, 0.0
	for j := range cells {
		for i := range cells {
			x0, y0 := -reach+float64(i)*cell, -reach+float64(j)*cell
			mean := quad.Fixed(func(x float64) float64 {
				return quad.Fixed(func(y float64) float64 { return column(x, y) }, y0, y0+cell, 8, nil, 0)
			}, x0, x0+cell, 8, nil, 0)
			want := mean / truth.Thermal * atoms
			if want > 10 {
				d := seen[j*cells+i] - want
				chi += d * d / want
				classes++
			}
		}
	}
	if !(chi <= classes+4*math.Sqrt(2*classes)) || classes < 100 {
		t.Errorf("chi² %.1f over %.0f cells", chi, classes)
	}
}

// fly draws an atom of the semi-ideal thermal gas and returns where the picture shows it.
func fly(truth Truth, m machine, rng *rand.Rand) (x, y float64) {
	kT := model.KB * truth.T
	hill := truth.Mu / kT
	r := model.Radii(truth.Mu, m.species.Mass, m.trap)
	for {
		// Places from a gaussian that lies above the density everywhere, by rejection:
		// g_{3/2}(e^−α) ≤ ζ(3/2) e^−α ≤ ζ(3/2) e^(hill − hill ρ²).
		var p [3]float64
		rho2 := 0.0
		for i := range p {
			p[i] = rng.NormFloat64() / math.Sqrt(2*hill)
			rho2 += p[i] * p[i]
		}
		alpha := hill * math.Abs(rho2-1)
		if rng.Float64()*bose.G32(0)*math.Exp(hill-hill*rho2) > bose.G32(alpha) {
			continue
		}
		v := velocity(alpha, rng)
		thermal := math.Sqrt(kT / m.species.Mass)
		for i := range p {
			step := p[i]*r[i] + thermal*v[i]*truth.Flight
			x += m.view[0][i] * step
			y += m.view[1][i] * step
		}
		return x, y
	}
}

// velocity draws from 1/(e^(v²/2 + α) − 1): w = v²/2 has the density √w/(e^(w+α) − 1),
// which is w/(e^(w/2+α) − e^(−w/2)) ≤ 1 times e^(−w/2)/√w, the density of a squared normal
// number.
func velocity(alpha float64, rng *rand.Rand) (v [3]float64) {
	for {
		w := rng.NormFloat64()
		w *= w
		if rng.Float64() > w/(math.Exp(w/2+alpha)-math.Exp(-w/2)) {
			continue
		}
		norm := 0.0
		for i := range v {
			v[i] = rng.NormFloat64()
			norm += v[i] * v[i]
		}
		for i := range v {
			v[i] *= math.Sqrt(2 * w / norm)
		}
		return v
	}
}

// Package model has the same cloud by a quadrature in space.
func TestPushedOutAgainstModel(t *testing.T) {
	truth, m, column := pushedShot(t)
	cloud, err := model.NewSemiIdealCloud(truth.T, truth.Mu, m.species.Mass, m.trap, m.view, truth.Flight, m.release)
	if err != nil {
		t.Fatal(err)
	}
	peak := column(0, 0)
	for _, at := range [][2]float64{{0, 0}, {2e-5, 0}, {0, 3e-5}, {5e-5, -4e-5}, {1e-4, 1e-4}, {2e-4, 0}} {
		near(t, "column", column(at[0], at[1])/peak, cloud.Column(at[0], at[1])/peak, 1e-4)
	}
}
