package night

import (
	"image"
	"os"
	"runtime/debug"
)

// thrifty is from how many pixels on the heap is mostly arrays of pixels: to look for garbage
// often costs little time there and saves a third of the memory.
const thrifty = 1 << 21

// spareMemory lets the whole process spare memory where pictures are large, unless the
// environment says how.
func spareMemory(picture image.Rectangle) {
	if picture.Dx()*picture.Dy() >= thrifty && os.Getenv("GOGC") == "" {
		debug.SetGCPercent(25)
	}
}
