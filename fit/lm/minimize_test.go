package lm

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// near fails unless got is within tol of want; NaN fails.
func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s = %.17g, want %.17g within %g", what, got, want, tol)
	}
}

// line is the linear problem ρ = A x − b.
type line struct {
	a *mat.Dense
	b []float64
}

func (l line) Size() (m, n int) { return l.a.Dims() }

func (l line) Residuals(x, r []float64) {
	for i := range r {
		r[i] = -l.b[i]
		for j, v := range x {
			r[i] += l.a.At(i, j) * v
		}
	}
}

func (l line) Jacobian(_ []float64, j *mat.Dense) { j.Copy(l.a) }

func randomLine(seed uint64, m, n int) line {
	r := rand.New(rand.NewPCG(seed, 7))
	l := line{mat.NewDense(m, n, nil), make([]float64, m)}
	for i := range m {
		l.b[i] = r.NormFloat64()
		for j := range n {
			l.a.Set(i, j, r.NormFloat64()*math.Pow(10, float64(j%5-2)))
		}
	}
	return l
}

// A linear problem is solved by one step: solution and covariance are those of gonum's QR.
func TestLinearEqualsQR(t *testing.T) {
	for seed := range uint64(40) {
		n := 1 + int(seed%9)
		l := randomLine(seed, n+1+int(seed%5)*4, n)
		var qr mat.QR
		qr.Factorize(l.a)
		var want, cov mat.Dense
		if err := qr.SolveTo(&want, false, mat.NewDense(len(l.b), 1, l.b)); err != nil {
			t.Fatal(err)
		}
		cov.Mul(l.a.T(), l.a)
		if err := cov.Inverse(&cov); err != nil {
			t.Fatal(err)
		}
		dense, err := MinimizeDense(context.Background(), l, make([]float64, n), nil)
		if err != nil {
			t.Fatal(err)
		}
		normal, err := Minimize(context.Background(), sum(l), make([]float64, n), nil, nil)
		if err != nil {
			t.Fatal(err)
		}
		for _, r := range [...]Result{dense, normal} {
			c := make([]float64, n*n)
			if err := r.Covariance(c); err != nil {
				t.Fatal(err)
			}
			for i := range n {
				e := math.Sqrt(cov.At(i, i))
				near(t, "solution", r.X[i], want.At(i, 0), 1e-9*(math.Abs(want.At(i, 0))+e))
				for j := range n {
					near(t, "covariance", c[i*n+j], cov.At(i, j), 1e-9*e*math.Sqrt(cov.At(j, j)))
				}
			}
		}
	}
}

// decay is a exp(-k s) + c with exact data at s = 0, 0.5, ...; k must not be negative.
type decay struct{ want [3]float64 }

func (d decay) Dim() int { return 3 }

func (d decay) Normal(x, h, g []float64) float64 {
	if x[1] < 0 {
		return math.NaN()
	}
	f := 0.0
	clear(h)
	clear(g)
	for i := range 12 {
		s := 0.5 * float64(i)
		e := math.Exp(-x[1] * s)
		r := x[0]*e + x[2] - d.want[0]*math.Exp(-d.want[1]*s) - d.want[2]
		j := [3]float64{e, -x[0] * s * e, 1}
		f += r * r
		for a := range 3 {
			if g != nil {
				g[a] += j[a] * r
			}
			for b := 0; h != nil && b < 3; b++ {
				h[3*a+b] += j[a] * j[b]
			}
		}
	}
	return f
}

var hill = decay{[3]float64{4, 0.7, -1}}

func run(t *testing.T, p Problem, x0 []float64, s *Settings) Result {
	t.Helper()
	r, err := Minimize(context.Background(), p, x0, s, nil)
	if err != nil {
		t.Fatal(err)
	}
	if !r.Reason.Usable() {
		t.Errorf("ended: %s", r.Reason.Sentence())
	}
	return r
}

// Steps that leave the domain are refused, not fatal: the undamped step from here has k < 0.
func TestOutsideDomain(t *testing.T) {
	r := run(t, hill, []float64{1, 3, 2}, nil)
	for i, v := range hill.want {
		near(t, "parameter", r.X[i], v, 1e-8)
	}
	r, err := Minimize(context.Background(), hill, []float64{1, -1, 0}, nil, nil)
	if err == nil || r.Reason != StartOutside || r.Reason.Usable() {
		t.Errorf("a start outside the domain gives %v, %v", r.Reason, err)
	}
}

