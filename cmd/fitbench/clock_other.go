//go:build !unix

package main

import "time"

var programStart = time.Now()

// processorTime falls back to the wall where the system has no call for it here.
func processorTime() time.Duration { return time.Since(programStart) }
