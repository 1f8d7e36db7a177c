package light

// The tiles of a picture. A block is 4x4 pixels, averaged, so that white noise counts
// little against fringes. A tile is 4x4 blocks and the smallest piece that a mask leaves
// out, so that sums over tiles of products of light frames are the same for every shot
// and mask. Beside its blocks a tile holds the sums of their 2x2 groups: in a sum of
// squares the means over 8x8 pixels then count four times as much a pixel as those over
// 4x4, which keeps the noise of the light frames from shrinking their coarse fringes
// while fine ones stay visible. In a large picture a full tile also holds the sum of all its
// blocks, which counts sixteen times: faint fringes as coarse as a cloud need it, and there are
// tiles enough for it to cost next to no noise. Up to three columns and rows at the right and lower edge
// are in no block.
const (
	blockSide  = 4
	tileBlocks = 4
	tilePixels = blockSide * tileBlocks
	// coarseTiles is how many tiles a frame of the basis a large picture has.
	coarseTiles = 25
)

// tiling lays blocks and tiles over a picture. start[t] is the place of the first value
// of tile t, its blocks first; start has one more entry than there are tiles.
type tiling struct {
	width, height int
	across, down  int  // tiles
	coarse        bool // full tiles hold the sum of all their blocks
	start         []int
	blocks        []int // of each tile
}

// newTiling lays tiles over a picture that is to be combined from k light frames.
func newTiling(width, height, k int) *tiling {
	bw, bh := width/blockSide, height/blockSide
	t := &tiling{width: width, height: height,
		across: (bw + tileBlocks - 1) / tileBlocks, down: (bh + tileBlocks - 1) / tileBlocks, start: []int{0}}
	t.coarse = t.across*t.down >= coarseTiles*k
	for i := range t.across * t.down {
		w, h := t.shape(i)
		t.blocks = append(t.blocks, w*h)
		t.start = append(t.start, t.start[i]+w*h+w/2*(h/2)+t.wholes(w, h))
	}
	return t
}

// shape is how many blocks a tile has across and down; tiles at the edge may have fewer.
func (t *tiling) shape(tile int) (w, h int) {
	x, y := tile%t.across*tileBlocks, tile/t.across*tileBlocks
	return min(tileBlocks, t.width/blockSide-x), min(tileBlocks, t.height/blockSide-y)
}

// wholes is how many sums over all of it a tile of w by h blocks holds, 0 or 1.
func (t *tiling) wholes(w, h int) int {
	if t.coarse && w == tileBlocks && h == tileBlocks {
		return 1
	}
	return 0
}

// fold says in which half of the checkerboard of tiles a tile lies.
func (t *tiling) fold(tile int) int { return (tile%t.across + tile/t.across) % 2 }

// values returns the block means of a picture and the sums of their groups and of all, tile by tile.
func (t *tiling) values(pix []float64) []float64 {
	out := make([]float64, t.start[len(t.blocks)])
	for tile := range t.blocks {
		w, h := t.shape(tile)
		v := out[t.start[tile]:t.start[tile+1]]
		groups := v[w*h:]
		corner := tile/t.across*tilePixels*t.width + tile%t.across*tilePixels
		for b := range w * h {
			x, y := b%w, b/w
			v[b] = blockMean(pix[corner+y*blockSide*t.width+x*blockSide:], t.width)
			if x/2 < w/2 && y/2 < h/2 {
				groups[y/2*(w/2)+x/2] += v[b]
			}
			if t.wholes(w, h) > 0 {
				v[len(v)-1] += v[b]
			}
		}
	}
	return out
}

// blockMean averages the block that starts at the first pixel.
func blockMean(pix []float64, width int) float64 {
	sum := 0.0
	for y := range blockSide {
		row := pix[y*width : y*width+blockSide]
		sum += (row[0] + row[1]) + (row[2] + row[3])
	}
	return sum / (blockSide * blockSide)
}

// products sums the products of the values of two pictures tile by tile.
func (t *tiling) products(a, b []float64) []float64 {
	out := make([]float64, len(t.blocks))
	for i := range out {
		u, v := a[t.start[i]:t.start[i+1]], b[t.start[i]:t.start[i+1]]
		v = v[:len(u)]
		sum := 0.0
		for j := range u {
			sum += u[j] * v[j]
		}
		out[i] = sum
	}
	return out
}

// sums adds up the blocks of a picture tile by tile.
func (t *tiling) sums(values []float64) []float64 {
	out := make([]float64, len(t.blocks))
	for i, n := range t.blocks {
		for _, v := range values[t.start[i] : t.start[i]+n] {
			out[i] += v
		}
	}
	return out
}

// close closes the tiles that hold a pixel i with shut(i).
func (t *tiling) close(open []bool, shut func(i int) bool) {
	for y := range min(t.height, t.down*tilePixels) {
		for x := range min(t.width, t.across*tilePixels) {
			if shut(y*t.width + x) {
				open[y/tilePixels*t.across+x/tilePixels] = false
			}
		}
	}
}

// folded adds up sums over tiles, the open ones only, in the two halves of the board.
func (t *tiling) folded(sums []float64, open []bool) (half [2]float64) {
	for i, v := range sums {
		if open[i] {
			half[t.fold(i)] += v
		}
	}
	return half
}
