#include "textflag.h"

// func distances(dst, norm, across, u *float32, blocks, dim int)
TEXT ·distances(SB), NOSPLIT, $0-48
	MOVQ dst+0(FP), DI
	MOVQ norm+8(FP), SI
	MOVQ across+16(FP), BX
	MOVQ u+24(FP), DX
	MOVQ blocks+32(FP), CX
	MOVQ dim+40(FP), R8

block:
	MOVUPS (SI), X0
	MOVUPS 16(SI), X1
	MOVUPS 32(SI), X2
	MOVUPS 48(SI), X3
	MOVUPS 64(SI), X4
	MOVUPS 80(SI), X5
	MOVUPS 96(SI), X6
	MOVUPS 112(SI), X7
	XORQ R9, R9

number:
	MOVL (DX)(R9*4), AX
	ADDL AX, AX          // without its sign, 0 for either zero
	JZ   next
	MOVSS  (DX)(R9*4), X8
	SHUFPS $0, X8, X8
	MOVUPS (BX), X9
	MOVUPS 16(BX), X10
	MOVUPS 32(BX), X11
	MOVUPS 48(BX), X12
	MULPS  X8, X9
	MULPS  X8, X10
	MULPS  X8, X11
	MULPS  X8, X12
	ADDPS  X9, X0
	ADDPS  X10, X1
	ADDPS  X11, X2
	ADDPS  X12, X3
	MOVUPS 64(BX), X9
	MOVUPS 80(BX), X10
	MOVUPS 96(BX), X11
	MOVUPS 112(BX), X12
	MULPS  X8, X9
	MULPS  X8, X10
	MULPS  X8, X11
	MULPS  X8, X12
	ADDPS  X9, X4
	ADDPS  X10, X5
	ADDPS  X11, X6
	ADDPS  X12, X7

next:
	ADDQ $128, BX
	INCQ R9
	CMPQ R9, R8
	JLT  number

	MOVUPS X0, (DI)
	MOVUPS X1, 16(DI)
	MOVUPS X2, 32(DI)
	MOVUPS X3, 48(DI)
	MOVUPS X4, 64(DI)
	MOVUPS X5, 80(DI)
	MOVUPS X6, 96(DI)
	MOVUPS X7, 112(DI)
	ADDQ   $128, SI
	ADDQ   $128, DI
	DECQ   CX
	JNZ    block
	RET

// func decays(dst *float32, add float32, n int, series *[10]float32)
// series is gauss.
TEXT ·decays(SB), NOSPLIT, $0-32
	MOVQ dst+0(FP), DI
	MOVSS add+8(FP), X15
	SHUFPS $0, X15, X15
	MOVQ n+16(FP), CX
	MOVQ series+24(FP), SI
	MOVSS  (SI), X14
	SHUFPS $0, X14, X14
	MOVSS  4(SI), X13
	SHUFPS $0, X13, X13
	MOVSS  8(SI), X12
	SHUFPS $0, X12, X12
	MOVSS  12(SI), X11
	SHUFPS $0, X11, X11
	MOVSS  16(SI), X10
	SHUFPS $0, X10, X10
	MOVSS  20(SI), X9
	SHUFPS $0, X9, X9
	MOVSS  24(SI), X8
	SHUFPS $0, X8, X8
	MOVSS  28(SI), X7
	SHUFPS $0, X7, X7
	MOVSS  32(SI), X6
	SHUFPS $0, X6, X6
	MOVSS  36(SI), X5 // 1: the coefficient of r⁰, and less the sign that of r
	SHUFPS $0, X5, X5

four:
	MOVUPS (DI), X0
	ADDPS  X15, X0
	XORPS  X1, X1
	MAXPS  X1, X0        // 0 for NaN as well
	MOVAPS X0, X4
	CMPPS  X14, X4, $2   // all ones where y ≤ last
	MULPS  X13, X0       // t = y/ln 2
	MOVAPS X0, X1
	ADDPS  X12, X1
	CVTTPS2PL X1, X1     // n = ⌊t + ½⌋
	CVTPL2PS X1, X2
	SUBPS  X2, X0
	MULPS  X11, X0       // r = (t − n)·ln 2
	MOVAPS X10, X2
	MULPS  X0, X2
	ADDPS  X9, X2
	MULPS  X0, X2
	ADDPS  X8, X2
	MULPS  X0, X2
	ADDPS  X7, X2
	MULPS  X0, X2
	ADDPS  X6, X2
	MULPS  X0, X2
	SUBPS  X5, X2
	MULPS  X0, X2
	ADDPS  X5, X2
	PSLLL  $23, X1       // 2⁻ⁿ: n off the exponent of what the series gives
	PSUBL  X1, X2
	ANDPS  X4, X2
	MOVUPS X2, (DI)
	ADDQ   $16, DI
	SUBQ   $4, CX
	JGT    four
	RET
