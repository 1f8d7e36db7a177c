package study

import (
	"bytes"
	"context"
	"io"
	"path/filepath"
	"testing"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/fit"
)

// BenchmarkCurve10000 does what the command curve does with a ledger of 10,000 shots, a
// tenth of them flagged: reads it, analyses it, draws the figure in all formats and writes
// tables and report.
func BenchmarkCurve10000(b *testing.B) {
	n := made(b, 10000)
	for i := 0; i < len(n.Rows); i += 10 {
		n.Rows[i].Flags = []string{fit.FlagDense}
	}
	root, out := b.TempDir(), filepath.Join(b.TempDir(), "results")
	stored(b, n, root, out)
	size := 0
	for b.Loop() {
		size = curveOf(b, root, out, n)
	}
	b.ReportMetric(float64(size), "report-bytes")
}

// stored writes the rows of a night into a ledger.
func stored(b *testing.B, n *Night, root, out string) {
	ctx := context.Background()
	l, err := ledger.Open(ctx, out, root, nil)
	if err != nil {
		b.Fatal(err)
	}
	defer l.Close()
	for i := range n.Rows {
		if err := l.Put(ctx, &n.Rows[i]); err != nil {
			b.Fatal(err)
		}
	}
}

// curveOf returns the size of the report.
func curveOf(b *testing.B, root, out string, n *Night) int {
	ctx := context.Background()
	got, err := Load(ctx, root, out, n.Settings)
	if err != nil {
		b.Fatal(err)
	}
	a := analysed(b, got)
	d, err := a.Plot(Axes{X: DefaultX, Y: DefaultY})
	if err != nil {
		b.Fatal(err)
	}
	var page bytes.Buffer
	for _, err := range []error{a.WriteText(io.Discard), Save(d.Figure, filepath.Join(out, "curve.png"), 86, 66),
		Save(d.Figure, filepath.Join(out, "curve.svg"), 86, 66), Save(d.Figure, filepath.Join(out, "curve.pdf"), 86, 66),
		a.WriteTable(io.Discard), a.WriteJSON(io.Discard), a.WriteReport(ctx, &page, d)} {
		if err != nil {
			b.Fatal(err)
		}
	}
	return page.Len()
}
