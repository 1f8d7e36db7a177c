// Kernels of the pass over counts, in the frame of kernel_amd64.h, after
// kernel_light_scalar.go operation by operation.

// LIGHT is a constant of the light at l for the lanes that are run.
#define LIGHT(field) field(R13)(BX*1)

// FRACTION splits e^−x: the power of two in the low bits of t, y and its square y2.
#define FRACTION(x, t, y, y2) \
	VMOVUPD WIDE(const_wideExpMagic), t \
	VFMADD231PD WIDE(const_wideMinusLog2E), x, t \
	VSUBPD  WIDE(const_wideExpMagic), t, y \
	VFMADD213PD x, LN2, y \
	VMULPD  y, y, y2 \
	VPSLLQ  $52, t, t

// LINE leaves c1·y + c0 in a, the coefficients being those from i on.
#define LINE(i, y, a) \
	VMOVUPD WIDE(i+1), a \
	VFMADD213PD WIDE(i), y, a

// EXP leaves e^−x in e, EXPROUGH nearly so.
#define EXP(x, e, t, y, y2, b, c, d) \
	FRACTION(x, t, y, y2) \
	LINE(const_wideExp+6, y, d) \
	LINE(const_wideExp+4, y, c) \
	LINE(const_wideExp+2, y, b) \
	LINE(const_wideExp+0, y, e) \
	VFMADD231PD WIDE(const_wideExp+8), y2, d \
	VFMADD231PD y2, b, e \
	VFMADD231PD y2, d, c \
	VMULPD  y2, y2, y2 \
	VFMADD231PD y2, c, e \
	VPADDQ  t, e, e

#define EXPROUGH(x, e, t, y, y2, b, c) \
	FRACTION(x, t, y, y2) \
	LINE(const_wideRough+4, y, c) \
	LINE(const_wideRough+2, y, b) \
	LINE(const_wideRough+0, y, e) \
	VFMADD231PD y2, c, b \
	VFMADD231PD y2, b, e \
	VPADDQ  t, e, e

#define LN2 V14

// ABSORBED stores what the law gives, from e^−u in e, ∂u/∂d in v and s in s.
#define ABSORBED(e, v, s, a, m) \
	VMOVUPD LIGHT(kernelLight_pass), a \
	VMULPD  a, e, m \
	VMULPD  v, m, m \
	VFMADD213PD LIGHT(kernelLight_stray), a, e \
	VFMADD213PD LIGHT(kernelLight_stray), m, s \
	VMOVUPD e, (DI)(CX*1) \
	VMOVUPD s, (SI)(CX*1) \
	VMOVUPD m, (R8)(CX*1) \
	VMULPD  (R9)(CX*1), m, a \
	VMOVUPD a, (R9)(CX*1) \
	VMULPD  (R10)(CX*1), m, a \
	VMOVUPD a, (R10)(CX*1)

// DEPTH leaves d − u − s + q in r.
#define DEPTH(d, u, s, q, r) \
	VSUBPD u, d, r \
	VSUBPD s, r, r \
	VADDPD q, r, r

// func absorb(t, c, d, g, h, s []float64, l *kernelLight)
TEXT ABSORB, NOSPLIT, $0-152
	MOVQ t_base+0(FP), DI
	MOVQ c_base+24(FP), SI
	MOVQ d_base+48(FP), R8
	MOVQ g_base+72(FP), R9
	MOVQ h_base+96(FP), R10
	MOVQ s_base+120(FP), R11
	MOVQ l+144(FP), R13
	START(t_len+8(FP))
	VMOVUPD WIDE(const_wideLn2), LN2

absorbHalf:
	VMOVUPD LIGHT(kernelLight_k), V15
	MOVQ    BX, CX

