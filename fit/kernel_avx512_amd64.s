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

#include "kernel_amd64.h"

// func blocks512(run []densitySums, w, d []float64)
TEXT ·blocks512(SB), NOSPLIT, $0-72
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

	// The sums over the lanes in the order of lanes.total: neighbours, pairs, halves.
	VUNPCKLPD Z1, Z0, Z6
	VUNPCKHPD Z1, Z0, Z7
	VADDPD    Z7, Z6, Z6
	VUNPCKLPD Z3, Z2, Z7
	VUNPCKHPD Z3, Z2, Z8
	VADDPD    Z8, Z7, Z7
	VUNPCKLPD Z5, Z4, Z8
	VUNPCKHPD Z5, Z4, Z9
	VADDPD    Z9, Z8, Z8
	VSHUFF64X2 $0x88, Z7, Z6, Z0
	VSHUFF64X2 $0xDD, Z7, Z6, Z1
	VADDPD     Z1, Z0, Z0
	VSHUFF64X2 $0x88, Z10, Z8, Z2
	VSHUFF64X2 $0xDD, Z10, Z8, Z3
	VADDPD     Z3, Z2, Z2
	VSHUFF64X2 $0x88, Z2, Z0, Z4
	VSHUFF64X2 $0xDD, Z2, Z0, Z5
	VADDPD     Z5, Z4, Z4
	VADDPD     Z4, Z11, Z11
	ADDQ       $64, R8
	VMOVUPD    Z11, (R8)
	CMPQ CX, DX
	JLT  block
	VZEROUPPER
	RET
