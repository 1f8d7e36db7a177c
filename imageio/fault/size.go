package fault

import "fmt"

// MaxPixels is the number of pixels above which a file is refused: 1 GiB once decoded to
// float32. MaxInflated is the number of bytes above which compressed contents are.
const (
	MaxPixels   = 1 << 28
	MaxInflated = 1 << 29
)

// Size checks planes of width·height pixels against MaxPixels before room is made for
// them. It fails with Broken on a size that is not positive and with Unsupported on one
// too large, the product beyond 64 bits included.
func Size(width, height, planes int64) error {
	if width <= 0 || height <= 0 || planes <= 0 {
		return fmt.Errorf("%w: %d planes of %d x %d pixels", Broken, planes, width, height)
	}
	if width > MaxPixels/height || width*height > MaxPixels/planes {
		return fmt.Errorf("%w: %d x %d x %d pixels, the limit is %d", Unsupported, width, height, planes, MaxPixels)
	}
	return nil
}

// Packed checks that size bytes of a compressed file can hold the bytes that they are
// said to inflate to: LZW and DEFLATE reach at most about 1:1100, so that a small file
// cannot ask for much memory.
func Packed(inflated, size int64) error {
	const ratio, slack = 1200, 1 << 16
	if inflated-slack > size*ratio {
		return fmt.Errorf("%w: %d bytes cannot hold the %d bytes of pixels that they declare", Truncated, size, inflated)
	}
	return nil
}
