package settings

import (
	"math"
	"slices"
	"strings"
	"testing"

	"fallshadow/fit"
	"fallshadow/model"
)

// near fails unless got is within the relative tolerance of want; NaN fails.
func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol*math.Max(math.Abs(want), 1e-300)) {
		t.Errorf("%s: got %.10g, want %.10g", what, got, want)
	}
}

const evap = `[atom]
species = "87Rb"
scattering_length_a0 = { value = 100.4, err = 0.1 }
[trap]
axis1_hz = { value = 20.0, err = 0.1 }
axis2_hz = { value = 120.0, err = 0 }
sight_hz = 120.0
angle_deg = 4.0
[camera]
pixel_um = 6.45
binning = 2
magnification = { value = 2.0, err = 0.02 }
electrons_per_count = 1.5
resolution_um = { value = 3.0, err = 0.5 }
[probe]
alpha = { value = 2.0, err = 0.1 }
counts_per_isat = { value = 9000.0, err = 300.0 }
[flight]
from = "TOF"
zero_ms = { value = 0.1, err = 0.02 }
`

func labOf(t *testing.T, text string) fit.Lab {
	t.Helper()
	lab, err := parse(t, text).Lab()
	if err != nil {
		t.Fatal(err)
	}
	return lab
}

func TestLabIsInSI(t *testing.T) {
	lab := labOf(t, evap)
	near(t, "mass", lab.Species.Mass, 86.909180529*1.66053906892e-27, 1e-12) // AME2020, CODATA 2022
	near(t, "scattering length", lab.Species.ScatteringLength, 100.4*5.29177210544e-11, 1e-12)
	near(t, "axis 1", lab.Trap.Omega[0], 2*math.Pi*20, 1e-15)
	near(t, "sight", lab.Trap.Omega[2], 2*math.Pi*120, 1e-15)
	near(t, "pixel", lab.Optics.Pixel, 6.45e-6, 1e-12) // 6.45 um, binned by 2, magnified by 2
	near(t, "blur", lab.Optics.Blur, 3e-6, 1e-12)
	near(t, "saturation", lab.Optics.Saturation, 13500, 1e-12)
	near(t, "angle", math.Atan2(lab.View[1][0], lab.View[0][0]), 4*math.Pi/180, 1e-12) // axis 1 towards +y
	if lab.Optics.Alpha != 2 || lab.Optics.Detuning != 0 || lab.Optics.Stray != 0 || lab.Release.Ramp != "sudden" {
		t.Errorf("optics %+v, release %+v", lab.Optics, lab.Release)
	}
	if err := lab.Release.Validate(); err != nil {
		t.Error(err)
	}
}

func TestRebinGrowsPixelAndSaturation(t *testing.T) {
	lab := labOf(t, evap+"[fit]\nrebin = 2\n")
	near(t, "pixel", lab.Optics.Pixel, 12.9e-6, 1e-12)
	near(t, "saturation", lab.Optics.Saturation, 4*13500, 1e-12)
}

func TestTiltTurnsAxis1IntoTheSight(t *testing.T) {
	// A tilt of 90 degrees about axis 2 points axis 1 along the line of sight.
	lab := labOf(t, strings.Replace(evap, "angle_deg = 4.0", "tilt_deg = 90.0\ntilt_about_deg = 90.0", 1))
	near(t, "axis 1 on the sight", math.Abs(lab.View[2][0]), 1, 1e-12)
}

func TestWeakProbeAndUnknownGain(t *testing.T) {
	if lab := labOf(t, base); !math.IsInf(lab.Optics.Saturation, 1) {
		t.Errorf("saturation of a weak probe is %g", lab.Optics.Saturation)
	}
	s := parse(t, strings.Replace(evap, "electrons_per_count = 1.5\n", "", 1))
	if _, err := s.Lab(); err == nil || !strings.Contains(err.Error(), "electrons_per_count") {
		t.Errorf("unknown gain: %v", err)
	}
	c := s.LightCamera()
	if c.ElectronsPerCount != 0 || c.ReadNoise != 0 {
		t.Errorf("camera to be measured is %+v", c)
	}
	c.ElectronsPerCount, c.ReadNoise = 2, 5
	lab, err := s.WithCamera(c).Lab()
	if err != nil {
		t.Fatal(err)
	}
	near(t, "saturation", lab.Optics.Saturation, 18000, 1e-12)
	if s.Camera.ElectronsPerCount.Given {
		t.Error("the measured gain went into the settings themselves")
	}
}

