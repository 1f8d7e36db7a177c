package imageio

import "fmt"

// Whole reports whether the file at path is finished: all bytes that its content declares
// are there and its format is one that Read understands. Pixels are not decoded. An error
// that wraps fault.Truncated means that the file may still be growing; any other one that
// waiting will not help.
func Whole(path string) error {
	err := withContents(path, func(*contents) error { return nil })
	if err != nil {
		return fmt.Errorf("%s: %w", path, err)
	}
	return nil
}
