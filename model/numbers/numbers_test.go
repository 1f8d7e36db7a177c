package numbers

import (
	"encoding/csv"
	"math"
	"math/rand/v2"
	"os"
	"reflect"
	"strconv"
	"testing"

	"fallshadow/model"
	"fallshadow/model/bose"
)

// near passes only if got is within tol of want, relative to want; NaN fails.
func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol*math.Abs(want)) {
		t.Errorf("%s: got %.9g, want %.9g within %.1g", what, got, want, tol)
	}
}

func isNaN(t *testing.T, what string, got float64) {
	t.Helper()
	if !math.IsNaN(got) {
		t.Errorf("%s: got %g, want none", what, got)
	}
}

func rubidium(t *testing.T) Lab {
	t.Helper()
	s, err := model.LookupSpecies("87Rb")
	if err != nil {
		t.Fatal(err)
	}
	return Lab{Species: s, Trap: model.TrapHz(30, 80, 120), Pixel: 3e-6}
}

// bimodal is 1e5 condensed and 2e5 thermal atoms at 200 nK in the laboratory of rubidium.
func bimodal(lab Lab) Measured {
	perAtom := lab.Species.Sigma0() / (lab.Pixel * lab.Pixel)
	return Measured{ThermalSum: 2e5 * perAtom, CondensateSum: 1e5 * perAtom, T: 200e-9, Mu: model.KB * 50e-9}
}

// example is a full covariance: relative errors 1, 2, 3 and 4 % of the sums, T and μ.
func example(m Measured) (cov [NumMeasured][NumMeasured]float64) {
	correlation := [4][4]float64{{1, -0.6, 0.5, 0.2}, {-0.6, 1, -0.3, 0.4}, {0.5, -0.3, 1, 0.1}, {0.2, 0.4, 0.1, 1}}
	for i := range 4 {
		for j := range 4 {
			cov[i][j] = correlation[i][j] * 0.01 * float64(i+1) * *m.at(i) * 0.01 * float64(j+1) * *m.at(j)
		}
	}
	return cov
}

// The condensate is the first row of condensate_example.csv (μ/k = 51.4462685 nK, n0 =
// 138.055872 per µm³); T/Tc⁰ follows the rule Tc⁰ = 4.5137 nK (f̄/100 Hz) N^{1/3}
// (Pethick, Smith, Eq. (2.20), four digits there).
func TestDerive(t *testing.T) {
	lab := rubidium(t)
	d := Derive(bimodal(lab), lab)
	tc0 := 4.5136832e-9 * math.Cbrt(30*80*120) / 100 * math.Cbrt(3e5)
	saturated := bose.Zeta3 * math.Pow(model.KB*200e-9/(model.HBar*lab.Trap.GeometricMean()), 3)
	thermalPeak := 2e5 / bose.Zeta3 * bose.Zeta32 *
		math.Pow(lab.Species.Mass*math.Pow(lab.Trap.GeometricMean(), 2)/(2*math.Pi*model.KB*200e-9), 1.5)
	peak := 138.055872e18 + thermalPeak
	for _, c := range []struct {
		what           string
		got, want, tol float64
	}{
		{"atoms", d.Atoms, 3e5, 1e-12},
		{"condensate", d.Condensate, 1e5, 1e-12},
		{"thermal", d.Thermal, 2e5, 1e-12},
		{"fraction", d.Fraction, 1. / 3, 1e-12},
		{"T", d.T, 200e-9, 0},
		{"mu", d.Mu, model.KB * 50e-9, 0},
		{"mu from atoms", d.MuFromAtoms, model.KB * 51.4462685e-9, 1e-8},
		{"mu over mu atoms", d.MuOverMuAtoms, 50 / 51.4462685, 1e-8},
		{"Tc0", d.Tc0, tc0, 1e-7},
		{"T/Tc0", d.Reduced, 200e-9 / tc0, 1e-7},
		{"fugacity", d.Fugacity, 1, 0},
		{"over saturated", d.ThermalOverSaturated, 2e5 / saturated, 1e-12},
		{"peak density", d.PeakDensity, peak, 1e-8},
		{"phase-space density", d.PhaseSpaceDensity, peak * math.Pow(0.59219819e-6, 3) / math.Pow(2, 1.5), 1e-7},
		{"entropy", d.EntropyPerAtom, 3.60157071056 * 2 / 3, 1e-11},
		{"N0 a/a_ho", d.ThomasFermiParameter, 1e5 * 100.4 * model.A0 / lab.Trap.Length(lab.Species.Mass), 1e-12},
	} {
		near(t, c.what, c.got, c.want, c.tol)
	}
	if !(d.ReducedCorrected > d.Reduced) {
		t.Errorf("T/Tc %g is not above T/Tc0 %g: both shifts of 87Rb lower Tc", d.ReducedCorrected, d.Reduced)
	}
	isNaN(t, "collapse of a repulsive gas", d.Collapse)
}

