package light

// The tiles of a picture. A block is 4x4 pixels, averaged, so that white noise counts
// little against fringes; a tile is 4x4 blocks and the smallest piece that a mask leaves
// out. Sums over tiles of products of light frames are therefore the same for every
// shot and mask. Up to three columns and rows at the right and lower edge are in no block.
const (
	blockSide  = 4
	tileBlocks = 4
	tilePixels = blockSide * tileBlocks
)

// tiling lays blocks and tiles over a picture. start[t] is the first block of tile t in
// the order tile by tile; start has one more entry than there are tiles.
type tiling struct {
	width, height int
	across, down  int // tiles
	start         []int
}

func newTiling(width, height int) *tiling {
	bw, bh := width/blockSide, height/blockSide
	t := &tiling{width: width, height: height,
		across: (bw + tileBlocks - 1) / tileBlocks, down: (bh + tileBlocks - 1) / tileBlocks, start: []int{0}}
	for i := range t.across * t.down {
		x, y := i%t.across*tileBlocks, i/t.across*tileBlocks
		n := min(tileBlocks, bw-x) * min(tileBlocks, bh-y)
		t.start = append(t.start, t.start[i]+n)
	}
	return t
}

func (t *tiling) tiles() int  { return len(t.start) - 1 }
func (t *tiling) blocks() int { return t.start[t.tiles()] }

// fold says in which half of the checkerboard of tiles a tile lies.
func (t *tiling) fold(tile int) int { return (tile%t.across + tile/t.across) % 2 }

// average writes block means of at(i), for pixel i, tile by tile.
func (t *tiling) average(at func(i int) float64) []float64 {
	out := make([]float64, t.blocks())
	bw, bh := t.width/blockSide, t.height/blockSide
	for by := range bh {
		for bx := range bw {
			sum := 0.0
			for y := range blockSide {
				row := (by*blockSide+y)*t.width + bx*blockSide
				for x := range blockSide {
					sum += at(row + x)
				}
			}
			out[t.index(bx, by)] = sum / (blockSide * blockSide)
		}
	}
	return out
}

// index is the place of a block in the order tile by tile.
func (t *tiling) index(bx, by int) int {
	tx, ty := bx/tileBlocks, by/tileBlocks
	wide := min(tileBlocks, t.width/blockSide-tx*tileBlocks)
	return t.start[ty*t.across+tx] + (by-ty*tileBlocks)*wide + bx - tx*tileBlocks
}

// products sums the products of two block pictures tile by tile.
func (t *tiling) products(a, b []float64) []float64 {
	out := make([]float64, t.tiles())
	for i := range out {
		sum := 0.0
		for j := t.start[i]; j < t.start[i+1]; j++ {
			sum += a[j] * b[j]
		}
		out[i] = sum
	}
	return out
}

// open tells for each tile whether no pixel of it is masked; a nil mask opens all.
func (t *tiling) open(mask []bool) []bool {
	out := make([]bool, t.tiles())
	for i := range out {
		out[i] = true
	}
	if mask != nil {
		t.close(out, func(i int) bool { return mask[i] })
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
