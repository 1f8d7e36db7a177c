package fit

import (
	"context"
	"fmt"
	"math"

	"fallshadow/fit/lm"
)

// The parameters of a density image, lengths in pixels: u and v are the distances from the
// centre along the axes, turned by the angle from +x towards +y,
//
//	od = thermal·g₂(exp(−u²/2σ₁² − v²/2σ₂²))/g₂(1) + peak·max(0, 1 − u²/R₁² − v²/R₂²)^(3/2)
//	     + light + lightX·(x − (W−1)/2)/W + lightY·(y − (H−1)/2)/H,
//
// sampled at the centres of the pixels.
const (
	DensityThermal = iota
	DensityWidth1
	DensityWidth2
	DensityPeak
	DensityRadius1
	DensityRadius2
	DensityX
	DensityY
	DensityAngle // rad
	DensityLight
	DensityLightX
	DensityLightY
	NumDensity
)

// DensityParams are the parameters in that order.
type DensityParams [NumDensity]float64

// DensityImage is a density image with its standard deviation per pixel, row by row from
// the top. A pixel that must not count has Sigma +Inf and any finite density.
type DensityImage struct {
	Width, Height  int
	Density, Sigma []float64
}

func (m *DensityImage) check() error {
	n := m.Width * m.Height
	if m.Width < 1 || m.Height < 1 || len(m.Density) != n || len(m.Sigma) != n {
		return fmt.Errorf("density image of %d×%d pixels has %d densities and %d errors", m.Width, m.Height, len(m.Density), len(m.Sigma))
	}
	return nil
}

// DensityWorkspace is the memory of DensityFit, kept from fit to fit and by one worker.
type DensityWorkspace struct {
	levels  []densityLevel
	problem densityProblem
	lm      lm.Workspace
	step    densityLimits
}

// DensityResult is the outcome of DensityFit.
type DensityResult struct {
	Params     DensityParams
	Chi2       float64 // Σ((od − density)/σ)², where the last step was predicted to bring it
	Reason     lm.Termination
	Iterations int // at full resolution
	// Normal is JᵀJ at full resolution, about a standard error from Params, and so within a
	// few percent of that at Params: its inverse is the covariance.
	Normal [NumDensity * NumDensity]float64
}

// Where the search ends: on a level on the way, from 2×2 up, by the decrease of χ² that is
// left, and at full resolution by relative tolerances.
const (
	densityEnough     = 0.02
	densityEnoughStep = 10 // from level to level
	densityXTol       = 1e-8
	densityFTol       = 1e-10
)

// DensityFit minimises χ² from start, first on binned images, then at full resolution, where
// the normal matrix of the first pass serves the next two. It ends when the next step would
// change the parameters by less than 1e-8 or χ² by less than 1e-10 of themselves, and takes
// that step unseen. Signs of widths and turns of the axes by a quarter do not matter in
// start and may differ in the result.
func DensityFit(ctx context.Context, img *DensityImage, start *DensityParams, ws *DensityWorkspace) (DensityResult, error) {
	if err := img.check(); err != nil {
		return DensityResult{}, err
	}
	top, err := ws.load(img, start)
	r := DensityResult{Params: *start}
	if err != nil {
		return r, err
	}
	for i := top; i >= 0; i-- {
		if err := ws.level(ctx, i, top, &r); err != nil {
			return r, fmt.Errorf("density image at %d×%d binning: %w", 1<<i, 1<<i, err)
		}
	}
	return r, nil
}

// DensityChi2 is χ² of the image at p. It overwrites ws.
func DensityChi2(img *DensityImage, p *DensityParams, ws *DensityWorkspace) (float64, error) {
	if err := img.check(); err != nil {
		return math.NaN(), err
	}
	ws.init()
	ws.levels[0].read(img, ws.problem.kernels)
	if err := ws.levels[0].check(); err != nil {
		return math.NaN(), err
	}
	ws.problem.level = &ws.levels[0]
	return ws.problem.Normal(p[:], nil, nil), nil
}

func (ws *DensityWorkspace) init() {
	if ws.levels == nil {
		ws.levels = make([]densityLevel, densityLevels)
		ws.problem.kernels = bestKernels()
	}
}

// load makes the levels and returns the coarsest: one in which the cloud is still wider than
// a pixel and the image than densityCoarsest pixels.
func (ws *DensityWorkspace) load(img *DensityImage, start *DensityParams) (int, error) {
	ws.init()
	k := ws.problem.kernels
	ws.levels[0].read(img, k)
	if err := ws.levels[0].check(); err != nil {
		return 0, err
	}
	ws.step.set(start)
	narrow := math.Inf(1)
	for _, k := range [...]int{DensityWidth1, DensityWidth2, DensityRadius1, DensityRadius2} {
		narrow = min(narrow, math.Abs(start[k]))
	}
	top := 0
	for top+1 < densityLevels && narrow >= float64(int(2)<<top) && min(img.Width, img.Height)>>(top+1) >= densityCoarsest {
		top++
		ws.levels[top].halve(&ws.levels[top-1], k)
	}
	return top, nil
}

const (
	densityLevels   = 6
	densityCoarsest = 48
)

// level brings r to the minimum of level i, or near it where more levels follow.
func (ws *DensityWorkspace) level(ctx context.Context, i, top int, r *DensityResult) error {
	p := &ws.problem
	p.level = &ws.levels[i]
	p.passes = 0
	s := lm.Settings{XTol: densityXTol, FTol: densityFTol, AcceptPredicted: true, MaxStep: ws.step.most[:], RelStep: ws.step.relative[:]}
	if i == top {
		s.Lambda = 0.01
	}
	if i > 0 {
		s.PredictTol = densityEnough * math.Pow(densityEnoughStep, float64(i-1))
	}
	res, err := lm.Minimize(ctx, p, r.Params[:], &s, &ws.lm)
	if err != nil {
		return err
	}
	copy(r.Params[:], res.X)
	copy(r.Normal[:], res.H)
	r.Chi2, r.Reason, r.Iterations = res.F, res.Reason, res.Iterations
	return nil
}

// densityLimits are the largest steps: half of a width or radius, and half a width of the
// centre. Undamped first steps are wild without them.
type densityLimits struct {
	most, relative [NumDensity]float64
}

func (l *densityLimits) set(p *DensityParams) {
	for _, k := range [...]int{DensityWidth1, DensityWidth2, DensityRadius1, DensityRadius2} {
		l.relative[k] = 0.5
	}
	half := 0.5 * min(math.Abs(p[DensityWidth1]), math.Abs(p[DensityWidth2]))
	l.most[DensityX], l.most[DensityY] = half, half
}
