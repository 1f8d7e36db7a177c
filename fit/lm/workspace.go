package lm

// Workspace is the memory of Minimize. The zero value is ready; it grows to the largest
// problem seen and must not be shared between goroutines.
type Workspace struct {
	normal normalForm
	loop   loop
}

// grow returns a slice of length n and value zero, reusing the memory of s.
func grow[T any](s []T, n int) []T {
	if cap(s) < n {
		return make([]T, n)
	}
	s = s[:n]
	clear(s)
	return s
}
