package fit

import "fallshadow/fit/lm"

// Workspace is the memory of one worker. It is not safe for concurrent use; results do not
// hang on what it was used for before.
type Workspace struct {
	lm    lm.Workspace
	buf   buffers
	h     [numParams * numParams]float64
	g     [numParams]float64
	kappa []float64
	resid []float64

	levels []*level
	moved  levelMemory // of a level in a moved laboratory
	within *Workspace  // of the window in a large picture
}

// inside returns the memory for a part of a picture, beside that of the picture.
func (w *Workspace) inside() *Workspace {
	if w.within == nil {
		w.within = NewWorkspace()
	}
	return w.within
}

// NewWorkspace returns an empty workspace.
func NewWorkspace() *Workspace { return new(Workspace) }

func (w *Workspace) size(n int) {
	if cap(w.kappa) < n {
		w.kappa, w.resid = make([]float64, n), make([]float64, n)
	}
	w.kappa, w.resid = w.kappa[:n], w.resid[:n]
}

// level returns the memory of a level, the full picture's first.
func (w *Workspace) level(i int) *level {
	for len(w.levels) <= i {
		w.levels = append(w.levels, new(level))
	}
	return w.levels[i]
}
