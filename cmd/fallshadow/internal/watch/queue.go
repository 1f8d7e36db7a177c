package watch

import (
	"slices"
	"sync"
)

// queue hands out the shots that arrived last first.
type queue struct {
	mu     sync.Mutex
	filled *sync.Cond
	jobs   []*job // by arrival
	closed bool
}

func newQueue() *queue {
	q := &queue{}
	q.filled = sync.NewCond(&q.mu)
	return q
}

func (q *queue) push(jobs ...*job) {
	q.mu.Lock()
	defer q.mu.Unlock()
	q.jobs = append(q.jobs, jobs...)
	slices.SortStableFunc(q.jobs, func(a, b *job) int { return a.arrival - b.arrival })
	q.filled.Broadcast()
}

// pop waits for a job; ok is false once the queue is closed.
func (q *queue) pop() (j *job, ok bool) {
	q.mu.Lock()
	defer q.mu.Unlock()
	for len(q.jobs) == 0 && !q.closed {
		q.filled.Wait()
	}
	if q.closed {
		return nil, false
	}
	last := len(q.jobs) - 1
	j = q.jobs[last]
	q.jobs = slices.Delete(q.jobs, last, last+1)
	return j, true
}

// waiting is how many jobs nobody has taken.
func (q *queue) waiting() int {
	q.mu.Lock()
	defer q.mu.Unlock()
	return len(q.jobs)
}

func (q *queue) close() {
	q.mu.Lock()
	defer q.mu.Unlock()
	q.closed = true
	q.filled.Broadcast()
}
