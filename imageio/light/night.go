package light

import (
	"context"
	"fmt"
	"iter"
	"math"

	"fallshadow/imageio"
)

// Night is what all shots of a night share, frozen before the first of them is exposed.
// It is not changed afterwards and may be used by many goroutines.
type Night struct {
	// Camera is the one given to Prepare, with gain and read noise filled in where they
	// were measured, and the region in use.
	Camera Camera
	// Transfer is the measurement of the gain, nil where the camera's was given.
	Transfer *Transfer
	// Darks is how many dark frames went into the master.
	Darks int
	// DarkNoise is the rms of a pixel of one dark frame, electrons: read noise and dark
	// current as measured, or the camera's read noise where there are not two darks.
	DarkNoise float64
	// DarkVariance is the variance of a pixel of the master dark, electrons².
	DarkVariance float64
	// Offset and OffsetSpread are mean and standard deviation over the night of the
	// darks' level, counts.
	Offset, OffsetSpread float64

	win     window
	pattern []float64 // master dark less its level, counts
	bad     []bool    // listed, hot or restless pixels
}

// mastered is the least number of darks whose mean stands for the dark of a shot that
// has one of its own.
const mastered = 3

// Prepare reads the frames of all shots of a night once, in natural order, and freezes
// what they share: the master dark (the mean over all usable darks of each pixel's
// excess over its frame's level, without the lowest and the highest), the pixels that
// are hot or restless in the dark, the read noise where the camera's is 0 (from
// differences of successive darks) and the gain where it is 0 (see PhotonTransfer).
// Memory: 60 bytes per pixel of the region, whatever the number of shots. The shots
// decide by majority, the earlier at a tie, which size of frame is the night's. Of copies,
// shots of one digest, the first counts: their difference has no noise. It
// fails when ctx is done, when the camera cannot be, and when gain or read noise are
// neither given nor can be measured.
func Prepare(ctx context.Context, camera Camera, raws iter.Seq[*imageio.Raw]) (*Night, error) {
	most, err := gather(ctx, camera, raws)
	if err != nil {
		return nil, err
	}
	return most.night(camera)
}

// gather reads the shots and returns the group of the most frequent size.
func gather(ctx context.Context, camera Camera, raws iter.Seq[*imageio.Raw]) (*group, error) {
	if err := camera.check(); err != nil {
		return nil, err
	}
	var groups []*group
	seen := map[[32]byte]bool{}
	for raw := range raws {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		if raw != nil && !seen[raw.Digest] {
			seen[raw.Digest] = raw.Digest != [32]byte{}
			groupOf(&groups, camera, raw).add(raw)
		}
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	var most *group
	for _, g := range groups {
		if most == nil || g.shots > most.shots {
			most = g
		}
	}
	if most == nil {
		return nil, fmt.Errorf("no shot of the night could be read: check the folder and the layout")
	}
	return most, most.refused
}

// group gathers the shots whose frames are of one size.
type group struct {
	size     [2]int
	shots    int
	win      window
	refused  error // the window does not fit this size
	raw      bool  // there were camera frames, not only density images
	darks    *darkSums
	transfer *transferSums
}

// groupOf finds or opens the group of a shot. A fifth size joins nothing.
func groupOf(groups *[]*group, camera Camera, raw *imageio.Raw) *group {
	size := sizeOf(raw)
	for _, g := range *groups {
		if g.size == size {
			return g
		}
	}
	if len(*groups) >= 4 {
		return &group{size: size}
	}
	g := &group{size: size}
	g.win, g.refused = camera.window(size[0], size[1])
	if g.refused == nil {
		g.darks = newDarkSums(g.win, camera.FullScale)
		if camera.ElectronsPerCount == 0 {
			g.transfer = newTransferSums(g.win, camera.FullScale)
		}
	}
	*groups = append(*groups, g)
	return g
}

func sizeOf(raw *imageio.Raw) [2]int {
	for _, f := range raw.Frames {
		if f != nil {
			return [2]int{f.Width, f.Height}
		}
	}
	return [2]int{}
}

func (g *group) add(raw *imageio.Raw) {
	g.shots++
	if g.darks == nil {
		return
	}
	g.raw = g.raw || raw.Frames[imageio.Density] == nil
	for _, role := range []imageio.Role{imageio.Dark, imageio.DarkOfLight} {
		if f := raw.Frames[role]; fits(f, g.win) {
			g.darks.add(f)
		}
	}
	if g.transfer != nil {
		g.transfer.add(raw)
	}
}

func fits(f *imageio.Frame, w window) bool {
	return f != nil && f.Width == w.frame.X && f.Height == w.frame.Y && len(f.Pix) == f.Width*f.Height
}

// night freezes the group.
func (g *group) night(camera Camera) (*Night, error) {
	n := &Night{Camera: camera, win: g.win}
	n.Camera.Region = g.win.rect()
	if err := n.measure(g); err != nil {
		return nil, err
	}
	n.Darks = g.darks.n
	n.Offset, n.OffsetSpread = g.darks.level()
	n.pattern, n.bad = g.darks.master()
	for _, p := range camera.BadPixels {
		x, y := p[0]-g.win.corner.X, p[1]-g.win.corner.Y
		if x >= 0 && y >= 0 && x < g.win.width && y < g.win.height {
			n.bad[y*g.win.width+x] = true
		}
	}
	n.DarkVariance = n.DarkNoise * n.DarkNoise / meanTrimmed(n.Darks)
	return n, nil
}

// measure fills in gain and read noise where the camera does not say them.
func (n *Night) measure(g *group) error {
	if !g.raw {
		return nil
	}
	if n.Camera.ElectronsPerCount == 0 {
		t, err := g.transfer.fit()
		if err != nil {
			return fmt.Errorf("electrons per count is neither given nor can it be measured: %w; state it (electrons_per_count), and the read noise", err)
		}
		n.Transfer, n.Camera.ElectronsPerCount = t, t.ElectronsPerCount
	}
	rms, measured := g.darks.noise()
	n.DarkNoise = rms * n.Camera.ElectronsPerCount
	switch {
	case n.Camera.ReadNoise == 0 && !measured:
		return fmt.Errorf("the read noise is neither given nor can it be measured from two dark frames: state it, or take darks")
	case n.Camera.ReadNoise == 0:
		n.Camera.ReadNoise = n.DarkNoise
	case !measured:
		n.DarkNoise = n.Camera.ReadNoise
	}
	return nil
}

// readVar is the variance of one read of one saved pixel, electrons².
func (n *Night) readVar() float64 { return n.Camera.ReadNoise * n.Camera.ReadNoise }

// meanTrimmed is by how much the mean of n normal values without the lowest and the
// highest has less variance than one of them, within 2 percent from three on.
func meanTrimmed(n int) float64 {
	if n < mastered {
		return math.Max(float64(n), 1)
	}
	return float64(n) - 0.5 - 0.8/float64(n)
}

// BadPixels is how many pixels of the region are never used: listed, hot or restless.
func (n *Night) BadPixels() int {
	count := 0
	for _, b := range n.bad {
		if b {
			count++
		}
	}
	return count
}
