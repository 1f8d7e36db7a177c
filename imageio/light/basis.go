package light

import (
	"context"
	"fmt"
	"math"

	"fallshadow/imageio"
)

// blocksPerFrame is how many open blocks of 4x4 pixels a frame of the basis needs, so
// that one half of the tiles still holds several for each coefficient.
const blocksPerFrame = 8

// Apply returns a copy of an exposure of the given shot (its place in the natural order
// of NewReferences) with the reference that its cloud allows. The best combination
// Σ c_j R_j of the k nearest light frames has the least sum of squares
//
//	Σ (A/t - Σ c_j R_j)²
//
// over means of 4x4 and 8x8 pixels (those count fourfold), in large pictures of 16x16, too
// (sixteenfold), in tiles of 16x16 pixels that the mask leaves open, t the transmission,
// with a small ridge about equal shares. It is taken where, with coefficients from one half
// of a checkerboard of tiles and judged on the other, both ways, it leaves less than the
// scaled light frame of the shot under the same trial; otherwise that frame is taken,
// scaled over the open tiles. Reference says which: "basis" or "own".
//
// The shot noise of the combination has the variance Σ c_j² R_j, which is LightShot =
// Σ c_j² m_j / Σ c_j m_j per electron of it, m the mean of a frame: (own scale) for one
// frame, about 1/k for k equal ones. LightRead is Σ c_j² times that of a frame. With
// darks of their own the frames' dark noise goes with their read noise, and Dark is 0.
//
// There are at most as many frames as eighths of the open blocks. A cloud without a mask,
// an exposure or a shot without light, or no open tile leave the exposure as it is. It fails
// when ctx is done, or when mask or transmission are not of the exposure's size.
func (r *References) Apply(ctx context.Context, shot int, e *imageio.Exposure, cloud Cloud) (*imageio.Exposure, error) {
	for _, n := range []int{len(cloud.Mask), len(cloud.Transmission)} {
		if n != 0 && n != len(e.Light) {
			return nil, fmt.Errorf("the mask or transmission of shot %d has %d pixels, its light %d", shot, n, len(e.Light))
		}
	}
	if cloud.Mask == nil || e.Light == nil {
		return e, nil
	}
	frames, err := r.nearest(ctx, shot)
	if err != nil {
		return nil, err
	}
	if len(frames) == 0 || frames[0].shot != shot {
		return e, nil
	}
	open, blocks := r.openTiles(cloud)
	frames = frames[:max(1, min(len(frames), blocks/blocksPerFrame))]
	all := r.equations(frames, bare(e, cloud.Transmission), open)
	own := all.first()
	if c, ok := all.solve(all.all()); ok && len(frames) > 1 && all.leftOut() < own.leftOut() {
		return r.combined(frames, c, e), nil
	}
	c, ok := own.solve(own.all())
	if !ok {
		return e, nil
	}
	return r.combined(frames[:1], c, e), nil
}

// combined returns the exposure with the combination of frames as its light; c is in
// units of the frames' means.
func (r *References) combined(frames []*lightFrame, c []float64, e *imageio.Exposure) *imageio.Exposure {
	c = append([]float64(nil), c...)
	for j, f := range frames {
		c[j] /= f.mean
	}
	out := *e
	out.Reference = "own"
	out.Light = make([]float64, len(e.Light))
	addScaled(out.Light, frames, c)
	var shot, level, reads, darks float64
	for j, f := range frames {
		shot += c[j] * c[j] * f.mean
		level += c[j] * f.mean
		reads += c[j] * c[j] * r.readVar()
		darks += c[j] * c[j] * f.darkVar
	}
	out.Noise.LightShot = shot / level
	out.Noise.LightRead = reads
	if len(frames) == 1 {
		return &out
	}
	out.Reference = "basis"
	if darks > 0 {
		out.Noise.Read = math.Sqrt(e.Noise.Read*e.Noise.Read + e.Noise.Dark)
		out.Noise.LightRead += darks
		out.Noise.Dark, out.Noise.DarkIsShared = 0, false
	}
	return &out
}

// addScaled adds Σ c_j R_j to sum, in strips that stay in the cache, four frames at a
// time, the order of the terms the same for every pixel.
func addScaled(sum []float64, frames []*lightFrame, c []float64) {
	const strip = 2048
	for from := 0; from < len(sum); from += strip {
		to := min(from+strip, len(sum))
		s := sum[from:to]
		j := 0
		for ; j+4 <= len(frames); j += 4 {
			p, q := frames[j].pix[from:to], frames[j+1].pix[from:to]
			u, v := frames[j+2].pix[from:to], frames[j+3].pix[from:to]
			p, q, u, v = p[:len(s)], q[:len(s)], u[:len(s)], v[:len(s)]
			cp, cq, cu, cv := c[j], c[j+1], c[j+2], c[j+3]
			for i := range s {
				s[i] += cp*float64(p[i]) + cq*float64(q[i]) + (cu*float64(u[i]) + cv*float64(v[i]))
			}
		}
		for ; j < len(frames); j++ {
			p := frames[j].pix[from:to][:len(s)]
			for i := range s {
				s[i] += c[j] * float64(p[i])
			}
		}
	}
}
