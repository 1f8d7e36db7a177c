// Package fault holds the three reasons for which a reader of camera files gives up, so
// that a caller can tell them apart with errors.Is whatever the format.
package fault

//lint:file-ignore ST1012 fault.Broken says already that it is an error

import "errors"

var (
	// Truncated: the file ends before the bytes that it declares. It may still be growing.
	Truncated = errors.New("truncated")
	// Broken: the bytes contradict the format or each other. No later look will help.
	Broken = errors.New("broken")
	// Unsupported: the file may be sound, but this program does not read it.
	Unsupported = errors.New("not supported")
)