func TestAbsentParts(t *testing.T) {
	lab := rubidium(t)
	m := bimodal(lab)
	cov := example(m)

	thermal := m
	thermal.CondensateSum, thermal.Mu, thermal.Alpha = 0, math.NaN(), 0.3
	heat := cov
	for i := range NumMeasured {
		heat[1][i], heat[i][1], heat[3][i], heat[i][3] = 0, 0, 0, 0
	}
	r := Compute(thermal, heat, nil, lab)
	near(t, "T", r.T.Err, 0.03*m.T, 1e-9)
	near(t, "fugacity", r.Fugacity.V, math.Exp(-0.3), 1e-15)
	near(t, "correlation of thermal number and T", r.Correlation[0][2], 0.5, 1e-12)
	near(t, "correlation of a number with itself", r.Correlation[2][2], 1, 1e-12)
	if r.Correlation[0][1] != 0 || r.Correlation[1][1] != 0 {
		t.Errorf("an absent condensate has correlations %v", r.Correlation[1])
	}
	for name, v := range map[string]Value{"fraction": r.Fraction, "condensate": r.Condensate} {
		if v.V != 0 {
			t.Errorf("%s without a condensate is %g", name, v.V)
		}
		isNaN(t, name+" error", v.Err)
	}
	isNaN(t, "mu", r.Mu.V)
	isNaN(t, "mu from atoms", r.MuFromAtoms.V)
	isNaN(t, "calibration error without shifts", r.T.Cal)

	cold := m
	cold.ThermalSum, cold.T = 0, math.NaN()
	chill := cov
	for i := range NumMeasured {
		chill[0][i], chill[i][0], chill[2][i], chill[i][2] = 0, 0, 0, 0
	}
	r = Compute(cold, chill, nil, lab)
	near(t, "fraction of a pure condensate", r.Fraction.V, 1, 0)
	near(t, "mu", r.Mu.Err, 0.04*m.Mu, 1e-9)
	near(t, "peak density", r.PeakDensity.V, 138.055872e18, 1e-8)
	for name, v := range map[string]Value{"T": r.T, "T/Tc0": r.Reduced, "fugacity": r.Fugacity,
		"entropy": r.EntropyPerAtom, "phase-space density": r.PhaseSpaceDensity} {
		isNaN(t, name, v.V)
		isNaN(t, name+" error", v.Err)
	}

	for name, v := range Compute(Measured{T: math.NaN(), Mu: math.NaN()}, [NumMeasured][NumMeasured]float64{}, nil, lab).All() {
		if v.V != 0 && !math.IsNaN(v.V) || !math.IsNaN(v.Err) {
			t.Errorf("%s of an empty picture is %v", name, v)
		}
	}
}

