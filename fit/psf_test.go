package fit

import (
	"context"
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"slices"
	"strconv"
	"testing"

	"fallshadow/model"
)

// psfTable reads a table of what a point-spread function does to a fit.
func psfTable(t *testing.T, name string) []map[string]float64 {
	t.Helper()
	f, err := os.Open("../testdata/reference/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	lines, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows []map[string]float64
	for _, line := range lines[1:] {
		row := map[string]float64{}
		for i, cell := range line {
			if row[lines[0][i]], err = strconv.ParseFloat(cell, 64); err != nil {
				t.Fatal(err)
			}
		}
		rows = append(rows, row)
	}
	return rows
}

// blurredImage draws a density image of a Thomas-Fermi cloud of peak 1 and radii rx, ry,
// blurred by s; all in pixels.
func blurredImage(w, h int, rx, ry, s float64) *Picture {
	p := &Picture{Width: w, Height: h, Density: make([]float64, w*h), Good: make([]bool, w*h), DensitySigma: 0.3}
	for i := range p.Density {
		x, y := float64(i%w)-float64(w-1)/2, float64(i/w)-float64(h-1)/2
		p.Density[i] = math.Pow(math.Max(0, 1-x*x/(rx*rx)-y*y/(ry*ry)), 1.5)
		p.Good[i] = true
	}
	p.Density = gaussianSums(gaussianSums(p.Density, 1, w, s), w, h, s)
	return p
}

// gaussianSums blurs along lines of n values that are step apart in the plane.
func gaussianSums(in []float64, step, n int, s float64) []float64 {
	reach := int(math.Ceil(6 * s))
	kernel, sum := make([]float64, 2*reach+1), 0.0
	for k := range kernel {
		d := float64(k - reach)
		kernel[k] = math.Exp(-d * d / (2 * s * s))
		sum += kernel[k]
	}
	out := make([]float64, len(in))
	for i := range in {
		at := i / step % n
		for k := max(0, reach-at); k <= min(2*reach, n-1-at+reach); k++ {
			out[i] += kernel[k] / sum * in[i+(k-reach)*step]
		}
	}
	return out
}

// fitImage fits a condensate alone, its radii free, and returns them and its peak.
func fitImage(t *testing.T, p *Picture, aspect, blur float64) (rx, ry, a float64) {
	t.Helper()
	rb, err := model.LookupSpecies("87Rb")
	if err != nil {
		t.Fatal(err)
	}
	const pixel = 1e-6
	// In this trap a condensate of this peak has this radius.
	lab := &Lab{Species: rb, Trap: model.TrapHz(0.27, 0.27/aspect, 0.27), View: model.View(0, 0, 0),
		Optics: Optics{Pixel: pixel, Blur: blur * pixel, Alpha: 1, Saturation: math.Inf(1)}}
	r, err := Cloud(context.Background(), p, lab, 0, Options{Free: true, ThermalChi2: 250}, NewWorkspace())
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Contains(r.Flags, FlagDensityNoReference) {
		t.Errorf("a density image is flagged %v only", r.Flags)
	}
	return r.Radius[0] / pixel, r.Radius[1] / pixel, r.PeakOD
}

// TestDensityImageBlur holds the fit of blurred density images against the tables. Taken for
// sharp, an image has the tables' radii and peak, but for what the free plane under the cloud
// takes of the blurred wing, up to a fourteenth of the correction. Told the resolution, the
// fit has the true ones: the corrections of the tables are made by the model.
func TestDensityImageBlur(t *testing.T) {
	const r = 40.0
	check := func(s, aspect, tableX, tableY, tableA float64) {
		p := blurredImage(200, int(2*aspect*r)+120, r, aspect*r, s*r)
		where := fmt.Sprintf("s/R %g, aspect %g: ", s, aspect)
		if s <= 0.2 { // beyond, what is taken for sharp is not taken for a condensate
			x, y, a := fitImage(t, p, aspect, 0)
			within(t, where+"blurred radius 1", x/r, tableX, (tableX-1)/14+3e-4)
			within(t, where+"blurred radius 2", y/r, tableY, math.Abs(tableX-1)/14+3e-4)
			within(t, where+"blurred peak", a, tableA, (1-tableA)/14+3e-4)
		}
		p.DensitySigma = 0.02 // so that the blurred image is surely no thermal cloud
		x, y, a := fitImage(t, p, aspect, s*r)
		within(t, where+"radius 1", x/r, 1, 5e-4)
		within(t, where+"radius 2", y/r, aspect, 5e-4*aspect)
		within(t, where+"peak", a, 1, 5e-4)
	}
	for _, row := range psfTable(t, "psf_correction.csv") {
		if s := row["s_over_R"]; s == 0.1 || s == 0.35 {
			check(s, 1, row["R_fit_over_R"], row["R_fit_over_R"], row["A_fit_over_A"])
		}
	}
	for _, row := range psfTable(t, "psf_correction_elliptical.csv") {
		if row["Ry"] == 2 && row["s"] == 0.1 {
			check(row["s"], row["Ry"], row["Rx_fit"], row["Ry_fit"], row["A_fit"])
		}
	}
}