// With a bound that cuts the minimum off, the solution is the one with that parameter fixed
// at the bound, its gradient pushes outwards, and its row of the covariance is 0.
func TestBounds(t *testing.T) {
	inf := math.Inf(1)
	free := []float64{-inf, -inf, -inf}
	for _, c := range [...]struct {
		name         string
		lower, upper []float64
		at           int
		value        float64
	}{
		{"lower", []float64{-inf, 1, -inf}, nil, 1, 1},
		{"upper", free, []float64{3.5, inf, inf}, 0, 3.5},
		{"both", []float64{-inf, 0.9, -inf}, []float64{inf, 1.5, inf}, 1, 0.9},
	} {
		start := []float64{3, 1.2, 0}
		r := run(t, hill, start, &Settings{Lower: c.lower, Upper: c.upper, FTol: -1})
		start[c.at] = c.value
		fixed := []bool{false, false, false}
		fixed[c.at] = true
		want := run(t, hill, start, &Settings{Fixed: fixed, FTol: -1})
		if r.X[c.at] != c.value || !r.AtBound[c.at] || want.AtBound[c.at] {
			t.Errorf("%s: parameter %d is %v, at its bound %v", c.name, c.at, r.X[c.at], r.AtBound)
		}
		var a, b [9]float64
		if err := errors.Join(r.Covariance(a[:]), want.Covariance(b[:])); err != nil {
			t.Fatal(err)
		}
		for i := range 3 {
			near(t, c.name, r.X[i], want.X[i], 1e-8)
			near(t, c.name, a[3*c.at+i], 0, 0)
			for j := range 3 {
				near(t, c.name+" covariance", a[3*i+j], b[3*i+j], 1e-5)
			}
		}
	}
	// A bound that the start sits on but the minimum does not is left again.
	r := run(t, hill, []float64{1, 2, 1}, &Settings{Lower: free, Upper: []float64{inf, 2, 1}})
	near(t, "left bound", r.X[1], 0.7, 1e-8)
	near(t, "left bound", r.X[2], -1, 1e-8)
}

func TestAllFixed(t *testing.T) {
	r := run(t, hill, []float64{4, 0.7, 0}, &Settings{Fixed: []bool{true, true, true}})
	if r.Reason != NothingFree {
		t.Errorf("ended by %v", r.Reason)
	}
	near(t, "sum of squares", r.F, 12, 1e-12)
}

// Ties: the amplitude is minus four times the offset, and the offset hangs on nothing else.
func TestTie(t *testing.T) {
	tied, err := Tie(hill, []float64{-4, 0, 0, 1, 1, 0}, []float64{0, 0.1, 0}, 2)
	if err != nil {
		t.Fatal(err)
	}
	r := run(t, tied, []float64{-0.3, 2}, nil)
	x := make([]float64, 3)
	tied.Expand(r.X, x)
	for i, v := range hill.want {
		near(t, "parameter", x[i], v, 1e-8)
	}
	var c [4]float64
	var full [9]float64
	if err := r.Covariance(c[:]); err != nil {
		t.Fatal(err)
	}
	tied.Covariance(full[:], c[:])
	near(t, "variance of the tied amplitude", full[0], 16*full[8], 1e-12)
	near(t, "covariance of the tied pair", full[2], -4*full[8], 1e-12)
	h, g := make([]float64, 4), make([]float64, 2)
	near(t, "sum of squares alone", tied.Normal(r.X, nil, nil), tied.Normal(r.X, h, g), 0)
	if _, err := Tie(hill, []float64{1, 2}, x, 2); err == nil {
		t.Error("a tie of the wrong size was taken")
	}
}

// trail keeps the points at which a problem was evaluated.
type trail struct {
	Problem
	x [][]float64
}

func (p *trail) Normal(x, h, g []float64) float64 {
	p.x = append(p.x, append([]float64(nil), x...))
	return p.Problem.Normal(x, h, g)
}

func TestStepLimits(t *testing.T) {
	for _, s := range [...]Settings{
		{MaxStep: []float64{0.25, 0, 0}, MaxIterations: 100},
		{RelStep: []float64{0, 0.1, 0}, MaxIterations: 100},
	} {
		p := &trail{Problem: hill}
		r := run(t, p, []float64{1, 2, 0}, &s)
		near(t, "parameter", r.X[1], 0.7, 1e-8)
		longest, relative := 0.0, 0.0
		for i, x := range p.x[1:] {
			longest = max(longest, math.Abs(x[0]-p.x[i][0]))
			relative = max(relative, math.Abs(x[1]/p.x[i][1]-1))
		}
		switch {
		case s.MaxStep != nil:
			near(t, "longest step", longest, 0.25, 1e-12)
		default:
			near(t, "longest relative step", relative, 0.1, 1e-12)
		}
	}
}

// The parameters 0 and 2 count only by their sum: a minimum is found, the covariance
// refuses and names the later one.
func TestRankDeficient(t *testing.T) {
	l := randomLine(3, 20, 3)
	for i := range 20 {
		l.a.Set(i, 2, l.a.At(i, 0))
	}
	two := line{l.a.Slice(0, 20, 0, 2).(*mat.Dense), l.b}
	want := run(t, sum(two), make([]float64, 2), nil)
	dense, err := MinimizeDense(context.Background(), l, make([]float64, 3), nil)
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range [...]Result{dense, run(t, sum(l), make([]float64, 3), nil)} {
		near(t, "sum of squares", r.F, want.F, 1e-9*want.F)
		near(t, "sum of the parameters", r.X[0]+r.X[2], want.X[0], 1e-6*math.Abs(want.X[0]))
		if err := r.Covariance(make([]float64, 9)); err == nil || !strings.Contains(err.Error(), "parameter 2") {
			t.Errorf("covariance of a singular problem: %v", err)
		}
	}
}