// Closed forms of physics text books: N from sums, δμ from δμ, and with f = N0/N the
// gradient (N_th, −N0)/N²; powers 2/5 of N0 and 1/3 of N.
func TestStatisticalErrors(t *testing.T) {
	lab := rubidium(t)
	m := bimodal(lab)
	cov := example(m)
	r := Compute(m, cov, nil, lab)
	thermal, condensate, n := 2e5, 1e5, 3e5
	vt, vc, ctc := 4e6, 4e6, -0.6*2000*2000 // 1 % of 2e5 and 2 % of 1e5
	varN := vt + vc + 2*ctc
	near(t, "atoms", r.Atoms.Err, math.Sqrt(varN), 1e-9)
	near(t, "thermal", r.Thermal.Err, 2000, 1e-9)
	near(t, "condensate", r.Condensate.Err, 2000, 1e-9)
	near(t, "fraction", r.Fraction.Err,
		math.Sqrt(thermal*thermal*vc+condensate*condensate*vt-2*thermal*condensate*ctc)/(n*n), 1e-9)
	near(t, "mu from atoms", r.MuFromAtoms.Err, 0.4*0.02*r.MuFromAtoms.V, 1e-9)
	near(t, "mu ratio", r.MuOverMuAtoms.Err/r.MuOverMuAtoms.V,
		math.Sqrt(0.04*0.04+0.008*0.008-2*0.4*0.04*0.008), 1e-9)
	covNT := 0.5*2000*0.03 - 0.3*2000*0.03 // of N with relative T
	near(t, "T/Tc0", r.Reduced.Err/r.Reduced.V,
		math.Sqrt(0.03*0.03+varN/(9*n*n)-2*covNT/(3*n)), 1e-9)
	near(t, "over saturated", r.ThermalOverSaturated.Err/r.ThermalOverSaturated.V,
		math.Sqrt(0.01*0.01+0.09*0.09-2*0.5*0.01*0.09), 1e-9)
}

// Draws of the measurement, 0.5 % wide so that curvature is small, through Derive.
func TestStatisticalErrorsAgainstDraws(t *testing.T) {
	lab := rubidium(t)
	m := bimodal(lab)
	m.Alpha = 0.4
	cov := example(m)
	for i := range 4 {
		for j := range 4 {
			cov[i][j] /= 25
		}
	}
	cov[4][4] = 1e-4
	cov[0][4] = 0.3 * math.Sqrt(cov[0][0]*cov[4][4])
	cov[4][0] = cov[0][4]
	r := Compute(m, cov, nil, lab)
	factor := cholesky(t, cov)
	random := rand.New(rand.NewPCG(1, 2))
	const draws = 40000
	var sum, squares [len(quantities)]float64
	for range draws {
		moved := m
		var normal [NumMeasured]float64
		for i := range normal {
			normal[i] = random.NormFloat64()
			for j := range i + 1 {
				*moved.at(i) += factor[i][j] * normal[j]
			}
		}
		d := Derive(moved, lab)
		for k, q := range quantities {
			delta := *q.derived(&d) / q.result(&r).V
			sum[k] += delta
			squares[k] += delta * delta
		}
	}
	for k, q := range quantities {
		if q.name == "collapse" {
			continue
		}
		mean := sum[k] / draws
		spread := math.Sqrt(squares[k]/draws-mean*mean) * q.result(&r).V
		near(t, q.name, q.result(&r).Err, spread, 0.015) // 1/√(2·40000) = 0.0035
	}
}

func cholesky(t *testing.T, a [NumMeasured][NumMeasured]float64) (l [NumMeasured][NumMeasured]float64) {
	t.Helper()
	for i := range l {
		for j := range i + 1 {
			s := a[i][j]
			for k := range j {
				s -= l[i][k] * l[j][k]
			}
			if i != j {
				l[i][j] = s / l[j][j]
			} else if l[i][i] = math.Sqrt(s); !(l[i][i] > 0) {
				t.Fatal("the example is no covariance")
			}
		}
	}
	return l
}

// scale is a pixel too large by eps: the fit's T and μ, measured through sizes, grow by
// 2 eps in a long flight, and N by 2 eps through the pixel.
func scale(m Measured, lab Lab, eps float64, known bool) Shift {
	lab.Pixel *= 1 + eps
	return Shift{Name: "magnification", Known: known, Delta: Measured{T: 2 * eps * m.T, Mu: 2 * eps * m.Mu}, Lab: lab}
}

