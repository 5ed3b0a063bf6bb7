#include "textflag.h"

// func absoluteAVX2(sum *[16]float64, a, b *float32, blocks int)
// Four accumulators of four float64 lanes each; no fused operations, so that
// the sums have the bits of the plain form.
TEXT ·absoluteAVX2(SB), NOSPLIT, $0-32
	MOVQ sum+0(FP), DX
	MOVQ a+8(FP), SI
	MOVQ b+16(FP), DI
	MOVQ blocks+24(FP), CX

	VPCMPEQD Y15, Y15, Y15
	VPSRLD   $1, Y15, Y15 // clears the sign of a float32

	VMOVUPD (DX), Y0
	VMOVUPD 32(DX), Y1
	VMOVUPD 64(DX), Y2
	VMOVUPD 96(DX), Y3

loop:
	VMOVUPS (SI), Y4
	VMOVUPS 32(SI), Y5
	VSUBPS  (DI), Y4, Y4
	VSUBPS  32(DI), Y5, Y5
	VANDPS  Y15, Y4, Y4
	VANDPS  Y15, Y5, Y5

	VEXTRACTF128 $1, Y4, X6
	VEXTRACTF128 $1, Y5, X7
	VCVTPS2PD    X4, Y4
	VCVTPS2PD    X6, Y6
	VCVTPS2PD    X5, Y5
	VCVTPS2PD    X7, Y7
	VADDPD       Y4, Y0, Y0
	VADDPD       Y6, Y1, Y1
	VADDPD       Y5, Y2, Y2
	VADDPD       Y7, Y3, Y3

	ADDQ $64, SI
	ADDQ $64, DI
	DECQ CX
	JNZ  loop

	VMOVUPD Y0, (DX)
	VMOVUPD Y1, 32(DX)
	VMOVUPD Y2, 64(DX)
	VMOVUPD Y3, 96(DX)
	VZEROUPPER
	RET
