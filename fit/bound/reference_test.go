package bound

import (
	"context"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"fallshadow/model"
	"fallshadow/model/bose"
)

// roundTrap is an experiment with pictures of density: square pixels of 1 µm, axes 1 and 2
// in the picture.
func roundTrap(t testing.TB) Experiment {
	rb, err := model.LookupSpecies("87Rb")
	if err != nil {
		t.Fatal(err)
	}
	return Experiment{
		Species: rb, Trap: model.TrapHz(60, 60, 60), View: model.View(0, 0, 0), Flight: 15e-3,
		Optics: Optics{Pixel: 1e-6}, Width: 400, Height: 400, X: 199.4, Y: 199.7, DensitySigma: 0.03,
	}
}

// TestTiedClosedForms compares the information on atoms, size and place with the closed
// covariances of fisher_reference.csv, where both sizes are free and there is no background.
// Tying them, d ln s1 = d ln s2 = d ln size/2 and d ln A = d ln N − d ln size, takes the free
// information F to Dᵀ F D. The pixel widens the cloud by p²/12, which the tolerance allows for.
func TestTiedClosedForms(t *testing.T) {
	e := roundTrap(t)
	thermal := Cloud{T: 100e-9, ThermalAtoms: 2e5, Alpha: 18} // z = e^−18 is a gaussian
	condensate := Cloud{CondensateAtoms: 1e5, Mu: 80e-9 * model.KB}
	for _, q := range []struct {
		model       string
		cloud       Cloud
		area, peak  func(s model.Shape) float64
		atoms, size Parameter
		shape       model.Shape
	}{
		{
			"gaussian", thermal,
			func(s model.Shape) float64 { return math.Pi * math.Sqrt(s.Det()) },
			func(s model.Shape) float64 { return model.ThermalPeakColumn(2e5, 18, s) },
			Thermal, T, thermalShape(t, &e, 100e-9),
		},
		{
			"thomas_fermi", condensate,
			func(s model.Shape) float64 { return math.Pi / 4 * math.Sqrt(s.Det()) },
			func(s model.Shape) float64 { return model.CondensatePeakColumn(1e5, s) },
			Condensate, Mu, condensateShape(t, &e, 80e-9*model.KB),
		},
	} {
		row := rowOf(t, "fisher_reference.csv", "model", q.model)
		f := []Parameter{q.atoms, q.size, X}
		info, err := fisher(context.Background(), &e, &q.cloud, f)
		if err != nil {
			t.Fatal(err)
		}
		at, _ := truth(&e, &q.cloud)
		free := mat.NewSymDense(3, []float64{
			row.num(t, "var_A"), row.num(t, "cov_A_s1"), row.num(t, "cov_A_s1"),
			0, row.num(t, "var_s1"), row.num(t, "cov_s1_s2"),
			0, 0, row.num(t, "var_s2"),
		})
		var inverse, want mat.Dense
		if err := inverse.Inverse(free); err != nil {
			t.Fatal(err)
		}
		ties := mat.NewDense(3, 2, []float64{1, -1, 0, 0.5, 0, 0.5})
		want.Product(ties.T(), &inverse, ties)
		p2 := e.Optics.Pixel * e.Optics.Pixel
		peak := q.peak(q.shape) * e.Species.Sigma0()
		unit := e.DensitySigma * e.DensitySigma * p2 / (peak * peak * q.area(q.shape))
		for i := range 2 {
			for j := range 2 {
				near(t, q.model+" information", info.At(i, j)*at[f[i]]*at[f[j]]*unit, want.At(i, j), 2e-3)
			}
		}
		near(t, q.model+" place", 1/(info.At(2, 2)*unit*q.shape.XX/p2), row.num(t, "var_x0"), 2e-3)
	}
}

func thermalShape(t *testing.T, e *Experiment, temperature float64) model.Shape {
	b, err := model.ExpandThermal(e.Trap, e.Flight, e.Release)
	if err != nil {
		t.Fatal(err)
	}
	return e.View.Project(model.ThermalVariances(temperature, e.Species.Mass, e.Trap, b))
}

func condensateShape(t *testing.T, e *Experiment, mu float64) model.Shape {
	b, err := model.ExpandCondensate(e.Trap, e.Flight, e.Release)
	if err != nil {
		t.Fatal(err)
	}
	return e.View.Project(model.RadiiSquared(mu, e.Species.Mass, e.Trap, b))
}

func rowOf(t *testing.T, name, column, value string) tableRow {
	t.Helper()
	for _, row := range readTable(t, name) {
		if row[column] == value {
			return row
		}
	}
	t.Fatalf("%s has no %s %s", name, column, value)
	return nil
}

// TestBimodalCovariance runs difference, information and inverse on the nine free parameters
// of bimodal_covariance.csv: standard errors and correlations, of which the table gives
// about four digits.
func TestBimodalCovariance(t *testing.T) {
	const side, sigma = 240, 0.05
	rows := readTable(t, "bimodal_covariance.csv")
	at := make([]float64, len(rows))
	columns, f := make([][]float64, len(rows)), make([]Parameter, len(rows))
	for i, row := range rows {
		at[i] = row.num(t, "value")
	}
	weight, scratch := make([]float64, side*side), make([]float64, side*side)
	for i := range weight {
		weight[i] = 1 / (sigma * sigma)
	}
	for i := range rows {
		columns[i] = make([]float64, side*side)
		err := richardson(columns[i], scratch, 1e-3, func(h float64, dst []float64) error {
			q := append([]float64(nil), at...)
			q[i] += h
			for o := range dst {
				dst[o] = bimodal(q, float64(o%side), float64(o/side))
			}
			return nil
		})
		if err != nil {
			t.Fatal(err)
		}
	}
	cov, err := invert(information(columns, weight), f)
	if err != nil {
		t.Fatal(err)
	}
	for i, row := range rows {
		near(t, row["parameter"], math.Sqrt(cov.At(i, i)), row.num(t, "std_error"), 2e-4)
		for j, other := range rows {
			corr := cov.At(i, j) / math.Sqrt(cov.At(i, i)*cov.At(j, j))
			within(t, row["parameter"]+" "+other["parameter"], corr, row.num(t, "corr_"+other["parameter"]), 2e-4)
		}
	}
}

// bimodal is the model of bimodal_covariance.csv, its parameters in the table's order.
func bimodal(q []float64, x, y float64) float64 {
	x, y = x-q[6], y-q[7]
	thermal := bose.G2((x*x/(q[1]*q[1])+y*y/(q[2]*q[2]))/2) / bose.Zeta2
	inside := math.Max(0, 1-x*x/(q[4]*q[4])-y*y/(q[5]*q[5]))
	return q[0]*thermal + q[3]*math.Pow(inside, 1.5) + q[8]
}
