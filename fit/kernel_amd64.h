// Kernels along a row, in 4 or 8 lanes: the file that includes this one says which by
// naming the registers V0 to V15, the lanes HALVES must be run over to make a group of
// 8, and the functions. The arithmetic is that of kernel_scalar.go, operation by operation.
//
// Throughout, CX is the byte offset of the group from the start of the row, DX its end,
// and AX and BX count the halves: 4 lanes are run along the whole row before the next 4.

// The constants lie at R15, which START sets.
#define WIDE(i) ((i)*64)(R15)
#define IOTA WIDE(const_wideIota)
#define EIGHT WIDE(const_wideEight)
#define ONE WIDE(const_wideOne)
#define CONSTANTS MOVQ ·kernelWide(SB), R15

// X leaves the coordinate in x, given i, x0 and dx, and steps i on.
#define X(i, x0, dx, x) \
	VMOVAPD i, x \
	VFMADD213PD x0, dx, x \
	VADDPD EIGHT, i, i

#define NEXT(loop) \
	ADDQ $64, CX \
	CMPQ CX, DX \
	JLT  loop

// START sets up the loop over halves and END closes it.
#define START(n) \
	CONSTANTS \
	MOVQ n, DX \
	SHLQ $3, DX \
	XORQ BX, BX

#define END(half) \
	ADDQ $32, BX \
	CMPQ BX, $(HALVES*32) \
	JLT  half \
	VZEROUPPER \
	RET

