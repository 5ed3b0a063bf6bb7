#include "textflag.h"

// func rowsAVX2(next, current, own, previous, diagonal *float32, start *int, col *int32, off *float32, rows, twice int)
// A row of 16 float32 lanes is held in two registers. Products and sums are
// rounded one by one, as in rowsPlain.
TEXT ·rowsAVX2(SB), NOSPLIT, $0-80
	MOVQ next+0(FP), DI
	MOVQ current+8(FP), SI
	MOVQ own+16(FP), R8
	MOVQ previous+24(FP), R9
	MOVQ diagonal+32(FP), R10
	MOVQ start+40(FP), R11
	MOVQ col+48(FP), R12
	MOVQ off+56(FP), R13
	MOVQ rows+64(FP), CX
	MOVQ twice+72(FP), DX
	MOVQ (R11), AX        // entry k

row:
	ADDQ  $8, R11
	MOVQ  (R11), BX       // end of the row
	VXORPS Y0, Y0, Y0
	VXORPS Y1, Y1, Y1
	TESTQ R10, R10
	JZ    entries
	VBROADCASTSS (R10), Y2
	VMULPS (R8), Y2, Y0
	VMULPS 32(R8), Y2, Y1
	ADDQ  $4, R10

entries:
	CMPQ  AX, BX
	JGE   done

entry:
	MOVLQSX (R12)(AX*4), R15
	SHLQ  $6, R15
	VBROADCASTSS (R13)(AX*4), Y2
	VMULPS (SI)(R15*1), Y2, Y3
	VMULPS 32(SI)(R15*1), Y2, Y4
	VADDPS Y3, Y0, Y0
	VADDPS Y4, Y1, Y1
	INCQ  AX
	CMPQ  AX, BX
	JLT   entry

done:
	TESTQ DX, DX
	JZ    store
	VADDPS Y0, Y0, Y0
	VADDPS Y1, Y1, Y1
	VSUBPS (R9), Y0, Y0
	VSUBPS 32(R9), Y1, Y1

store:
	VMOVUPS Y0, (DI)
	VMOVUPS Y1, 32(DI)
	ADDQ  $64, DI
	ADDQ  $64, R8
	ADDQ  $64, R9
	DECQ  CX
	JNZ   row
	VZEROUPPER
	RET

// func addScaledAVX2(dst, x *float32, c float32, blocks int)
TEXT ·addScaledAVX2(SB), NOSPLIT, $0-32
	MOVQ dst+0(FP), DI
	MOVQ x+8(FP), SI
	VBROADCASTSS c+16(FP), Y2
	MOVQ blocks+24(FP), CX

block:
	VMULPS (SI), Y2, Y0
	VMULPS 32(SI), Y2, Y1
	VADDPS (DI), Y0, Y0
	VADDPS 32(DI), Y1, Y1
	VMOVUPS Y0, (DI)
	VMOVUPS Y1, 32(DI)
	ADDQ  $64, SI
	ADDQ  $64, DI
	DECQ  CX
	JNZ   block
	VZEROUPPER
	RET
