package main

import (
	"fmt"
	"time"
)

// clock is time since some moment.
type clock func() time.Duration

// newClock is the clock of that name: wall, which is also the empty name, or cpu.
func newClock(name string) (clock, error) {
	switch name {
	case "", "wall":
		start := time.Now()
		return func() time.Duration { return time.Since(start) }, nil
	case "cpu":
		return processorTime, nil
	}
	return nil, fmt.Errorf("PEER_CLOCK is %q, want wall or cpu", name)
}
