// Command fitbench fits the raw density images of a manifest with the product's density
// kernel, so that it can be timed beside general solvers of the same problem.
//
//	fitbench MANIFEST
//
// The manifest is a CSV table with a header and the columns name, W, H, data, sigma, 12
// starts and 12 true values, in the order of fit.DensityParams. The files are raw
// little-endian float64, row by row, named relative to the manifest's folder. A line a case
// goes to standard output: name, milliseconds, iterations at full resolution, χ², the 12
// parameters. Time is of the wall, or of the processor where PEER_CLOCK is cpu.
package main

import (
	"bufio"
	"context"
	"fmt"
	"io"
	"os"

	"fallshadow/fit"
)

func main() {
	if err := run(context.Background(), os.Args[1:], os.Stdout); err != nil {
		fmt.Fprintln(os.Stderr, "fitbench:", err)
		os.Exit(1)
	}
}

func run(ctx context.Context, args []string, out io.Writer) error {
	if len(args) != 1 {
		return fmt.Errorf("got %d arguments, want the manifest only", len(args))
	}
	cases, err := readManifest(args[0])
	if err != nil {
		return err
	}
	clock, err := newClock(os.Getenv("PEER_CLOCK"))
	if err != nil {
		return err
	}
	w := bufio.NewWriter(out)
	ws := new(fit.DensityWorkspace)
	for i, c := range cases {
		img, err := c.read()
		if err != nil {
			return err
		}
		if i == 0 { // untimed: tables and memory
			if _, err := fit.DensityFit(ctx, img, &c.start, ws); err != nil {
				return fmt.Errorf("%s: %w", c.name, err)
			}
		}
		if err := c.fit(ctx, img, ws, clock, w); err != nil {
			return fmt.Errorf("%s: %w", c.name, err)
		}
		if err := w.Flush(); err != nil {
			return err
		}
	}
	return nil
}

// fit times one fit and prints its line.
func (c *benchCase) fit(ctx context.Context, img *fit.DensityImage, ws *fit.DensityWorkspace, clock clock, w io.Writer) error {
	begin := clock()
	r, err := fit.DensityFit(ctx, img, &c.start, ws)
	ms := (clock() - begin).Seconds() * 1e3
	if err != nil {
		return err
	}
	chi2, err := fit.DensityChi2(img, &r.Params, ws)
	if err != nil {
		return err
	}
	fmt.Fprintf(w, "%s %.6f %d %.12g", c.name, ms, r.Iterations, chi2)
	for _, v := range r.Params {
		fmt.Fprintf(w, " %.12g", v)
	}
	_, err = fmt.Fprintln(w)
	return err
}