func TestSpeciesByNumbers(t *testing.T) {
	lab := labOf(t, strings.Replace(base, `species = "87Rb"`,
		"mass_u = 22.98976928195\nwavelength_nm = 589.1583264\nlinewidth_MHz = 9.7946\nscattering_length_a0 = 54.54", 1))
	na, err := model.LookupSpecies("23Na")
	if err != nil {
		t.Fatal(err)
	}
	near(t, "mass", lab.Species.Mass, na.Mass, 1e-12)
	near(t, "cross-section", lab.Species.Sigma0(), na.Sigma0(), 1e-12)
	near(t, "saturation", lab.Species.SaturationIntensity(), na.SaturationIntensity(), 1e-12)
	near(t, "scattering length", lab.Species.ScatteringLength, na.ScatteringLength, 1e-12)
}

func TestStateChoosesScatteringLength(t *testing.T) {
	lab := labOf(t, with(t, "atom.state", `"2,2"`))
	near(t, "scattering length", lab.Species.ScatteringLength/model.A0, 98.98, 1e-9) // triplet, van Kempen et al., PRL 88, 093201 (2002)
}

// moved returns what a calibration does to the laboratory of a file.
func moved(t *testing.T, text, name string, k float64) (before, after fit.Lab, flight float64) {
	t.Helper()
	before = labOf(t, text)
	i := slices.IndexFunc(before.Calibration, func(c fit.Calibration) bool { return c.Name == name })
	if i < 0 {
		t.Fatalf("no calibration %s", name)
	}
	after, flight = before.Calibration[i].Apply(before, 0.02, k)
	return before, after, flight
}

func TestCalibrationsMoveByTheirError(t *testing.T) {
	for _, k := range []float64{1, -1, 2} {
		b, a, flight := moved(t, evap, "axis1_hz", k)
		near(t, "axis1_hz", a.Trap.Omega[0]-b.Trap.Omega[0], k*2*math.Pi*0.1, 1e-9)
		if a.Trap.Omega[1] != b.Trap.Omega[1] || flight != 0.02 {
			t.Error("axis1_hz moves something else")
		}
		b, a, _ = moved(t, evap, "magnification", k)
		near(t, "magnification", a.Optics.Pixel, b.Optics.Pixel*2/(2+0.02*k), 1e-12)
		_, a, _ = moved(t, evap, "resolution_um", k)
		near(t, "resolution_um", a.Optics.Blur, (3+0.5*k)*1e-6, 1e-12)
		_, a, _ = moved(t, evap, "alpha", k)
		near(t, "alpha", a.Optics.Alpha, 2+0.1*k, 1e-12)
		_, a, _ = moved(t, evap, "counts_per_isat", k)
		near(t, "counts_per_isat", a.Optics.Saturation, 1.5*(9000+300*k), 1e-12)
		_, a, _ = moved(t, evap, "scattering_length_a0", k)
		near(t, "scattering_length_a0", a.Species.ScatteringLength/model.A0, 100.4+0.1*k, 1e-9)
		_, _, flight = moved(t, evap, "zero_ms", k)
		near(t, "zero_ms", flight, 0.02+0.02e-3*k, 1e-12)
	}
}

func TestStatedExtrasMove(t *testing.T) {
	text := strings.Replace(evap, "angle_deg = 4.0", "angle_deg = { value = 4.0, err = 1.0 }\ntilt_deg = { value = 5.0, err = 2.0 }", 1)
	text = strings.Replace(text, "pixel_um = 6.45", "pixel_um = { value = 6.45, err = 0.0645 }", 1)
	text = strings.Replace(text, "[probe]", "[probe]\ndetuning_gamma = { value = 0.0, err = 0.1 }\nstray_fraction = { value = 0.01, err = 0.02 }", 1)
	_, a, _ := moved(t, text, "angle_deg", 1)
	near(t, "angle_deg", a.View[1][0], model.View(5*math.Pi/180, 5*math.Pi/180, 0)[1][0], 1e-12)
	_, a, _ = moved(t, text, "tilt_deg", 1)
	near(t, "tilt_deg", a.View[2][1], model.View(4*math.Pi/180, 7*math.Pi/180, 0)[2][1], 1e-12)
	b, a, _ := moved(t, text, "pixel_um", 1)
	near(t, "pixel_um", a.Optics.Pixel, 1.01*b.Optics.Pixel, 1e-12)
	_, a, _ = moved(t, text, "detuning_gamma", 1)
	near(t, "detuning_gamma", a.Optics.Detuning, 0.1, 1e-12)
	_, a, _ = moved(t, text, "stray_fraction", -1)
	if a.Optics.Stray != 0 {
		t.Errorf("a negative stray fraction: %g", a.Optics.Stray)
	}
}

