package lm

import (
	"context"
	"fmt"
)

// Minimize finds a minimum of p from x0. It allocates nothing when ws has served a problem
// of the same size before; a nil ws is a new one. The error says that the settings do not
// fit x0, that p is not finite at x0, or that ctx was done; where the search merely ended
// early Result.Reason says so, with no error.
func Minimize(ctx context.Context, p Problem, x0 []float64, s *Settings, ws *Workspace) (Result, error) {
	if ws == nil {
		ws = new(Workspace)
	}
	if n := p.Dim(); n != len(x0) {
		return Result{}, fmt.Errorf("lm: start has %d parameters, the problem %d", len(x0), n)
	}
	ws.normal.reset(p)
	return ws.loop.run(ctx, &ws.normal, x0, s)
}

// MinimizeDense is Minimize for a problem in dense form.
func MinimizeDense(ctx context.Context, p Residuals, x0 []float64, s *Settings) (Result, error) {
	if m, n := p.Size(); n != len(x0) || n == 0 || m == 0 {
		return Result{}, fmt.Errorf("lm: start has %d parameters, the problem %d in %d residuals", len(x0), n, m)
	}
	q := newDenseForm(p)
	r, err := new(loop).run(ctx, q, x0, s)
	r.factor = q.r
	return r, err
}
