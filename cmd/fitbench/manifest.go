package main

import (
	"encoding/binary"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"strconv"

	"fallshadow/fit"
)

// benchCase is one row of the manifest.
type benchCase struct {
	name          string
	width, height int
	data, sigma   string // files
	start         fit.DensityParams
}

// fields of a row before the starts, and with the true values.
const (
	startField = 5
	numFields  = startField + 2*fit.NumDensity
)

func readManifest(path string) ([]benchCase, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	cases, err := parseManifest(f, filepath.Dir(path))
	if err != nil {
		return nil, fmt.Errorf("manifest %s: %w", path, err)
	}
	return cases, nil
}

func parseManifest(r io.Reader, folder string) ([]benchCase, error) {
	table := csv.NewReader(r)
	table.FieldsPerRecord = numFields
	rows, err := table.ReadAll()
	if err != nil {
		return nil, err
	}
	if len(rows) < 2 {
		return nil, errors.New("no cases below the header")
	}
	cases := make([]benchCase, len(rows)-1)
	for i, row := range rows[1:] {
		if cases[i], err = parseCase(folder, row); err != nil {
			return nil, fmt.Errorf("case %d: %w", i+1, err)
		}
	}
	return cases, nil
}

func parseCase(folder string, row []string) (c benchCase, err error) {
	c = benchCase{name: row[0], data: filepath.Join(folder, row[3]), sigma: filepath.Join(folder, row[4])}
	for i, p := range [...]*int{&c.width, &c.height} {
		if *p, err = strconv.Atoi(row[1+i]); err != nil {
			return c, err
		}
		if *p < 1 || *p > 1<<14 {
			return c, fmt.Errorf("an edge of %d pixels, want 1 to %d", *p, 1<<14)
		}
	}
	for i := range c.start {
		if c.start[i], err = strconv.ParseFloat(row[startField+i], 64); err != nil {
			return c, err
		}
	}
	return c, nil
}

// read loads the pixels.
func (c *benchCase) read() (*fit.DensityImage, error) {
	img := &fit.DensityImage{Width: c.width, Height: c.height}
	var err error
	if img.Density, err = readFloats(c.data, c.width*c.height); err != nil {
		return nil, err
	}
	img.Sigma, err = readFloats(c.sigma, c.width*c.height)
	return img, err
}

func readFloats(path string, n int) ([]float64, error) {
	b, err := os.ReadFile(path)
	if err != nil {
		return nil, err
	}
	if len(b) != 8*n {
		return nil, fmt.Errorf("%s holds %d bytes, want %d for %d float64", path, len(b), 8*n, n)
	}
	v := make([]float64, n)
	for i := range v {
		v[i] = math.Float64frombits(binary.LittleEndian.Uint64(b[8*i:]))
	}
	return v, nil
}