func TestCalibrationErrors(t *testing.T) {
	lab := rubidium(t)
	m := bimodal(lab)
	const eps = 1e-5
	squeezed := lab
	for i := range squeezed.Trap.Omega {
		squeezed.Trap.Omega[i] *= 1 + 3*eps
	}
	trap := Shift{Name: "trap", Known: true, Lab: squeezed}
	r := Compute(m, example(m), []Shift{scale(m, lab, eps, true), trap}, lab)
	for _, c := range []struct {
		what        string
		got         Value
		scale, trap float64 // relative changes in units of eps
	}{
		{"atoms", r.Atoms, 2, 0},
		{"T", r.T, 2, 0},
		{"mu", r.Mu, 2, 0},
		{"mu from atoms", r.MuFromAtoms, 0.8, 3 * 1.2},
		{"Tc0", r.Tc0, 2. / 3, 3},
		{"T/Tc0", r.Reduced, 4. / 3, -3},
		{"over saturated", r.ThermalOverSaturated, 2 - 6, 9},
		{"mu ratio", r.MuOverMuAtoms, 1.2, -3.6},
	} {
		near(t, c.what, c.got.Cal/c.got.V, eps*math.Hypot(c.scale, c.trap), 1e-3)
	}
	if !(r.Fraction.Cal <= 1e-15) {
		t.Errorf("fraction %v: both parts scale alike", r.Fraction)
	}
	near(t, "signed change of T/Tc0 by the trap", r.Shifts[1].Change.Reduced/r.Reduced.V, -3*eps, 1e-3)
	if r.Shifts[0].Name != "magnification" || r.Shifts[1].Name != "trap" {
		t.Errorf("shifts out of order: %v", r.Shifts)
	}
}

func TestUnstatedCalibration(t *testing.T) {
	lab := rubidium(t)
	m := bimodal(lab)
	squeezed := lab
	squeezed.Trap.Omega[0] *= 1.01
	r := Compute(m, example(m), []Shift{
		scale(m, lab, 0.01, true), {Name: "trap", Known: false, Lab: squeezed},
	}, lab)
	near(t, "atoms", r.Atoms.Cal/r.Atoms.V, 1.01*1.01-1, 1e-9)
	near(t, "T", r.T.Cal/r.T.V, 0.02, 1e-9)
	for name, v := range map[string]Value{"Tc0": r.Tc0, "mu from atoms": r.MuFromAtoms, "T/Tc0": r.Reduced} {
		isNaN(t, name+" calibration error", v.Cal)
	}
	r = Compute(m, example(m), []Shift{scale(m, lab, 0.01, false)}, lab)
	isNaN(t, "atoms calibration error", r.Atoms.Cal)
	isNaN(t, "T calibration error", r.T.Cal)
}

// The covariance of the fit is a table computed apart, beside which 0.23172±0.00081
// stands; without the correlation of the two sums it would be 0.00079. The table itself
// gives 0.000805, so the bound is one unit of the last digit.
func TestFractionOfFittedCloud(t *testing.T) {
	rows := table(t, "bimodal_covariance.csv")
	var value, sigma [6]float64 // od_thermal, sigma_x, sigma_y, od_condensate, R_x, R_y
	var cov [6][6]float64
	for i := range value {
		value[i], sigma[i] = number(t, rows[i+1][1]), number(t, rows[i+1][2])
	}
	for i := range cov {
		for j := range cov {
			cov[i][j] = number(t, rows[i+1][3+j]) * sigma[i] * sigma[j]
		}
	}
	m := Measured{
		ThermalSum:    2 * math.Pi * value[0] * value[1] * value[2] * bose.Zeta3 / bose.Zeta2,
		CondensateSum: 2 * math.Pi / 5 * value[3] * value[4] * value[5],
		T:             1e-7, Mu: 1e-30,
	}
	var sums [NumMeasured][NumMeasured]float64
	part := [2]float64{m.ThermalSum, m.CondensateSum}
	for i := range cov {
		for j := range cov {
			sums[i/3][j/3] += part[i/3] / value[i] * cov[i][j] * part[j/3] / value[j]
		}
	}
	r := Compute(m, sums, nil, rubidium(t))
	near(t, "fraction", r.Fraction.V, 0.23172, 2e-5)
	near(t, "fraction error", r.Fraction.Err, 0.00081, 1./81)
}

