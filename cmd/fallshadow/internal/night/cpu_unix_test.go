//go:build unix

package night

import (
	"syscall"
	"testing"
)

func init() {
	cpuSeconds = func(b *testing.B) float64 {
		var u syscall.Rusage
		if err := syscall.Getrusage(syscall.RUSAGE_SELF, &u); err != nil {
			b.Fatal(err)
		}
		return float64(u.Utime.Nano()+u.Stime.Nano()) * 1e-9
	}
}
