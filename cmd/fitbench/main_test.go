package main

import (
	"bytes"
	"context"
	"encoding/binary"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"fallshadow/fit"
)

const header = "name,W,H,data,sigma,s1,s2,s3,s4,s5,s6,s7,s8,s9,s10,s11,s12,t1,t2,t3,t4,t5,t6,t7,t8,t9,t10,t11,t12\n"

// condensateOnly is a cloud whose model is elementary: a condensate on a sloping background
// and a thermal part too faint to matter.
var condensateOnly = fit.DensityParams{0.001, 9, 8, 1.2, 20, 12, 33.5, 25.25, 0.2, 0.03, -0.02, 0.05}

// writeCase writes the two files of a noisy image of condensateOnly and returns its row.
func writeCase(t *testing.T, folder, name string, seed uint64) string {
	t.Helper()
	const w, h, sigma = 64, 50, 0.02
	p, r := condensateOnly, rand.New(rand.NewPCG(seed, 1))
	sin, cos := math.Sincos(p[fit.DensityAngle])
	var data, errs bytes.Buffer
	for i := range w * h {
		x, y := float64(i%w), float64(i/w)
		u := (x-p[fit.DensityX])*cos + (y-p[fit.DensityY])*sin
		v := (y-p[fit.DensityY])*cos - (x-p[fit.DensityX])*sin
		q := max(0, 1-math.Pow(u/p[fit.DensityRadius1], 2)-math.Pow(v/p[fit.DensityRadius2], 2))
		d := p[fit.DensityPeak]*math.Pow(q, 1.5) + p[fit.DensityLight] + p[fit.DensityLightX]*(x-(w-1)/2.0)/w +
			p[fit.DensityLightY]*(y-(h-1)/2.0)/h + sigma*r.NormFloat64()
		data.Write(binary.LittleEndian.AppendUint64(nil, math.Float64bits(d)))
		errs.Write(binary.LittleEndian.AppendUint64(nil, math.Float64bits(sigma)))
	}
	row := fmt.Sprintf("%s,%d,%d,%s.data,%s.sigma", name, w, h, name, name)
	write(t, filepath.Join(folder, name+".data"), data.Bytes())
	write(t, filepath.Join(folder, name+".sigma"), errs.Bytes())
	start := p
	start[fit.DensityPeak] *= 0.8
	start[fit.DensityRadius1] *= 1.2
	start[fit.DensityX] += 1.5
	for _, q := range [...]fit.DensityParams{start, p} {
		for _, v := range q {
			row += fmt.Sprintf(",%v", v)
		}
	}
	return row + "\n"
}

func write(t *testing.T, path string, b []byte) {
	t.Helper()
	if err := os.WriteFile(path, b, 0o600); err != nil {
		t.Fatal(err)
	}
}

// A line a case: name, time, iterations, χ² as it should be, and the parameters drawn.
func TestRun(t *testing.T) {
	folder := t.TempDir()
	manifest := filepath.Join(folder, "manifest.csv")
	write(t, manifest, []byte(header+writeCase(t, folder, "a", 1)+writeCase(t, folder, "b", 2)))
	for _, clock := range [...]string{"", "wall", "cpu"} {
		t.Setenv("PEER_CLOCK", clock)
		var out strings.Builder
		if err := run(context.Background(), []string{manifest}, &out); err != nil {
			t.Fatal(err)
		}
		lines := strings.Split(strings.TrimSpace(out.String()), "\n")
		if len(lines) != 2 || !strings.HasPrefix(lines[0], "a ") || !strings.HasPrefix(lines[1], "b ") {
			t.Fatalf("printed %q", out.String())
		}
		for _, line := range lines {
			checkLine(t, line)
		}
	}
}

func checkLine(t *testing.T, line string) {
	t.Helper()
	var v [3 + fit.NumDensity]float64
	fields := strings.Fields(line)
	if len(fields) != 1+len(v) {
		t.Fatalf("%d fields in %q", len(fields), line)
	}
	for i := range v {
		var err error
		if v[i], err = strconv.ParseFloat(fields[1+i], 64); err != nil {
			t.Fatal(err)
		}
	}
	const pixels = 64 * 50
	if !(v[0] >= 0 && v[1] >= 1 && math.Abs(v[2]/pixels-1) <= 5*math.Sqrt(2.0/pixels)) {
		t.Errorf("time, iterations and χ² of %q", line)
	}
	for _, k := range [...]int{fit.DensityPeak, fit.DensityRadius1, fit.DensityRadius2, fit.DensityX, fit.DensityY} {
		if !(math.Abs(v[3+k]/condensateOnly[k]-1) <= 0.03) {
			t.Errorf("parameter %d is %v, drawn %v", k, v[3+k], condensateOnly[k])
		}
	}
}

func TestRunRefuses(t *testing.T) {
	folder := t.TempDir()
	good := writeCase(t, folder, "a", 1)
	for name, text := range map[string]string{
		"empty":       "",
		"header only": header,
		"fields":      header + "a,64,50\n",
		"size":        header + strings.Replace(good, ",64,", ",65,", 1),
		"huge":        header + strings.Replace(good, ",64,", ",9999999,", 1),
		"number":      header + strings.Replace(good, "0.001", "x", 1),
		"file":        header + strings.Replace(good, "a.data", "none.data", 1),
	} {
		manifest := filepath.Join(folder, "manifest.csv")
		write(t, manifest, []byte(text))
		var out strings.Builder
		if err := run(context.Background(), []string{manifest}, &out); err == nil || out.Len() > 0 {
			t.Errorf("%s: error %v, printed %q", name, err, out.String())
		}
	}
	if err := run(context.Background(), nil, &strings.Builder{}); err == nil {
		t.Error("ran without a manifest")
	}
	t.Setenv("PEER_CLOCK", "sun")
	write(t, filepath.Join(folder, "good.csv"), []byte(header+good))
	if err := run(context.Background(), []string{filepath.Join(folder, "good.csv")}, &strings.Builder{}); err == nil {
		t.Error("ran by an unknown clock")
	}
}

func FuzzManifest(f *testing.F) {
	f.Add([]byte(header + "a,2,2,d,s" + strings.Repeat(",1", 24) + "\n"))
	f.Add([]byte(header))
	f.Add([]byte("\"\n,"))
	f.Fuzz(func(t *testing.T, b []byte) {
		cases, err := parseManifest(bytes.NewReader(b), "folder")
		if (err == nil) == (len(cases) == 0) {
			t.Errorf("%d cases, %v", len(cases), err)
		}
		for _, c := range cases {
			if c.width < 1 || c.height < 1 {
				t.Errorf("a case of %d×%d pixels", c.width, c.height)
			}
		}
	})
}