// func far(g, h, r, d []float64, f *kernelFar, l *kernelLine)
TEXT FAR, NOSPLIT, $0-112
	MOVQ g_base+0(FP), DI
	MOVQ h_base+24(FP), SI
	MOVQ r_base+48(FP), R8
	MOVQ d_base+72(FP), R9
	MOVQ f+96(FP), R10
	MOVQ l+104(FP), R11
	START(g_len+8(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelFar_q(R10), V2
	VBROADCASTSD kernelLine_amp(R11), V4
	VBROADCASTSD kernelLine_db(R11), V5
	VBROADCASTSD kernelLine_b0(R11), V6

farHalf:
	VMOVUPD kernelFar_z(R10)(BX*1), V0
	VMOVUPD kernelFar_r(R10)(BX*1), V1
	VMOVUPD (R12)(BX*1), V3
	MOVQ    BX, CX

farLoop:
	VMOVUPD WIDE(const_wideFarG+6), V7
	VMOVUPD WIDE(const_wideFarH+6), V8
	VFMADD213PD WIDE(const_wideFarG+5), V0, V7
	VFMADD213PD WIDE(const_wideFarH+5), V0, V8
	VFMADD213PD WIDE(const_wideFarG+4), V0, V7
	VFMADD213PD WIDE(const_wideFarH+4), V0, V8
	VFMADD213PD WIDE(const_wideFarG+3), V0, V7
	VFMADD213PD WIDE(const_wideFarH+3), V0, V8
	VFMADD213PD WIDE(const_wideFarG+2), V0, V7
	VFMADD213PD WIDE(const_wideFarH+2), V0, V8
	VFMADD213PD WIDE(const_wideFarG+1), V0, V7
	VFMADD213PD WIDE(const_wideFarH+1), V0, V8
	VFMADD213PD WIDE(const_wideFarG+0), V0, V7
	VFMADD213PD WIDE(const_wideFarH+0), V0, V8
	VMULPD  V0, V7, V7
	VMULPD  V0, V8, V8
	VMOVUPD V7, (DI)(CX*1)
	VMOVUPD V8, (SI)(CX*1)
	X(V3, V6, V5, V9)
	VFMADD231PD V7, V4, V9
	VSUBPD  (R9)(CX*1), V9, V9
	VMOVUPD V9, (R8)(CX*1)
	VMULPD  V1, V0, V0
	VMULPD  V2, V1, V1
	NEXT(farLoop)
	END(farHalf)

// func near(g, h, r, d []float64, l *kernelLine)
TEXT NEAR, NOSPLIT, $0-104
	MOVQ g_base+0(FP), DI
	MOVQ h_base+24(FP), SI
	MOVQ r_base+48(FP), R8
	MOVQ d_base+72(FP), R9
	MOVQ l+96(FP), R11
	START(g_len+8(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelLine_x0(R11), V8
	VBROADCASTSD kernelLine_dx(R11), V9
	VBROADCASTSD kernelLine_t2(R11), V10
	VBROADCASTSD kernelLine_t1(R11), V11
	VBROADCASTSD kernelLine_t0(R11), V12
	VBROADCASTSD kernelLine_b0(R11), V13
	VBROADCASTSD kernelLine_db(R11), V14

nearHalf:
	VMOVUPD (R12)(BX*1), V15
	MOVQ    BX, CX

nearLoop:
	// V1 = t
	VMOVAPD V15, V0
	VFMADD213PD V8, V9, V0
	VMOVAPD V10, V1
	VFMADD213PD V11, V0, V1
	VFMADD213PD V12, V0, V1
	VMAXPD  WIDE(const_wideLeast), V1, V1
	VMINPD  WIDE(const_wideMost), V1, V1

	// V6 = ln t, from the exponent V3 and s = V5
	VPADDQ  WIDE(const_wideSplit), V1, V2
	VPSRLQ  $52, V2, V2
	POR     WIDE(const_wideExponent), V2, V3
	VSUBPD  WIDE(const_wideBias), V3, V3
	VPSLLQ  $52, V2, V2
	VPSUBQ  V2, V1, V4
	VPADDQ  ONE, V4, V4
	VSUBPD  ONE, V4, V5
	VADDPD  ONE, V4, V4
	VDIVPD  V4, V5, V5
	VMULPD  V5, V5, V4
	VMOVUPD WIDE(const_wideLog+4), V6
	VFMADD213PD WIDE(const_wideLog+3), V4, V6
	VFMADD213PD WIDE(const_wideLog+2), V4, V6
	VFMADD213PD WIDE(const_wideLog+1), V4, V6
	VFMADD213PD WIDE(const_wideLog+0), V4, V6
	VFMADD213PD WIDE(const_wideTwo), V4, V6
	VMULPD  V5, V6, V6
	VFMADD231PD WIDE(const_wideLn2), V3, V6

	// V3 = g, V4 = h, from y = V2
	VMULPD  V1, V1, V2
	VMOVUPD WIDE(const_wideNearG+5), V3
	VMOVUPD WIDE(const_wideNearH+5), V4
	VFMADD213PD WIDE(const_wideNearG+4), V2, V3
	VFMADD213PD WIDE(const_wideNearH+4), V2, V4
	VFMADD213PD WIDE(const_wideNearG+3), V2, V3
	VFMADD213PD WIDE(const_wideNearH+3), V2, V4
	VFMADD213PD WIDE(const_wideNearG+2), V2, V3
	VFMADD213PD WIDE(const_wideNearH+2), V2, V4
	VFMADD213PD WIDE(const_wideNearG+1), V2, V3
	VFMADD213PD WIDE(const_wideNearH+1), V2, V4
	VFMADD213PD WIDE(const_wideNearG+0), V2, V3
	VFMADD213PD WIDE(const_wideNearH+0), V2, V4
	VFMADD213PD WIDE(const_wideMinusQuarter), V1, V3
	VSUBPD  ONE, V6, V5
	VFMADD213PD V5, V1, V3
	VFMADD213PD WIDE(const_wideZeta2), V1, V3
	VMOVUPD WIDE(const_wideHalf), V7
	VMOVAPD V1, V5
	VFMSUB213PD V6, V7, V5
	VFMADD213PD V5, V2, V4
	VMOVUPD V3, (DI)(CX*1)
	VMOVUPD V4, (SI)(CX*1)

	X(V15, V13, V14, V7)
	VBROADCASTSD kernelLine_amp(R11), V5
	VFMADD231PD V3, V5, V7
	VSUBPD  (R9)(CX*1), V7, V7
	VMOVUPD V7, (R8)(CX*1)
	NEXT(nearLoop)
	END(nearHalf)

// func edge(k, r []float64, l *kernelLine)
TEXT EDGE, NOSPLIT, $0-56
	MOVQ k_base+0(FP), DI
	MOVQ r_base+24(FP), R8
	MOVQ l+48(FP), R11
	START(k_len+8(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelLine_x0(R11), V8
	VBROADCASTSD kernelLine_dx(R11), V9
	VBROADCASTSD kernelLine_q2(R11), V10
	VBROADCASTSD kernelLine_q1(R11), V11
	VBROADCASTSD kernelLine_q0(R11), V12
	VBROADCASTSD kernelLine_peak(R11), V13
	VMOVUPD ONE, V14
	VXORPD  V7, V7, V7

edgeHalf:
	VMOVUPD (R12)(BX*1), V15
	MOVQ    BX, CX

edgeLoop:
	X(V15, V8, V9, V0)
	VMOVAPD V10, V1
	VFMADD213PD V11, V0, V1
	VFMADD213PD V12, V0, V1
	VSUBPD  V1, V14, V1
	VMAXPD  V7, V1, V1
	VSQRTPD V1, V2
	VMOVUPD V2, (DI)(CX*1)
	VMULPD  V2, V1, V1
	VMOVUPD (R8)(CX*1), V3
	VFMADD231PD V1, V13, V3
	VMOVUPD V3, (R8)(CX*1)
	NEXT(edgeLoop)
	END(edgeHalf)

// func slope(s *kernelSums, w, r, g, h []float64, l *kernelLine)
TEXT SLOPE, NOSPLIT, $0-112
	MOVQ s+0(FP), R10
	MOVQ w_base+8(FP), DI
	MOVQ r_base+32(FP), R8
	MOVQ g_base+56(FP), R9
	MOVQ h_base+80(FP), SI
	MOVQ l+104(FP), R11
	START(w_len+16(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelLine_x0(R11), V12
	VBROADCASTSD kernelLine_dx(R11), V13

slopeHalf:
	VMOVUPD (const_sumRR*64)(R10)(BX*1), V0
	VMOVUPD (const_sumR0*64)(R10)(BX*1), V1
	VMOVUPD (const_sumR1*64)(R10)(BX*1), V2
	VMOVUPD (const_sumRG*64)(R10)(BX*1), V3
	VMOVUPD (const_sumRH0*64)(R10)(BX*1), V4
	VMOVUPD (const_sumRH1*64)(R10)(BX*1), V5
	VMOVUPD (const_sumRH2*64)(R10)(BX*1), V6
	VMOVUPD (R12)(BX*1), V15
	MOVQ    BX, CX

slopeLoop:
	X(V15, V12, V13, V7)
	VMOVUPD (R8)(CX*1), V8
	VMULPD  (DI)(CX*1), V8, V9
	VFMADD231PD V8, V9, V0
	VADDPD  V9, V1, V1
	VFMADD231PD V7, V9, V2
	VFMADD231PD (R9)(CX*1), V9, V3
	VMULPD  (SI)(CX*1), V9, V9
	VADDPD  V9, V4, V4
	VMULPD  V7, V9, V9
	VADDPD  V9, V5, V5
	VFMADD231PD V7, V9, V6
	NEXT(slopeLoop)

	VMOVUPD V0, (const_sumRR*64)(R10)(BX*1)
	VMOVUPD V1, (const_sumR0*64)(R10)(BX*1)
	VMOVUPD V2, (const_sumR1*64)(R10)(BX*1)
	VMOVUPD V3, (const_sumRG*64)(R10)(BX*1)
	VMOVUPD V4, (const_sumRH0*64)(R10)(BX*1)
	VMOVUPD V5, (const_sumRH1*64)(R10)(BX*1)
	VMOVUPD V6, (const_sumRH2*64)(R10)(BX*1)
	END(slopeHalf)

// func cross(s *kernelSums, w, g, h []float64, l *kernelLine)
// adds the sums from sumGG to sumGH2.
TEXT CROSS, NOSPLIT, $0-88
	MOVQ s+0(FP), R10
	MOVQ w_base+8(FP), DI
	MOVQ g_base+32(FP), R9
	MOVQ h_base+56(FP), SI
	MOVQ l+80(FP), R11
	START(w_len+16(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelLine_x0(R11), V12
	VBROADCASTSD kernelLine_dx(R11), V13

crossHalf:
	VMOVUPD (const_sumGG*64)(R10)(BX*1), V0
	VMOVUPD (const_sumG0*64)(R10)(BX*1), V1
	VMOVUPD (const_sumG1*64)(R10)(BX*1), V2
	VMOVUPD (const_sumGH0*64)(R10)(BX*1), V3
	VMOVUPD (const_sumGH1*64)(R10)(BX*1), V4
	VMOVUPD (const_sumGH2*64)(R10)(BX*1), V5
	VMOVUPD (R12)(BX*1), V15
	MOVQ    BX, CX

crossLoop:
	X(V15, V12, V13, V7)
	VMOVUPD (R9)(CX*1), V8
	VMULPD  (DI)(CX*1), V8, V9
	VFMADD231PD V8, V9, V0
	VADDPD  V9, V1, V1
	VFMADD231PD V7, V9, V2
	VMULPD  (SI)(CX*1), V9, V9
	VADDPD  V9, V3, V3
	VMULPD  V7, V9, V9
	VADDPD  V9, V4, V4
	VFMADD231PD V7, V9, V5
	NEXT(crossLoop)

	VMOVUPD V0, (const_sumGG*64)(R10)(BX*1)
	VMOVUPD V1, (const_sumG0*64)(R10)(BX*1)
	VMOVUPD V2, (const_sumG1*64)(R10)(BX*1)
	VMOVUPD V3, (const_sumGH0*64)(R10)(BX*1)
	VMOVUPD V4, (const_sumGH1*64)(R10)(BX*1)
	VMOVUPD V5, (const_sumGH2*64)(R10)(BX*1)
	END(crossHalf)

// func powers(s *[numPowers]lanes, w, v []float64, l *kernelLine)
// adds w·v times 1, X, X², X³ and w·v² times 1, X, X², X³, X⁴ to nine sums.
TEXT POWERS, NOSPLIT, $0-64
	MOVQ s+0(FP), R10
	MOVQ w_base+8(FP), DI
	MOVQ v_base+32(FP), SI
	MOVQ l+56(FP), R11
	START(w_len+16(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelLine_x0(R11), V12
	VBROADCASTSD kernelLine_dx(R11), V13

powersHalf:
	VMOVUPD (0*64)(R10)(BX*1), V0
	VMOVUPD (1*64)(R10)(BX*1), V1
	VMOVUPD (2*64)(R10)(BX*1), V2
	VMOVUPD (3*64)(R10)(BX*1), V3
	VMOVUPD (4*64)(R10)(BX*1), V4
	VMOVUPD (5*64)(R10)(BX*1), V5
	VMOVUPD (6*64)(R10)(BX*1), V6
	VMOVUPD (7*64)(R10)(BX*1), V7
	VMOVUPD (8*64)(R10)(BX*1), V8
	VMOVUPD (R12)(BX*1), V15
	MOVQ    BX, CX

powersLoop:
	X(V15, V12, V13, V9)
	VMOVUPD (SI)(CX*1), V10
	VMULPD  (DI)(CX*1), V10, V10
	VMULPD  V9, V9, V11
	VMULPD  V9, V10, V14
	VADDPD  V10, V0, V0
	VADDPD  V14, V1, V1
	VFMADD231PD V11, V10, V2
	VFMADD231PD V11, V14, V3
	VMULPD  (SI)(CX*1), V10, V10
	VMULPD  V9, V10, V14
	VADDPD  V10, V4, V4
	VADDPD  V14, V5, V5
	VFMADD231PD V11, V10, V6
	VFMADD231PD V11, V14, V7
	VMULPD  V11, V10, V10
	VFMADD231PD V11, V10, V8
	NEXT(powersLoop)

	VMOVUPD V0, (0*64)(R10)(BX*1)
	VMOVUPD V1, (1*64)(R10)(BX*1)
	VMOVUPD V2, (2*64)(R10)(BX*1)
	VMOVUPD V3, (3*64)(R10)(BX*1)
	VMOVUPD V4, (4*64)(R10)(BX*1)
	VMOVUPD V5, (5*64)(R10)(BX*1)
	VMOVUPD V6, (6*64)(R10)(BX*1)
	VMOVUPD V7, (7*64)(R10)(BX*1)
	VMOVUPD V8, (8*64)(R10)(BX*1)
	END(powersHalf)

// func edgeSlope(s *kernelSums, w, r, k []float64, l *kernelLine)
TEXT EDGESLOPE, NOSPLIT, $0-88
	MOVQ s+0(FP), R10
	MOVQ w_base+8(FP), DI
	MOVQ r_base+32(FP), R8
	MOVQ k_base+56(FP), SI
	MOVQ l+80(FP), R11
	START(w_len+16(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelLine_x0(R11), V12
	VBROADCASTSD kernelLine_dx(R11), V13

edgeSlopeHalf:
	VMOVUPD (const_sumRC*64)(R10)(BX*1), V0
	VMOVUPD (const_sumRK0*64)(R10)(BX*1), V1
	VMOVUPD (const_sumRK1*64)(R10)(BX*1), V2
	VMOVUPD (const_sumRK2*64)(R10)(BX*1), V3
	VMOVUPD (R12)(BX*1), V15
	MOVQ    BX, CX

edgeSlopeLoop:
	X(V15, V12, V13, V7)
	VMOVUPD (SI)(CX*1), V8
	VMOVUPD (DI)(CX*1), V9
	VMULPD  (R8)(CX*1), V9, V9
	VMULPD  V8, V9, V9
	VMULPD  V8, V8, V8
	VFMADD231PD V8, V9, V0
	VADDPD  V9, V1, V1
	VMULPD  V7, V9, V9
	VADDPD  V9, V2, V2
	VFMADD231PD V7, V9, V3
	NEXT(edgeSlopeLoop)

	VMOVUPD V0, (const_sumRC*64)(R10)(BX*1)
	VMOVUPD V1, (const_sumRK0*64)(R10)(BX*1)
	VMOVUPD V2, (const_sumRK1*64)(R10)(BX*1)
	VMOVUPD V3, (const_sumRK2*64)(R10)(BX*1)
	END(edgeSlopeHalf)

// func peak(s *kernelSums, w, k, g, h []float64, l *kernelLine)
// adds the sums from sumCC to sumCK2.
TEXT PEAK, NOSPLIT, $0-112
	MOVQ s+0(FP), R10
	MOVQ w_base+8(FP), DI
	MOVQ k_base+32(FP), R8
	MOVQ g_base+56(FP), R9
	MOVQ h_base+80(FP), SI
	MOVQ l+104(FP), R11
	START(w_len+16(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelLine_x0(R11), V12
	VBROADCASTSD kernelLine_dx(R11), V13

peakHalf:
	VMOVUPD (const_sumCC*64)(R10)(BX*1), V0
	VMOVUPD (const_sumC0*64)(R10)(BX*1), V1
	VMOVUPD (const_sumC1*64)(R10)(BX*1), V2
	VMOVUPD (const_sumGC*64)(R10)(BX*1), V3
	VMOVUPD (const_sumCH0*64)(R10)(BX*1), V4
	VMOVUPD (const_sumCH1*64)(R10)(BX*1), V5
	VMOVUPD (const_sumCH2*64)(R10)(BX*1), V6
	VMOVUPD (const_sumCK0*64)(R10)(BX*1), V7
	VMOVUPD (const_sumCK1*64)(R10)(BX*1), V8
	VMOVUPD (const_sumCK2*64)(R10)(BX*1), V9
	VMOVUPD (R12)(BX*1), V15
	MOVQ    BX, CX

peakLoop:
	X(V15, V12, V13, V10)
	VMOVUPD (R8)(CX*1), V11
	VMULPD  V11, V11, V14
	VMULPD  V11, V14, V14
	VMULPD  (DI)(CX*1), V14, V11
	VFMADD231PD V14, V11, V0
	VADDPD  V11, V1, V1
	VFMADD231PD V10, V11, V2
	VFMADD231PD (R9)(CX*1), V11, V3
	VMULPD  (SI)(CX*1), V11, V14
	VADDPD  V14, V4, V4
	VMULPD  V10, V14, V14
	VADDPD  V14, V5, V5
	VFMADD231PD V10, V14, V6
	VMULPD  (R8)(CX*1), V11, V11
	VADDPD  V11, V7, V7
	VMULPD  V10, V11, V11
	VADDPD  V11, V8, V8
	VFMADD231PD V10, V11, V9
	NEXT(peakLoop)

	VMOVUPD V0, (const_sumCC*64)(R10)(BX*1)
	VMOVUPD V1, (const_sumC0*64)(R10)(BX*1)
	VMOVUPD V2, (const_sumC1*64)(R10)(BX*1)
	VMOVUPD V3, (const_sumGC*64)(R10)(BX*1)
	VMOVUPD V4, (const_sumCH0*64)(R10)(BX*1)
	VMOVUPD V5, (const_sumCH1*64)(R10)(BX*1)
	VMOVUPD V6, (const_sumCH2*64)(R10)(BX*1)
	VMOVUPD V7, (const_sumCK0*64)(R10)(BX*1)
	VMOVUPD V8, (const_sumCK1*64)(R10)(BX*1)
	VMOVUPD V9, (const_sumCK2*64)(R10)(BX*1)
	END(peakHalf)

// func rootCross(s *kernelSums, w, k, g, h []float64, l *kernelLine)
// adds the sums from sumGK0 to sumHK4.
TEXT ROOTCROSS, NOSPLIT, $0-112
	MOVQ s+0(FP), R10
	MOVQ w_base+8(FP), DI
	MOVQ k_base+32(FP), R8
	MOVQ g_base+56(FP), R9
	MOVQ h_base+80(FP), SI
	MOVQ l+104(FP), R11
	START(w_len+16(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelLine_x0(R11), V12
	VBROADCASTSD kernelLine_dx(R11), V13

rootHalf:
	VMOVUPD (const_sumGK0*64)(R10)(BX*1), V0
	VMOVUPD (const_sumGK1*64)(R10)(BX*1), V1
	VMOVUPD (const_sumGK2*64)(R10)(BX*1), V2
	VMOVUPD (const_sumHK0*64)(R10)(BX*1), V3
	VMOVUPD (const_sumHK1*64)(R10)(BX*1), V4
	VMOVUPD (const_sumHK2*64)(R10)(BX*1), V5
	VMOVUPD (const_sumHK3*64)(R10)(BX*1), V6
	VMOVUPD (const_sumHK4*64)(R10)(BX*1), V7
	VMOVUPD (R12)(BX*1), V15
	MOVQ    BX, CX

rootLoop:
	X(V15, V12, V13, V8)
	VMOVUPD (R8)(CX*1), V9
	VMULPD  (DI)(CX*1), V9, V9
	VMULPD  (R9)(CX*1), V9, V10
	VADDPD  V10, V0, V0
	VMULPD  V8, V10, V10
	VADDPD  V10, V1, V1
	VFMADD231PD V8, V10, V2
	VMULPD  V8, V8, V11
	VMULPD  (SI)(CX*1), V9, V9
	VMULPD  V8, V9, V10
	VADDPD  V9, V3, V3
	VADDPD  V10, V4, V4
	VFMADD231PD V11, V9, V5
	VFMADD231PD V11, V10, V6
	VMULPD  V11, V9, V9
	VFMADD231PD V11, V9, V7
	NEXT(rootLoop)

	VMOVUPD V0, (const_sumGK0*64)(R10)(BX*1)
	VMOVUPD V1, (const_sumGK1*64)(R10)(BX*1)
	VMOVUPD V2, (const_sumGK2*64)(R10)(BX*1)
	VMOVUPD V3, (const_sumHK0*64)(R10)(BX*1)
	VMOVUPD V4, (const_sumHK1*64)(R10)(BX*1)
	VMOVUPD V5, (const_sumHK2*64)(R10)(BX*1)
	VMOVUPD V6, (const_sumHK3*64)(R10)(BX*1)
	VMOVUPD V7, (const_sumHK4*64)(R10)(BX*1)
	END(rootHalf)

// func weigh(w, sigma []float64)
TEXT WEIGH, NOSPLIT, $0-48
	MOVQ w_base+0(FP), DI
	MOVQ sigma_base+24(FP), SI
	START(w_len+8(FP))
	VMOVUPD ONE, V1

weighHalf:
	MOVQ BX, CX

weighLoop:
	VMOVUPD (SI)(CX*1), V0
	VMULPD  V0, V0, V0
	VDIVPD  V0, V1, V0
	VMOVUPD V0, (DI)(CX*1)
	NEXT(weighLoop)
	END(weighHalf)

// EVENODD leaves the even and the odd numbers of two registers from p on in even and odd,
// in an order that INORDER mends.
#define EVENODD(p, even, odd) \
	VMOVUPD (p)(CX*2), V15 \
	VMOVUPD SECOND(p)(CX*2), odd \
	VUNPCKLPD odd, V15, even \
	VUNPCKHPD odd, V15, odd

// func halve(w, d, w0, d0, w1, d1 []float64)
TEXT HALVE, NOSPLIT, $0-144
	MOVQ w_base+0(FP), DI
	MOVQ d_base+24(FP), SI
	MOVQ w0_base+48(FP), R8
	MOVQ d0_base+72(FP), R9
	MOVQ w1_base+96(FP), R10
	MOVQ d1_base+120(FP), R11
	START(w_len+8(FP))
	VMOVUPD WIDE(const_wideLeastWeight), V13
	ORDER

halveHalf:
	MOVQ BX, CX

halveLoop:
	EVENODD(R8, V0, V1)
	EVENODD(R9, V2, V3)
	EVENODD(R10, V4, V5)
	EVENODD(R11, V6, V7)
	VMULPD  V4, V6, V6
	VFMADD231PD V0, V2, V6
	VMULPD  V5, V7, V7
	VFMADD231PD V1, V3, V7
	VADDPD  V7, V6, V6
	VADDPD  V4, V0, V0
	VADDPD  V5, V1, V1
	VADDPD  V1, V0, V0
	VMAXPD  V13, V0, V1
	VDIVPD  V1, V6, V6
	INORDER(V0)
	INORDER(V6)
	VMOVUPD V0, (DI)(CX*1)
	VMOVUPD V6, (SI)(CX*1)
	NEXT(halveLoop)
	END(halveHalf)