absorbStart:
	VMULPD  (R11)(CX*1), V15, V1
	VMULPD  LIGHT(kernelLight_sat), V1, V1
	VMULPD  LIGHT(kernelLight_step), V15, V15
	VMOVUPD (R8)(CX*1), V0
	VMINPD  WIDE(const_wideAbsorbMost), V0, V0
	VMOVUPD WIDE(const_wideBend), V2
	VFMSUB213PD ONE, V0, V2
	VSUBPD  V1, V2, V2
	VMULPD  WIDE(const_wideBend4), V0, V3
	VFMADD231PD V2, V2, V3
	VSQRTPD V3, V3
	VADDPD  V3, V2, V3
	VMULPD  WIDE(const_wideBendInv2), V3, V3
	VSUBPD  V1, V0, V2
	VMAXPD  V2, V3, V3
	VMOVUPD V0, (R8)(CX*1)
	VMOVUPD V1, (SI)(CX*1)
	VMOVUPD V3, (DI)(CX*1)
	NEXT(absorbStart)
	MOVQ    BX, CX

absorbStep:
	VMOVUPD (R8)(CX*1), V0
	VMOVUPD (SI)(CX*1), V1
	VMOVUPD (DI)(CX*1), V3
	EXPROUGH(V3, V5, V6, V7, V8, V9, V10)
	VMULPD  V5, V1, V6
	DEPTH(V0, V3, V1, V6, V7)
	VADDPD  ONE, V6, V8
	VMOVUPD WIDE(const_wideMinusThird), V9
	VFMADD231PD WIDE(const_wideTwoThirds), V6, V9
	VMULPD  V8, V8, V10
	VFNMADD231PD V9, V7, V10
	VMULPD  WIDE(const_wideHalf), V6, V9
	VFMADD213PD V10, V7, V9
	VMULPD  V7, V9, V9
	VMULPD  V10, V8, V8
	VDIVPD  V8, V9, V9
	VADDPD  V9, V3, V3
	VMOVUPD V3, (DI)(CX*1)
	NEXT(absorbStep)
	MOVQ    BX, CX

absorbEnd:
	VMOVUPD (R8)(CX*1), V0
	VMOVUPD (SI)(CX*1), V1
	VMOVUPD (DI)(CX*1), V3
	EXP(V3, V5, V6, V7, V8, V9, V10, V11)
	VMULPD  V5, V1, V6
	DEPTH(V0, V3, V1, V6, V7)
	VADDPD  ONE, V6, V8
	VMOVUPD ONE, V9
	VDIVPD  V8, V9, V8
	VMULPD  V8, V7, V7
	VMULPD  V8, V6, V6
	VMULPD  WIDE(const_wideHalf), V6, V9
	VMULPD  V7, V9, V9
	VFMADD213PD V7, V7, V9
	VMULPD  V9, V5, V7
	VMOVUPD ONE, V10
	VFNMADD231PD WIDE(const_wideHalf), V9, V10
	VFNMADD231PD V10, V7, V5
	VMULPD  V9, V6, V6
	VFMADD213PD V8, V8, V6
	VADDPD  ONE, V1, V1
	ABSORBED(V5, V6, V1, V7, V8)
	NEXT(absorbEnd)
	END(absorbHalf)

// func thin(t, c, d, g, h, s []float64, l *kernelLight)
TEXT THIN, NOSPLIT, $0-152
	MOVQ t_base+0(FP), DI
	MOVQ c_base+24(FP), SI
	MOVQ d_base+48(FP), R8
	MOVQ g_base+72(FP), R9
	MOVQ h_base+96(FP), R10
	MOVQ s_base+120(FP), R11
	MOVQ l+144(FP), R13
	START(t_len+8(FP))
	VMOVUPD ONE, V14

thinHalf:
	VMOVUPD LIGHT(kernelLight_k), V15
	MOVQ    BX, CX

