package night

import "sync"

// onceError keeps the first error of many goroutines.
type onceError struct {
	mu  sync.Mutex
	err error
}

func (o *onceError) note(err error) {
	o.mu.Lock()
	defer o.mu.Unlock()
	if o.err == nil {
		o.err = err
	}
}

func (o *onceError) get() error {
	o.mu.Lock()
	defer o.mu.Unlock()
	return o.err
}
