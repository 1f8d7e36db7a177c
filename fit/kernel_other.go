//go:build !amd64

package fit

// allKernels are the kernels that this processor has, the best one last.
func allKernels() []*kernelSet { return []*kernelSet{&scalarKernels} }