thinLoop:
	VMULPD  (R11)(CX*1), V15, V1
	VMULPD  LIGHT(kernelLight_sat), V1, V1
	VMULPD  LIGHT(kernelLight_step), V15, V15
	VMOVUPD (R8)(CX*1), V0
	VADDPD  V14, V1, V2 // p
	VMOVUPD WIDE(const_wideMinusThird), V3
	VFMADD231PD WIDE(const_wideTwoThirds), V1, V3
	VMULPD  V2, V2, V4
	VFNMADD231PD V3, V0, V4 // b
	VMULPD  V4, V2, V3
	VDIVPD  V3, V14, V3 // w
	VMULPD  WIDE(const_wideHalf), V1, V5
	VFMADD213PD V4, V0, V5
	VMULPD  V0, V5, V5
	VMULPD  V3, V5, V5 // x
	VMOVUPD WIDE(const_wideSixth), V6
	VFMADD231PD WIDE(const_wideMinus24th), V5, V6
	VFMADD213PD WIDE(const_wideMinusHalf), V5, V6
	VFMADD213PD V14, V5, V6
	VMULPD  V5, V6, V6 // y
	VMULPD  V3, V4, V4 // v
	VMULPD  V4, V1, V5
	VMULPD  V6, V5, V5 // z
	VMOVAPD V5, V7
	VFMADD213PD V5, V5, V7
	VFMADD213PD V5, V5, V7
	VFMADD213PD V4, V4, V7
	VSUBPD  V6, V14, V6
	ABSORBED(V6, V7, V2, V8, V9)
	NEXT(thinLoop)
	END(thinHalf)

// func faint(t, c, d, g, h, s []float64, l *kernelLight)
TEXT FAINT, NOSPLIT, $0-152
	MOVQ t_base+0(FP), DI
	MOVQ c_base+24(FP), SI
	MOVQ d_base+48(FP), R8
	MOVQ g_base+72(FP), R9
	MOVQ h_base+96(FP), R10
	MOVQ s_base+120(FP), R11
	MOVQ l+144(FP), R13
	START(t_len+8(FP))
	VMOVUPD ONE, V14

faintHalf:
	VMOVUPD LIGHT(kernelLight_k), V15
	MOVQ    BX, CX

faintLoop:
	VMULPD  (R11)(CX*1), V15, V1
	VMULPD  LIGHT(kernelLight_sat), V1, V1
	VMULPD  LIGHT(kernelLight_step), V15, V15
	VADDPD  V14, V1, V2
	VDIVPD  V2, V14, V3 // w
	VMULPD  (R8)(CX*1), V3, V4 // x
	VMULPD  V3, V4, V5
	VMULPD  WIDE(const_wideMinusHalf), V5, V5
	VFMADD213PD V4, V4, V5 // y
	VMULPD  V3, V1, V6
	VMULPD  V5, V6, V6
	VFMADD213PD V3, V3, V6
	VSUBPD  V5, V14, V5
	ABSORBED(V5, V6, V2, V7, V8)
	NEXT(faintLoop)
	END(faintHalf)

// PIXEL leaves weight and weighted residual in w and e, the residual in r and its
// share in q, from κ in κ; the scale is in V15.
#define PIXEL(kappa, a, b, s, v, w, e, r, q, x, y) \
	VMOVUPD (b)(CX*1), w \
	VMOVUPD (a)(CX*1), r \
	VFNMADD231PD w, kappa, r \
	VMOVUPD (s)(CX*1), x \
	VMOVUPD LIGHT(kernelLight_read), e \
	VFMADD231PD LIGHT(kernelLight_shot), x, e \
	VMULPD  kappa, e, e \
	VMOVUPD ONE, x \
	VSUBPD  kappa, x, x \
	VMULPD  LIGHT(kernelLight_dark), x, y \
	VMOVUPD (v)(CX*1), q \
	VFMADD231PD e, kappa, q \
	VFMADD231PD y, x, q \
	VMOVUPD ONE, x \
	VDIVPD  q, x, x \
	VMULPD  x, r, q \
	VSUBPD  y, e, e \
	VFMADD231PD e, q, w \
	VMULPD  V15, w, w \
	VMULPD  q, w, e \
	VMULPD  w, w, w \
	VMULPD  x, w, w \
	VMULPD  LIGHT(kernelLight_step), V15, V15