// With α within its error of 0 the local slope of the density diverges; the error must
// stay that of a step of one standard deviation.
func TestErrorsNearSaturation(t *testing.T) {
	lab := rubidium(t)
	m := bimodal(lab)
	m.CondensateSum, m.Mu = 0, math.NaN()
	var cov [NumMeasured][NumMeasured]float64
	cov[4][4] = 0.02 * 0.02
	step := model.ThermalPeakDensity(2e5, m.T, 0, lab.Species.Mass, lab.Trap) -
		model.ThermalPeakDensity(2e5, m.T, 0.02, lab.Species.Mass, lab.Trap)
	near(t, "peak density", Compute(m, cov, nil, lab).PeakDensity.Err, step, 1e-9)
	m.Alpha = -0.01
	near(t, "fugacity beyond 1", Derive(m, lab).Fugacity, 1, 0)
}

// Bradley, Sackett, Hulet, Phys. Rev. Lett. 78, 985 (1997) predict about 1400 atoms at
// collapse in this trap (frequencies from memory); with the same numbers the
// Gross-Pitaevskii equation gives 1256.
func TestAttractive(t *testing.T) {
	s, err := model.LookupSpecies("7Li")
	if err != nil {
		t.Fatal(err)
	}
	s.ScatteringLength = -27.3 * model.A0
	lab := Lab{Species: s, Trap: model.TrapHz(150.6, 152.6, 131.5), Pixel: 3e-6}
	atoms := func(n float64) Measured {
		return Measured{CondensateSum: n * s.Sigma0() / (lab.Pixel * lab.Pixel), T: math.NaN(), Mu: math.NaN()}
	}
	d := Derive(atoms(628.2), lab)
	near(t, "collapse", d.Collapse, 0.5, 2e-3)
	isNaN(t, "Thomas-Fermi mu", d.MuFromAtoms)
	a := lab.Trap.Length(s.Mass)
	if ideal := 628.2 / math.Pow(math.Sqrt(math.Pi)*a, 3); !(d.PeakDensity > 1.1*ideal && d.PeakDensity < 3*ideal) {
		t.Errorf("peak density %g of an attractive gas, %g of an ideal one", d.PeakDensity, ideal)
	}
	isNaN(t, "peak density beyond collapse", Derive(atoms(3000), lab).PeakDensity)
}

func TestQuantitiesCoverEveryField(t *testing.T) {
	var d Derived
	var r Result
	dv, rv := reflect.ValueOf(&d).Elem(), reflect.ValueOf(&r).Elem()
	if dv.NumField() != len(quantities) || rv.NumField() != len(quantities)+2 { // correlation and shifts
		t.Fatalf("%d quantities, %d fields of Derived, %d of Result", len(quantities), dv.NumField(), rv.NumField())
	}
	for i := range dv.NumField() {
		field, found := dv.Type().Field(i).Name, false
		for _, q := range quantities {
			if dv.Field(i).Addr().Interface() == any(q.derived(&d)) {
				found = rv.FieldByName(field).Addr().Interface() == any(q.result(&r))
			}
		}
		if !found {
			t.Errorf("field %s is not one quantity in both structs", field)
		}
	}
}

func table(t *testing.T, name string) [][]string {
	t.Helper()
	f, err := os.Open("../../testdata/reference/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	reader := csv.NewReader(f)
	reader.Comment = '#'
	rows, err := reader.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return rows
}

func number(t *testing.T, s string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}
