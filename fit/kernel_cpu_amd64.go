package fit

func cpuid(leaf, sub uint32) (a, b, c, d uint32)

// xgetbv is the low half of the register that says which vector state the system keeps.
func xgetbv() uint32

// vectorWidth is how many float64 a kernel may take at a time: 8 with AVX-512F, 4 with AVX2
// and FMA, else 1, as processor and operating system allow. Bits after the Intel 64
// Architectures Software Developer's Manual, volume 2, CPUID.
func vectorWidth() int {
	const (
		fma     = 1 << 12 // leaf 1, ecx
		osxsave = 1 << 27
		avx     = 1 << 28
		avx2    = 1 << 5 // leaf 7, ebx
		avx512f = 1 << 16
		ymm     = 0x06 // xcr0
		zmm     = 0xe6
	)
	if most, _, _, _ := cpuid(0, 0); most < 7 {
		return 1
	}
	_, _, c, _ := cpuid(1, 0)
	if c&(fma|osxsave|avx) != fma|osxsave|avx {
		return 1
	}
	_, b, _, _ := cpuid(7, 0)
	kept := xgetbv()
	switch {
	case b&avx2 == 0 || kept&ymm != ymm:
		return 1
	case b&avx512f == 0 || kept&zmm != zmm:
		return 4
	}
	return 8
}