// func compare(rr *lanes, w, e, t, a, b, s, v []float64, l *kernelLight)
TEXT COMPARE, NOSPLIT, $0-184
	MOVQ w_base+8(FP), DI
	MOVQ e_base+32(FP), SI
	MOVQ t_base+56(FP), R8
	MOVQ a_base+80(FP), R9
	MOVQ b_base+104(FP), R10
	MOVQ s_base+128(FP), R11
	MOVQ v_base+152(FP), R12
	MOVQ l+176(FP), R13
	START(w_len+16(FP))

compareHalf:
	MOVQ    rr+0(FP), AX
	VMOVUPD (AX)(BX*1), V0
	VMOVUPD LIGHT(kernelLight_k), V15
	MOVQ    BX, CX

compareLoop:
	VMULPD  (R8)(CX*1), V15, V1
	PIXEL(V1, R9, R10, R11, R12, V2, V3, V4, V5, V6, V7)
	VFMADD231PD V5, V4, V0
	VMOVUPD V2, (DI)(CX*1)
	VMOVUPD V3, (SI)(CX*1)
	NEXT(compareLoop)

	VMOVUPD V0, (AX)(BX*1)
	END(compareHalf)

// func bare(sum *passSums, a, b, s, v []float64, l *kernelLight, line *kernelLine)
TEXT BARE, NOSPLIT, $0-120
	MOVQ sum+0(FP), AX
	MOVQ a_base+8(FP), R9
	MOVQ b_base+32(FP), R10
	MOVQ s_base+56(FP), R11
	MOVQ v_base+80(FP), R12
	MOVQ l+104(FP), R13
	MOVQ line+112(FP), R8
	START(a_len+16(FP))
	LEAQ IOTA, DI
	VBROADCASTSD kernelLine_x0(R8), V13
	VBROADCASTSD kernelLine_dx(R8), V14

bareHalf:
	VMOVUPD (const_passRR*64)(AX)(BX*1), V0
	VMOVUPD (const_passRL0*64)(AX)(BX*1), V1
	VMOVUPD (const_passRL1*64)(AX)(BX*1), V2
	VMOVUPD (const_passLL0*64)(AX)(BX*1), V3
	VMOVUPD (const_passLL1*64)(AX)(BX*1), V4
	VMOVUPD (const_passLL2*64)(AX)(BX*1), V5
	VMOVUPD LIGHT(kernelLight_k), V15
	VMOVUPD (DI)(BX*1), V12
	MOVQ    BX, CX

bareLoop:
	PIXEL(V15, R9, R10, R11, R12, V6, V7, V8, V9, V10, V11)
	VFMADD231PD V9, V8, V0
	X(V12, V13, V14, V8)
	VADDPD  V7, V1, V1
	VFMADD231PD V8, V7, V2
	VADDPD  V6, V3, V3
	VMULPD  V8, V6, V6
	VADDPD  V6, V4, V4
	VFMADD231PD V8, V6, V5
	NEXT(bareLoop)

	VMOVUPD V0, (const_passRR*64)(AX)(BX*1)
	VMOVUPD V1, (const_passRL0*64)(AX)(BX*1)
	VMOVUPD V2, (const_passRL1*64)(AX)(BX*1)
	VMOVUPD V3, (const_passLL0*64)(AX)(BX*1)
	VMOVUPD V4, (const_passLL1*64)(AX)(BX*1)
	VMOVUPD V5, (const_passLL2*64)(AX)(BX*1)
	END(bareHalf)

