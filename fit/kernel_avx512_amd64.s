#include "go_asm.h"
#include "textflag.h"

// The kernels in 8 lanes, for processors with AVX-512F.

#define V0 Z0
#define V1 Z1
#define V2 Z2
#define V3 Z3
#define V4 Z4
#define V5 Z5
#define V6 Z6
#define V7 Z7
#define V8 Z8
#define V9 Z9
#define V10 Z10
#define V11 Z11
#define V12 Z12
#define V13 Z13
#define V14 Z14
#define V15 Z15
#define POR VPORQ
#define HALVES 1

#define FAR ·far512(SB)
#define NEAR ·near512(SB)
#define EDGE ·edge512(SB)
#define SLOPE ·slope512(SB)
#define CROSS ·cross512(SB)
#define POWERS ·powers512(SB)
#define EDGESLOPE ·edgeSlope512(SB)
#define PEAK ·peak512(SB)
#define ROOTCROSS ·rootCross512(SB)
#define WEIGH ·weigh512(SB)
#define HALVE ·halve512(SB)

#define SECOND 64
#define ORDER VMOVUPD WIDE(const_wideOrder), V14
#define INORDER(v) VPERMPD v, V14, v

#define ABSORB ·absorb512(SB)
#define THIN ·thin512(SB)
#define FAINT ·faint512(SB)
#define COMPARE ·compare512(SB)
#define BARE ·bare512(SB)
#define TILT ·tilt512(SB)
#define LIGHTCROSS ·lightCross512(SB)
#define LIGHTPOWERS ·lightPowers512(SB)
#define TIMES ·times512(SB)
#define SHAPE ·shape512(SB)
#define SMEAR ·smear512(SB)
#define PRODUCTS ·products512(SB)
#define VBYTES 64

#include "kernel_amd64.h"
#include "kernel_light_amd64.h"

// The sums over the lanes of eight registers, in the order of lanes.total: NEIGHBOURS
// interleaves the sums of neighbours from two registers, ACROSS those of the next ones,
// and the third ACROSS leaves eight totals in a.
#define NEIGHBOURS(a, b) \
	VUNPCKHPD b, a, Z14 \
	VUNPCKLPD b, a, a \
	VADDPD Z14, a, a

#define ACROSS(a, b) \
	VSHUFF64X2 $0xDD, b, a, Z14 \
	VSHUFF64X2 $0x88, b, a, a \
	VADDPD Z14, a, a

// func totals512(t []float64, s []lanes)
TEXT ·totals512(SB), NOSPLIT, $0-48
	MOVQ t_base+0(FP), DI
	MOVQ t_len+8(FP), DX
	MOVQ s_base+24(FP), SI
	VPXORQ Z10, Z10, Z10

total:
	VMOVUPD (SI), Z0
	VMOVUPD 64(SI), Z1
	VMOVUPD 128(SI), Z2
	VMOVUPD 192(SI), Z3
	VMOVUPD 256(SI), Z4
	VMOVUPD 320(SI), Z5
	VMOVUPD 384(SI), Z6
	VMOVUPD 448(SI), Z7
	VMOVUPD Z10, (SI)
	VMOVUPD Z10, 64(SI)
	VMOVUPD Z10, 128(SI)
	VMOVUPD Z10, 192(SI)
	VMOVUPD Z10, 256(SI)
	VMOVUPD Z10, 320(SI)
	VMOVUPD Z10, 384(SI)
	VMOVUPD Z10, 448(SI)
	NEIGHBOURS(Z0, Z1)
	NEIGHBOURS(Z2, Z3)
	NEIGHBOURS(Z4, Z5)
	NEIGHBOURS(Z6, Z7)
	ACROSS(Z0, Z2)
	ACROSS(Z4, Z6)
	ACROSS(Z0, Z4)
	VMOVUPD Z0, (DI)
	ADDQ $64, DI
	ADDQ $512, SI
	SUBQ $8, DX
	JGT  total
	VZEROUPPER
	RET

// func blocks512(run []densitySums, w, d []float64)
TEXT ·blocks512(SB), NOSPLIT, $0-72
	CONSTANTS
	MOVQ run_base+0(FP), R8
	MOVQ w_base+24(FP), DI
	MOVQ d_base+48(FP), SI
	MOVQ w_len+32(FP), DX
	SHLQ $3, DX
	XORQ CX, CX
	VMOVUPD IOTA, Z12
	VMOVUPD EIGHT, Z15
	VMOVUPD (R8), Z11
	VPXORQ  Z10, Z10, Z10

block:
	VMOVAPD Z10, Z0
	VMOVAPD Z10, Z1
	VMOVAPD Z10, Z2
	VMOVAPD Z10, Z3
	VMOVAPD Z10, Z4
	VMOVAPD Z10, Z5
	LEAQ (const_densityBlock*8)(CX), R9

group:
	VMOVUPD (DI)(CX*1), Z13
	VADDPD  Z13, Z0, Z0
	VMULPD  Z12, Z13, Z14
	VADDPD  Z14, Z1, Z1
	VFMADD231PD Z12, Z14, Z2
	VMOVUPD (SI)(CX*1), Z14
	VMULPD  Z14, Z13, Z13
	VADDPD  Z13, Z3, Z3
	VFMADD231PD Z12, Z13, Z4
	VFMADD231PD Z14, Z13, Z5
	VADDPD  Z15, Z12, Z12
	ADDQ $64, CX
	CMPQ CX, R9
	JLT  group

	NEIGHBOURS(Z0, Z1)
	NEIGHBOURS(Z2, Z3)
	NEIGHBOURS(Z4, Z5)
	ACROSS(Z0, Z2)
	ACROSS(Z4, Z10)
	ACROSS(Z0, Z4)
	VADDPD  Z0, Z11, Z11
	ADDQ    $64, R8
	VMOVUPD Z11, (R8)
	CMPQ CX, DX
	JLT  block
	VZEROUPPER
	RET