// liar promises a slope that is not there.
type liar struct{ Problem }

func (l liar) Normal(x, h, g []float64) float64 {
	f := l.Problem.Normal(x, h, g)
	for i := range g {
		g[i] *= -1
	}
	return f
}

func TestReasons(t *testing.T) {
	start := []float64{1, 2, 0}
	noisy := sum(randomLine(5, 30, 3))
	for _, c := range [...]struct {
		p    Problem
		s    Settings
		want Termination
	}{
		{noisy, Settings{FTol: -1}, SmallStep},
		{noisy, Settings{}, SmallDecrease},
		{noisy, Settings{PredictTol: 1e-3}, PredictedDecrease},
		{noisy, Settings{GTol: 1e-6, FTol: -1, XTol: -1}, SmallGradient},
		{noisy, Settings{FTol: -1, XTol: -1}, RoundingLimit},
		{hill, Settings{MaxIterations: 2}, IterationLimit},
		{liar{hill}, Settings{}, Stalled},
	} {
		r, err := Minimize(context.Background(), c.p, start, &c.s, nil)
		if err != nil || r.Reason != c.want {
			t.Errorf("ended by %v (%v), want %v", r.Reason, err, c.want)
		}
	}
	for r := Unfinished; r <= Cancelled; r++ {
		if r.String() == "" || len(r.Sentence()) < 20 || r.Usable() == (r == Stalled || r == Unfinished || r >= IterationLimit) {
			t.Errorf("reason %d: %q, %q, usable %v", r, r, r.Sentence(), r.Usable())
		}
	}
}

// The accepted prediction saves the last evaluation and comes out at the same place.
func TestAcceptPredicted(t *testing.T) {
	p := sum(randomLine(8, 30, 4))
	a := run(t, p, make([]float64, 4), &Settings{PredictTol: 1e9, AcceptPredicted: true})
	b := run(t, p, make([]float64, 4), &Settings{PredictTol: 1e9})
	if a.Evaluations != 1 || b.Evaluations != 2 {
		t.Errorf("%d and %d evaluations, want 1 and 2", a.Evaluations, b.Evaluations)
	}
	near(t, "sum of squares", a.F, b.F, 1e-12*b.F)
	for i := range a.X {
		near(t, "parameter", a.X[i], b.X[i], 0)
	}
}

func TestCancel(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	r, err := Minimize(ctx, hill, []float64{1, 2, 0}, nil, nil)
	if !errors.Is(err, context.Canceled) || r.Reason != Cancelled || r.X[0] != 1 {
		t.Errorf("cancelled work gives %v, %v", r, err)
	}
}

func TestBadSettings(t *testing.T) {
	nan := math.NaN()
	for name, s := range map[string]*Settings{
		"length":      {Fixed: []bool{true}},
		"below":       {Lower: []float64{2, 0, 0}},
		"above":       {Upper: []float64{0, 9, 9}},
		"bound NaN":   {Upper: []float64{9, 9, nan}},
		"limit":       {MaxStep: []float64{-1, 0, 0}},
		"limit NaN":   {RelStep: []float64{nan, 0, 0}},
		"limit count": {RelStep: []float64{1}},
	} {
		if _, err := Minimize(context.Background(), hill, []float64{1, 2, 0}, s, nil); err == nil {
			t.Errorf("%s: taken", name)
		}
	}
	if _, err := Minimize(context.Background(), hill, []float64{1, 2}, nil, nil); err == nil {
		t.Error("a start of the wrong length was taken")
	}
	if _, err := Minimize(context.Background(), hill, []float64{1, nan, 0}, nil, nil); err == nil {
		t.Error("a start that is not a number was taken")
	}
}

// A workspace used before gives the same bits and takes no memory.
func TestWorkspace(t *testing.T) {
	ctx, x0 := context.Background(), []float64{1, 3, 2}
	fresh := run(t, hill, x0, nil)
	ws := new(Workspace)
	big := sum(randomLine(1, 30, 6))
	if _, err := Minimize(ctx, big, make([]float64, 6), nil, ws); err != nil {
		t.Fatal(err)
	}
	used, err := Minimize(ctx, hill, x0, nil, ws)
	if err != nil {
		t.Fatal(err)
	}
	for i := range fresh.X {
		if fresh.X[i] != used.X[i] {
			t.Errorf("parameter %d: %v with a used workspace, %v with a new one", i, used.X[i], fresh.X[i])
		}
	}
	var p Problem = hill
	if n := testing.AllocsPerRun(20, func() { used, err = Minimize(ctx, p, x0, nil, ws) }); n != 0 || err != nil {
		t.Errorf("%v allocations, %v", n, err)
	}
}

func BenchmarkMinimize(b *testing.B) {
	ws := new(Workspace)
	var p Problem = hill
	x0 := []float64{1, 3, 2}
	for b.Loop() {
		if _, err := Minimize(context.Background(), p, x0, nil, ws); err != nil {
			b.Fatal(err)
		}
	}
}
