#include "textflag.h"

// A row is eight float64, one a sample: two registers. Products and sums are
// rounded one by one, in the order of the plain forms.

// func forwardAVX2(b *row, start *int, to *int32, value *float64, first, end int)
TEXT ·forwardAVX2(SB), NOSPLIT, $0-48
	MOVQ b+0(FP), R8
	MOVQ start+8(FP), R9
	MOVQ to+16(FP), R10
	MOVQ value+24(FP), R11
	MOVQ first+32(FP), R12
	MOVQ end+40(FP), R13

row:
	CMPQ    R12, R13
	JGE     done
	MOVQ    (R9)(R12*8), AX
	MOVQ    8(R9)(R12*8), BX
	MOVQ    R12, CX
	SHLQ    $6, CX
	VMOVUPD (R8)(CX*1), Y0
	VMOVUPD 32(R8)(CX*1), Y1
	INCQ    R12
	CMPQ    AX, BX
	JGE     row

entry:
	MOVLQSX      (R10)(AX*4), DX
	SHLQ         $6, DX
	VBROADCASTSD (R11)(AX*8), Y2
	VMULPD       Y0, Y2, Y3
	VMULPD       Y1, Y2, Y4
	VADDPD       (R8)(DX*1), Y3, Y3
	VADDPD       32(R8)(DX*1), Y4, Y4
	VMOVUPD      Y3, (R8)(DX*1)
	VMOVUPD      Y4, 32(R8)(DX*1)
	INCQ         AX
	CMPQ         AX, BX
	JLT          entry
	JMP          row

done:
	VZEROUPPER
	RET

// func backwardAVX2(b *row, start *int, to *int32, value, inverse *float64, first, end int)
TEXT ·backwardAVX2(SB), NOSPLIT, $0-56
	MOVQ b+0(FP), R8
	MOVQ start+8(FP), R9
	MOVQ to+16(FP), R10
	MOVQ value+24(FP), R11
	MOVQ inverse+32(FP), SI
	MOVQ first+40(FP), R12
	MOVQ end+48(FP), R13

row:
	DECQ         R13
	CMPQ         R13, R12
	JLT          done
	MOVQ         (R9)(R13*8), AX
	MOVQ         8(R9)(R13*8), BX
	MOVQ         R13, CX
	SHLQ         $6, CX
	VBROADCASTSD (SI)(R13*8), Y2
	VMULPD       (R8)(CX*1), Y2, Y0
	VMULPD       32(R8)(CX*1), Y2, Y1
	CMPQ         AX, BX
	JGE          store

entry:
	MOVLQSX      (R10)(AX*4), DX
	SHLQ         $6, DX
	VBROADCASTSD (R11)(AX*8), Y2
	VMULPD       (R8)(DX*1), Y2, Y3
	VMULPD       32(R8)(DX*1), Y2, Y4
	VADDPD       Y3, Y0, Y0
	VADDPD       Y4, Y1, Y1
	INCQ         AX
	CMPQ         AX, BX
	JLT          entry

store:
	VMOVUPD Y0, (R8)(CX*1)
	VMOVUPD Y1, 32(R8)(CX*1)
	JMP     row

done:
	VZEROUPPER
	RET

// func productAVX2(dst, x *row, start *int, col *int32, value, diagonal *float64, first, end int)
TEXT ·productAVX2(SB), NOSPLIT, $0-64
	MOVQ dst+0(FP), DI
	MOVQ x+8(FP), R8
	MOVQ start+16(FP), R9
	MOVQ col+24(FP), R10
	MOVQ value+32(FP), R11
	MOVQ diagonal+40(FP), SI
	MOVQ first+48(FP), R12
	MOVQ end+56(FP), R13

row:
	CMPQ         R12, R13
	JGE          done
	MOVQ         (R9)(R12*8), AX
	MOVQ         8(R9)(R12*8), BX
	MOVQ         R12, CX
	SHLQ         $6, CX
	VBROADCASTSD (SI)(R12*8), Y2
	VMULPD       (R8)(CX*1), Y2, Y0
	VMULPD       32(R8)(CX*1), Y2, Y1
	INCQ         R12
	CMPQ         AX, BX
	JGE          store

entry:
	MOVLQSX      (R10)(AX*4), DX
	SHLQ         $6, DX
	VBROADCASTSD (R11)(AX*8), Y2
	VMULPD       (R8)(DX*1), Y2, Y3
	VMULPD       32(R8)(DX*1), Y2, Y4
	VSUBPD       Y3, Y0, Y0
	VSUBPD       Y4, Y1, Y1
	INCQ         AX
	CMPQ         AX, BX
	JLT          entry

store:
	VMOVUPD Y0, (DI)
	VMOVUPD Y1, 32(DI)
	ADDQ    $64, DI
	JMP     row

done:
	VZEROUPPER
	RET
