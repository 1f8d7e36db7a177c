#include "go_asm.h"
#include "textflag.h"

// The kernels in 4 lanes at a time, for processors with AVX2 and FMA.

#define V0 Y0
#define V1 Y1
#define V2 Y2
#define V3 Y3
#define V4 Y4
#define V5 Y5
#define V6 Y6
#define V7 Y7
#define V8 Y8
#define V9 Y9
#define V10 Y10
#define V11 Y11
#define V12 Y12
#define V13 Y13
#define V14 Y14
#define V15 Y15
#define POR VPOR
#define HALVES 2

#define FAR ·far2(SB)
#define NEAR ·near2(SB)
#define EDGE ·edge2(SB)
#define SLOPE ·slope2(SB)
#define CROSS ·cross2(SB)
#define POWERS ·powers2(SB)
#define EDGESLOPE ·edgeSlope2(SB)
#define PEAK ·peak2(SB)
#define ROOTCROSS ·rootCross2(SB)
#define WEIGH ·weigh2(SB)
#define HALVE ·halve2(SB)

#define SECOND 32
#define ORDER
#define INORDER(v) VPERMPD $0xD8, v, v

#define ABSORB ·absorb2(SB)
#define THIN ·thin2(SB)
#define FAINT ·faint2(SB)
#define COMPARE ·compare2(SB)
#define BARE ·bare2(SB)
#define TILT ·tilt2(SB)
#define LIGHTCROSS ·lightCross2(SB)
#define LIGHTPOWERS ·lightPowers2(SB)
#define TIMES ·times2(SB)
#define SHAPE ·shape2(SB)
#define SMEAR ·smear2(SB)
#define PRODUCTS ·products2(SB)
#define VBYTES 32

#include "kernel_amd64.h"
#include "kernel_light_amd64.h"

// PAIR leaves in xa, which is the low half of al, the totals of two sums whose lanes are in
// al and ah, and bl and bh, in the order of lanes.total.
#define PAIR(al, bl, ah, bh, xa, xb) \
	VHADDPD bl, al, al \
	VEXTRACTF128 $1, al, X14 \
	VADDPD  X14, xa, xa \
	VHADDPD bh, ah, ah \
	VEXTRACTF128 $1, ah, X14 \
	VADDPD  X14, xb, xb \
	VADDPD  xb, xa, xa

#define RUNNING(x, offset) \
	VADDPD  offset(R8), x, x \
	VMOVUPD x, offset+64(R8)

// func totals2(t []float64, s []lanes)
TEXT ·totals2(SB), NOSPLIT, $0-48
	MOVQ t_base+0(FP), DI
	MOVQ t_len+8(FP), DX
	MOVQ s_base+24(FP), SI
	VXORPD Y10, Y10, Y10

total:
	VMOVUPD (SI), Y0
	VMOVUPD 32(SI), Y1
	VMOVUPD 64(SI), Y2
	VMOVUPD 96(SI), Y3
	VMOVUPD Y10, (SI)
	VMOVUPD Y10, 32(SI)
	VMOVUPD Y10, 64(SI)
	VMOVUPD Y10, 96(SI)
	PAIR(Y0, Y2, Y1, Y3, X0, X1)
	VMOVUPD X0, (DI)
	ADDQ $16, DI
	ADDQ $128, SI
	SUBQ $2, DX
	JGT  total
	VZEROUPPER
	RET

// HALFGROUP adds 4 pixels at the given offset to six sums.
#define HALFGROUP(o, a0, a1, a2, c0, c1, c2) \
	VMOVUPD o(DI)(CX*1), Y13 \
	VADDPD  Y13, a0, a0 \
	VMULPD  Y12, Y13, Y14 \
	VADDPD  Y14, a1, a1 \
	VFMADD231PD Y12, Y14, a2 \
	VMOVUPD o(SI)(CX*1), Y14 \
	VMULPD  Y14, Y13, Y13 \
	VADDPD  Y13, c0, c0 \
	VFMADD231PD Y12, Y13, c1 \
	VFMADD231PD Y14, Y13, c2 \
	VADDPD  Y15, Y12, Y12

// func blocks2(run []densitySums, w, d []float64)
TEXT ·blocks2(SB), NOSPLIT, $0-72
	CONSTANTS
	MOVQ run_base+0(FP), R8
	MOVQ w_base+24(FP), DI
	MOVQ d_base+48(FP), SI
	MOVQ w_len+32(FP), DX
	SHLQ $3, DX
	XORQ CX, CX
	VMOVUPD IOTA, Y12
	VMOVUPD EIGHT, Y15
	VMULPD  WIDE(const_wideHalf), Y15, Y15 // 4

block:
	VXORPD Y0, Y0, Y0
	VXORPD Y1, Y1, Y1
	VXORPD Y2, Y2, Y2
	VXORPD Y3, Y3, Y3
	VXORPD Y4, Y4, Y4
	VXORPD Y5, Y5, Y5
	VXORPD Y6, Y6, Y6
	VXORPD Y7, Y7, Y7
	VXORPD Y8, Y8, Y8
	VXORPD Y9, Y9, Y9
	VXORPD Y10, Y10, Y10
	VXORPD Y11, Y11, Y11
	LEAQ (const_densityBlock*8)(CX), R9

group:
	HALFGROUP(0, Y0, Y1, Y2, Y3, Y4, Y5)
	HALFGROUP(32, Y6, Y7, Y8, Y9, Y10, Y11)
	ADDQ $64, CX
	CMPQ CX, R9
	JLT  group

	PAIR(Y0, Y1, Y6, Y7, X0, X6)
	PAIR(Y2, Y3, Y8, Y9, X2, X8)
	PAIR(Y4, Y5, Y10, Y11, X4, X10)
	RUNNING(X0, 0)
	RUNNING(X2, 16)
	RUNNING(X4, 32)
	ADDQ $64, R8
	CMPQ CX, DX
	JLT  block
	VZEROUPPER
	RET