// func tilt(s *passSums, w, e, g, h, c []float64, l *kernelLine)
TEXT TILT, NOSPLIT, $0-136
	MOVQ s+0(FP), R10
	MOVQ w_base+8(FP), DI
	MOVQ e_base+32(FP), R8
	MOVQ g_base+56(FP), R9
	MOVQ h_base+80(FP), SI
	MOVQ c_base+104(FP), R13
	MOVQ l+128(FP), R11
	START(w_len+16(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelLine_x0(R11), V12
	VBROADCASTSD kernelLine_dx(R11), V13

tiltHalf:
	VMOVUPD (const_passRL0*64)(R10)(BX*1), V0
	VMOVUPD (const_passRL1*64)(R10)(BX*1), V1
	VMOVUPD (const_passLL0*64)(R10)(BX*1), V2
	VMOVUPD (const_passLL1*64)(R10)(BX*1), V3
	VMOVUPD (const_passLL2*64)(R10)(BX*1), V4
	VMOVUPD (const_passRG*64)(R10)(BX*1), V5
	VMOVUPD (const_passRH0*64)(R10)(BX*1), V6
	VMOVUPD (const_passRH1*64)(R10)(BX*1), V7
	VMOVUPD (const_passRH2*64)(R10)(BX*1), V8
	VMOVUPD (R12)(BX*1), V15
	MOVQ    BX, CX

tiltLoop:
	X(V15, V12, V13, V9)
	VMOVUPD (R13)(CX*1), V10
	VMOVUPD (R8)(CX*1), V11
	VMULPD  V10, V11, V14
	VADDPD  V14, V0, V0
	VFMADD231PD V9, V14, V1
	VMULPD  (DI)(CX*1), V10, V14
	VMULPD  V10, V14, V14
	VADDPD  V14, V2, V2
	VMULPD  V9, V14, V14
	VADDPD  V14, V3, V3
	VFMADD231PD V9, V14, V4
	VFMADD231PD (R9)(CX*1), V11, V5
	VMULPD  (SI)(CX*1), V11, V11
	VADDPD  V11, V6, V6
	VMULPD  V9, V11, V11
	VADDPD  V11, V7, V7
	VFMADD231PD V9, V11, V8
	NEXT(tiltLoop)

	VMOVUPD V0, (const_passRL0*64)(R10)(BX*1)
	VMOVUPD V1, (const_passRL1*64)(R10)(BX*1)
	VMOVUPD V2, (const_passLL0*64)(R10)(BX*1)
	VMOVUPD V3, (const_passLL1*64)(R10)(BX*1)
	VMOVUPD V4, (const_passLL2*64)(R10)(BX*1)
	VMOVUPD V5, (const_passRG*64)(R10)(BX*1)
	VMOVUPD V6, (const_passRH0*64)(R10)(BX*1)
	VMOVUPD V7, (const_passRH1*64)(R10)(BX*1)
	VMOVUPD V8, (const_passRH2*64)(R10)(BX*1)
	END(tiltHalf)

// func lightCross(s *passSums, w, g, h, c []float64, l *kernelLine)
TEXT LIGHTCROSS, NOSPLIT, $0-112
	MOVQ s+0(FP), R10
	MOVQ w_base+8(FP), DI
	MOVQ g_base+32(FP), R9
	MOVQ h_base+56(FP), SI
	MOVQ c_base+80(FP), R8
	MOVQ l+104(FP), R11
	START(w_len+16(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelLine_x0(R11), V12
	VBROADCASTSD kernelLine_dx(R11), V13

lightCrossHalf:
	VMOVUPD (const_passGG*64)(R10)(BX*1), V0
	VMOVUPD (const_passGH0*64)(R10)(BX*1), V1
	VMOVUPD (const_passGH1*64)(R10)(BX*1), V2
	VMOVUPD (const_passGH2*64)(R10)(BX*1), V3
	VMOVUPD (const_passGL0*64)(R10)(BX*1), V4
	VMOVUPD (const_passGL1*64)(R10)(BX*1), V5
	VMOVUPD (R12)(BX*1), V15
	MOVQ    BX, CX

lightCrossLoop:
	X(V15, V12, V13, V7)
	VMOVUPD (R9)(CX*1), V8
	VMULPD  (DI)(CX*1), V8, V9
	VFMADD231PD V8, V9, V0
	VMULPD  (R8)(CX*1), V9, V8
	VADDPD  V8, V4, V4
	VFMADD231PD V7, V8, V5
	VMULPD  (SI)(CX*1), V9, V9
	VADDPD  V9, V1, V1
	VMULPD  V7, V9, V9
	VADDPD  V9, V2, V2
	VFMADD231PD V7, V9, V3
	NEXT(lightCrossLoop)

	VMOVUPD V0, (const_passGG*64)(R10)(BX*1)
	VMOVUPD V1, (const_passGH0*64)(R10)(BX*1)
	VMOVUPD V2, (const_passGH1*64)(R10)(BX*1)
	VMOVUPD V3, (const_passGH2*64)(R10)(BX*1)
	VMOVUPD V4, (const_passGL0*64)(R10)(BX*1)
	VMOVUPD V5, (const_passGL1*64)(R10)(BX*1)
	END(lightCrossHalf)

// func lightPowers(s *passSums, w, h, c []float64, l *kernelLine)
TEXT LIGHTPOWERS, NOSPLIT, $0-88
	MOVQ s+0(FP), R10
	MOVQ w_base+8(FP), DI
	MOVQ h_base+32(FP), SI
	MOVQ c_base+56(FP), R8
	MOVQ l+80(FP), R11
	START(w_len+16(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelLine_x0(R11), V12
	VBROADCASTSD kernelLine_dx(R11), V13

lightPowersHalf:
	VMOVUPD (const_passHL0*64)(R10)(BX*1), V0
	VMOVUPD (const_passHL1*64)(R10)(BX*1), V1
	VMOVUPD (const_passHL2*64)(R10)(BX*1), V2
	VMOVUPD (const_passHL3*64)(R10)(BX*1), V3
	VMOVUPD (const_passHH0*64)(R10)(BX*1), V4
	VMOVUPD (const_passHH1*64)(R10)(BX*1), V5
	VMOVUPD (const_passHH2*64)(R10)(BX*1), V6
	VMOVUPD (const_passHH3*64)(R10)(BX*1), V7
	VMOVUPD (const_passHH4*64)(R10)(BX*1), V8
	VMOVUPD (R12)(BX*1), V15
	MOVQ    BX, CX

lightPowersLoop:
	X(V15, V12, V13, V9)
	VMOVUPD (SI)(CX*1), V10
	VMULPD  (DI)(CX*1), V10, V10
	VMULPD  V9, V9, V11
	VMULPD  (R8)(CX*1), V10, V14
	VADDPD  V14, V0, V0
	VFMADD231PD V11, V14, V2
	VMULPD  V9, V14, V14
	VADDPD  V14, V1, V1
	VFMADD231PD V11, V14, V3
	VMULPD  (SI)(CX*1), V10, V10
	VMULPD  V9, V10, V14
	VADDPD  V10, V4, V4
	VADDPD  V14, V5, V5
	VFMADD231PD V11, V10, V6
	VFMADD231PD V11, V14, V7
	VMULPD  V11, V10, V10
	VFMADD231PD V11, V10, V8
	NEXT(lightPowersLoop)

	VMOVUPD V0, (const_passHL0*64)(R10)(BX*1)
	VMOVUPD V1, (const_passHL1*64)(R10)(BX*1)
	VMOVUPD V2, (const_passHL2*64)(R10)(BX*1)
	VMOVUPD V3, (const_passHL3*64)(R10)(BX*1)
	VMOVUPD V4, (const_passHH0*64)(R10)(BX*1)
	VMOVUPD V5, (const_passHH1*64)(R10)(BX*1)
	VMOVUPD V6, (const_passHH2*64)(R10)(BX*1)
	VMOVUPD V7, (const_passHH3*64)(R10)(BX*1)
	VMOVUPD V8, (const_passHH4*64)(R10)(BX*1)
	END(lightPowersHalf)

// func times(dst, v, w []float64)
TEXT TIMES, NOSPLIT, $0-72
	MOVQ dst_base+0(FP), DI
	MOVQ v_base+24(FP), SI
	MOVQ w_base+48(FP), R8
	START(dst_len+8(FP))

timesHalf:
	MOVQ BX, CX

timesLoop:
	VMOVUPD (SI)(CX*1), V0
	VMULPD  (R8)(CX*1), V0, V0
	VMOVUPD V0, (DI)(CX*1)
	NEXT(timesLoop)
	END(timesHalf)

// func shape(dst, g, h, k []float64, f *kernelShape, l *kernelLine)
TEXT SHAPE, NOSPLIT, $0-112
	MOVQ dst_base+0(FP), DI
	MOVQ g_base+24(FP), R9
	MOVQ h_base+48(FP), SI
	MOVQ k_base+72(FP), R8
	MOVQ f+96(FP), R10
	MOVQ l+104(FP), R11
	START(dst_len+8(FP))
	LEAQ IOTA, R12
	VBROADCASTSD kernelLine_x0(R11), V12
	VBROADCASTSD kernelLine_dx(R11), V13
	VBROADCASTSD kernelShape_g(R10), V0
	VBROADCASTSD (kernelShape_h+0)(R10), V1
	VBROADCASTSD (kernelShape_h+8)(R10), V2
	VBROADCASTSD (kernelShape_h+16)(R10), V3
	VBROADCASTSD (kernelShape_k+0)(R10), V4
	VBROADCASTSD (kernelShape_k+8)(R10), V5
	VBROADCASTSD (kernelShape_k+16)(R10), V6

shapeHalf:
	VMOVUPD (R12)(BX*1), V15
	MOVQ    BX, CX

shapeLoop:
	X(V15, V12, V13, V9)
	VMULPD  (R9)(CX*1), V0, V7
	VMOVAPD V1, V8
	VFMADD213PD V2, V9, V8
	VFMADD213PD V3, V9, V8
	VFMADD231PD (SI)(CX*1), V8, V7
	VMOVAPD V4, V8
	VFMADD213PD V5, V9, V8
	VFMADD213PD V6, V9, V8
	VFMADD231PD (R8)(CX*1), V8, V7
	VMOVUPD V7, (DI)(CX*1)
	NEXT(shapeLoop)
	END(shapeHalf)

// TAP adds the numbers at lo and hi, times the tap in V15.
#define TAP(v, o) \
	VMOVUPD o(R9), V14 \
	VADDPD  o(R10), V14, V14 \
	VFMADD231PD V15, V14, v

// func smear(dst, src []float64, at, step int, taps []float64)
TEXT SMEAR, NOSPLIT, $0-88
	MOVQ dst_base+0(FP), DI
	MOVQ dst_len+8(FP), DX
	SHLQ $3, DX
	MOVQ src_base+24(FP), SI
	MOVQ at+48(FP), CX
	LEAQ (SI)(CX*8), SI
	MOVQ step+56(FP), R8
	SHLQ $3, R8
	MOVQ taps_base+64(FP), R11
	MOVQ taps_len+72(FP), R12
	LEAQ (R11)(R12*8), R12 // end of the taps
	ADDQ DI, DX            // end of dst
	LEAQ -(4*VBYTES)(DX), R13
	CMPQ DI, R13
	JGT  smearOnes

smearFours:
	VBROADCASTSD (R11), V15
	VMULPD (0*VBYTES)(SI), V15, V0
	VMULPD (1*VBYTES)(SI), V15, V1
	VMULPD (2*VBYTES)(SI), V15, V2
	VMULPD (3*VBYTES)(SI), V15, V3
	MOVQ   SI, R9
	MOVQ   SI, R10
	LEAQ   8(R11), CX
	CMPQ   CX, R12
	JGE    smearFour

smearTap:
	SUBQ R8, R9
	ADDQ R8, R10
	VBROADCASTSD (CX), V15
	TAP(V0, 0*VBYTES)
	TAP(V1, 1*VBYTES)
	TAP(V2, 2*VBYTES)
	TAP(V3, 3*VBYTES)
	ADDQ $8, CX
	CMPQ CX, R12
	JLT  smearTap

smearFour:
	VMOVUPD V0, (0*VBYTES)(DI)
	VMOVUPD V1, (1*VBYTES)(DI)
	VMOVUPD V2, (2*VBYTES)(DI)
	VMOVUPD V3, (3*VBYTES)(DI)
	ADDQ $(4*VBYTES), SI
	ADDQ $(4*VBYTES), DI
	CMPQ DI, R13
	JLE  smearFours

smearOnes:
	CMPQ DI, DX
	JGE  smearEnd
	VBROADCASTSD (R11), V15
	VMULPD (SI), V15, V0
	MOVQ   SI, R9
	MOVQ   SI, R10
	LEAQ   8(R11), CX
	CMPQ   CX, R12
	JGE    smearOne

smearOneTap:
	SUBQ R8, R9
	ADDQ R8, R10
	VBROADCASTSD (CX), V15
	TAP(V0, 0)
	ADDQ $8, CX
	CMPQ CX, R12
	JLT  smearOneTap

smearOne:
	VMOVUPD V0, (DI)
	ADDQ $VBYTES, SI
	ADDQ $VBYTES, DI
	JMP  smearOnes

smearEnd:
	VZEROUPPER
	RET

// PRODUCT adds the products of the rows in V12 to V14 with the column at p.
#define PRODUCT(p, a, b, c) \
	VMOVUPD (p)(CX*1), V15 \
	VFMADD231PD V15, V12, a \
	VFMADD231PD V15, V13, b \
	VFMADD231PD V15, V14, c

// func products(s *productSums, rows, columns []float64, stride, n int)
TEXT PRODUCTS, NOSPLIT, $0-72
	MOVQ s+0(FP), R13
	MOVQ rows_base+8(FP), DI
	MOVQ columns_base+32(FP), R9
	MOVQ stride+56(FP), AX
	SHLQ $3, AX
	LEAQ (DI)(AX*1), SI
	LEAQ (SI)(AX*1), R8
	LEAQ (R9)(AX*1), R10
	LEAQ (R10)(AX*1), R11
	LEAQ (R11)(AX*1), R12
	START(n+64(FP))

productsHalf:
	VMOVUPD (0*64)(R13)(BX*1), V0
	VMOVUPD (1*64)(R13)(BX*1), V1
	VMOVUPD (2*64)(R13)(BX*1), V2
	VMOVUPD (3*64)(R13)(BX*1), V3
	VMOVUPD (4*64)(R13)(BX*1), V4
	VMOVUPD (5*64)(R13)(BX*1), V5
	VMOVUPD (6*64)(R13)(BX*1), V6
	VMOVUPD (7*64)(R13)(BX*1), V7
	VMOVUPD (8*64)(R13)(BX*1), V8
	VMOVUPD (9*64)(R13)(BX*1), V9
	VMOVUPD (10*64)(R13)(BX*1), V10
	VMOVUPD (11*64)(R13)(BX*1), V11
	MOVQ    BX, CX

productsLoop:
	VMOVUPD (DI)(CX*1), V12
	VMOVUPD (SI)(CX*1), V13
	VMOVUPD (R8)(CX*1), V14
	PRODUCT(R9, V0, V4, V8)
	PRODUCT(R10, V1, V5, V9)
	PRODUCT(R11, V2, V6, V10)
	PRODUCT(R12, V3, V7, V11)
	NEXT(productsLoop)

	VMOVUPD V0, (0*64)(R13)(BX*1)
	VMOVUPD V1, (1*64)(R13)(BX*1)
	VMOVUPD V2, (2*64)(R13)(BX*1)
	VMOVUPD V3, (3*64)(R13)(BX*1)
	VMOVUPD V4, (4*64)(R13)(BX*1)
	VMOVUPD V5, (5*64)(R13)(BX*1)
	VMOVUPD V6, (6*64)(R13)(BX*1)
	VMOVUPD V7, (7*64)(R13)(BX*1)
	VMOVUPD V8, (8*64)(R13)(BX*1)
	VMOVUPD V9, (9*64)(R13)(BX*1)
	VMOVUPD V10, (10*64)(R13)(BX*1)
	VMOVUPD V11, (11*64)(R13)(BX*1)
	END(productsHalf)