// TestWhatIsUnknown lists who carries an error, with a + where it is stated.
func TestWhatIsUnknown(t *testing.T) {
	density := func(unit string) string {
		return base + "[shots]\nlayout = \"density\"\ndensity_unit = \"" + unit + "\"\n[probe]\nstray_fraction = 0.01\ncounts_per_isat = 9000\n"
	}
	for _, c := range []struct{ name, text, want string }{
		{"evap", evap, "+scattering_length_a0 +axis1_hz -sight_hz +magnification +resolution_um +alpha +counts_per_isat +zero_ms"},
		{"base", base, "-scattering_length_a0 -axis1_hz -axis2_hz +sight_hz -magnification -resolution_um -alpha -zero_ms"},
		{"detuned", base + "[probe]\ndetuning_gamma = 0.5\n", "-scattering_length_a0 -axis1_hz -axis2_hz +sight_hz -magnification -resolution_um -alpha -detuning_gamma -zero_ms"},
		{"ln(I0/I)", density("log_ratio"), "-scattering_length_a0 -axis1_hz -axis2_hz +sight_hz -magnification -resolution_um -alpha -zero_ms"},
		{"atoms", density("atoms_per_pixel"), "-scattering_length_a0 -axis1_hz -axis2_hz +sight_hz -magnification -resolution_um -zero_ms"},
	} {
		var got, unstated []string
		for _, k := range labOf(t, c.text).Calibration {
			sign := "-"
			if k.Known {
				sign = "+"
			} else {
				unstated = append(unstated, k.Name)
			}
			got = append(got, sign+k.Name)
		}
		if strings.Join(got, " ") != c.want {
			t.Errorf("%s:\ngot  %s\nwant %s", c.name, strings.Join(got, " "), c.want)
		}
		for i, full := range parse(t, c.text).Unstated() {
			if !strings.HasSuffix(full, "."+unstated[i]) {
				t.Errorf("%s: unstated %s beside %s", c.name, full, unstated[i])
			}
		}
	}
}

// TestUnknownErrorsAreFelt: a setting of unknown uncertainty moves the laboratory even
// where it is 0, or the numbers that need it would not be found.
func TestUnknownErrorsAreFelt(t *testing.T) {
	text := strings.Replace(base, `species = "87Rb"`, "species = \"87Rb\"\nscattering_length_a0 = 0.0", 1)
	lab := labOf(t, text)
	for _, c := range lab.Calibration {
		after, flight := c.Apply(lab, 0.02, 1)
		if after.Species == lab.Species && after.Trap == lab.Trap && after.Optics == lab.Optics && after.View == lab.View && flight == 0.02 {
			t.Errorf("%s moves nothing", c.Name)
		}
		if len(after.Calibration) != len(lab.Calibration) {
			t.Errorf("%s loses the calibrations", c.Name)
		}
	}
	b, a, _ := moved(t, base, "resolution_um", 1)
	near(t, "unknown resolution", a.Optics.Blur, 0.1*b.Optics.Pixel, 1e-9)
	b, a, _ = moved(t, base, "axis1_hz", 1)
	near(t, "unknown frequency", a.Trap.Omega[0], 1.01*b.Trap.Omega[0], 1e-12)
}

func TestDensityScale(t *testing.T) {
	text := func(unit string) string {
		return strings.Replace(evap, "[probe]", "[shots]\nlayout = \"density\"\ndensity_unit = \""+unit+"\"\n[probe]\ndetuning_gamma = 0.5", 1)
	}
	scale := func(unit string) float64 {
		s := parse(t, text(unit))
		lab, err := s.Lab()
		if err != nil {
			t.Fatal(err)
		}
		return s.DensityScale(lab)
	}
	near(t, "ln(I0/I)", scale("log_ratio"), 2*(1+4*0.25), 1e-12)
	near(t, "sigma0 n", scale("sigma0_n"), 1, 0)
	// sigma0 of 87Rb: 2.906693e-9 cm² (Steck, Rubidium 87 D line data)
	near(t, "atoms", scale("atoms_per_pixel"), 2.906693e-13/(6.45e-6*6.45e-6), 1e-6)
}

// TestEfficiency: 87Rb has Isat = 1.66933(49) mW/cm² and a photon at 780.241 nm 2.5460e-19 J
// (Steck, Rubidium 87 D line data).
func TestEfficiency(t *testing.T) {
	s := parse(t, strings.Replace(evap, "[probe]", "[probe]\nexposure_us = 40.0", 1))
	photons := 16.6933 * 40e-6 * 6.45e-6 * 6.45e-6 / 2.5460e-19
	near(t, "efficiency", s.Efficiency(), 13500/photons, 1e-3)
	if !math.IsNaN(parse(t, evap).Efficiency()) {
		t.Error("an efficiency without an exposure")
	}
}
