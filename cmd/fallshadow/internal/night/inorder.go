package night

import "iter"

// inOrder runs do(0) to do(n-1) on at most so many goroutines and yields the results in
// that order; no more than workers results wait at a time. When the consumer stops, the
// calls that run are waited for.
func inOrder[T any](n, workers int, do func(int) T) iter.Seq2[int, T] {
	return func(yield func(int, T) bool) {
		queue := make(chan chan T, max(workers-1, 0))
		stop := make(chan struct{})
		go func() {
			defer close(queue)
			for i := range n {
				out := make(chan T, 1)
				select {
				case queue <- out:
					go func() { out <- do(i) }()
				case <-stop:
					return
				}
			}
		}()
		i := 0
		open := true
		for out := range queue {
			v := <-out
			if open && !yield(i, v) {
				open = false
				close(stop)
			}
			i++
		}
	}
}
