#include "textflag.h"

// func dotDense(x []float32, w []float64) float64
TEXT ·dotDense(SB), NOSPLIT, $0-56
	MOVQ  x_base+0(FP), SI
	MOVQ  x_len+8(FP), CX
	MOVQ  w_base+24(FP), DI
	XORPS X0, X0
	XORPS X1, X1
	XORPS X2, X2
	XORPS X3, X3

eight:
	CMPQ     CX, $8
	JLT      two
	CVTPS2PD (SI), X4
	CVTPS2PD 8(SI), X5
	CVTPS2PD 16(SI), X6
	CVTPS2PD 24(SI), X7
	MOVUPD   (DI), X8
	MOVUPD   16(DI), X9
	MOVUPD   32(DI), X10
	MOVUPD   48(DI), X11
	MULPD    X8, X4
	MULPD    X9, X5
	MULPD    X10, X6
	MULPD    X11, X7
	ADDPD    X4, X0
	ADDPD    X5, X1
	ADDPD    X6, X2
	ADDPD    X7, X3
	ADDQ     $32, SI
	ADDQ     $64, DI
	SUBQ     $8, CX
	JMP      eight

two:
	CMPQ     CX, $2
	JLT      one
	CVTPS2PD (SI), X4
	MOVUPD   (DI), X8
	MULPD    X8, X4
	ADDPD    X4, X0
	ADDQ     $8, SI
	ADDQ     $16, DI
	SUBQ     $2, CX
	JMP      two

one:
	TESTQ    CX, CX
	JZ       sum
	CVTSS2SD (SI), X4
	MULSD    (DI), X4
	ADDSD    X4, X0

sum:
	ADDPD    X1, X0
	ADDPD    X3, X2
	ADDPD    X2, X0
	MOVAPD   X0, X1
	UNPCKHPD X1, X1
	ADDSD    X1, X0
	MOVSD    X0, ret+48(FP)
	RET

// func addDense(w []float64, t float64, x []float32)
TEXT ·addDense(SB), NOSPLIT, $0-56
	MOVQ     w_base+0(FP), DI
	MOVSD    t+24(FP), X15
	UNPCKLPD X15, X15
	MOVQ     x_base+32(FP), SI
	MOVQ     x_len+40(FP), CX

four:
	CMPQ     CX, $4
	JLT      rest
	CVTPS2PD (SI), X4
	CVTPS2PD 8(SI), X5
	MOVUPD   (DI), X8
	MOVUPD   16(DI), X9
	MULPD    X15, X4
	MULPD    X15, X5
	ADDPD    X4, X8
	ADDPD    X5, X9
	MOVUPD   X8, (DI)
	MOVUPD   X9, 16(DI)
	ADDQ     $16, SI
	ADDQ     $32, DI
	SUBQ     $4, CX
	JMP      four

rest:
	TESTQ    CX, CX
	JZ       done
	CVTSS2SD (SI), X4
	MULSD    X15, X4
	ADDSD    (DI), X4
	MOVSD    X4, (DI)
	ADDQ     $4, SI
	ADDQ     $8, DI
	DECQ     CX
	JMP      rest

done:
	RET
